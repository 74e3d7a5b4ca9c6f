#pragma once

#include <filesystem>
#include <string>
#include <vector>

namespace sunbudget {

/// The files of one run in one folder, made under hidden names and published together.
///
/// The folder is made if need be and locked (a kernel lock: a dead process holds none). Files are
/// made in a staging folder inside it; `publish` moves them to their names one after the other and
/// writes SHA256SUMS last; it is removed before anything else changes. So a folder with a matching
/// SHA256SUMS holds a complete set, and any other is unfinished. What was staged and not published is
/// removed with the object.
///
/// errors  Error(output): the folder cannot be made, written or locked (the holder is named), a file
///         cannot be moved or synced
class OutputSet {
  public:
    enum class Mark {
        checksums,  ///< a run: SHA256SUMS marks the set
        none,       ///< a single file of a one-line job
    };
    OutputSet(std::filesystem::path folder, Mark mark);
    ~OutputSet();
    OutputSet(const OutputSet&) = delete;
    OutputSet& operator=(const OutputSet&) = delete;

    [[nodiscard]] const std::filesystem::path& folder() const { return folder_; }
    /// Where a file of this set is made.
    [[nodiscard]] std::filesystem::path staged(const std::string& name) const;
    /// Moves the staged files to their names, in this order. Sidecars that GDAL left beside an older
    /// file of the same name (.aux.xml, .ovr, .msk) go, since they would speak of other pixels.
    void publish(const std::vector<std::string>& names);

  private:
    void lock();
    void remove_leftovers() const;
    void write_checksums(const std::vector<std::string>& names) const;

    std::filesystem::path folder_;
    std::filesystem::path staging_;
    Mark mark_;
    int folder_descriptor_ = -1;
    int lock_descriptor_ = -1;
    bool made_folder_ = false;
};

/// The file names that the SHA256SUMS of a folder lists, if every one of them is there; empty when
/// the set is not complete.
[[nodiscard]] std::vector<std::string> complete_set(const std::filesystem::path& folder);

/// Writes a small text file (run.json, a table) to the end of the disk. Throws Error(output).
void write_text_file(const std::filesystem::path& file, const std::string& text);

}  // namespace sunbudget
