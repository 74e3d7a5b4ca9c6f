#pragma once

#include <cstddef>
#include <cstdint>
#include <filesystem>
#include <span>
#include <string>

#include "sunbudget/base/error.hpp"

namespace sunbudget {

/// What went wrong with a file we write, with the system's reason and the space left on its disk.
[[nodiscard]] Error output_error(const std::filesystem::path& file, const std::string& what,
                                 int system_error);

/// A file of ours, written at given places. Safe to use from many threads.
///
/// errors  every function throws Error(output): what failed, the system's reason, the path, the
///         bytes free there. A failed sync is final: the file is no longer to be trusted.
class OutputFile {
  public:
    /// A new file. Whatever stands at that name, a link included, is left alone and is an error.
    [[nodiscard]] static OutputFile create(const std::filesystem::path& file);
    /// An existing regular file, not through a link.
    [[nodiscard]] static OutputFile open(const std::filesystem::path& file, bool writable);

    OutputFile(OutputFile&& other) noexcept;
    OutputFile& operator=(OutputFile&& other) noexcept;
    ~OutputFile();

    void write(std::uint64_t offset, std::span<const std::byte> bytes);
    /// Fills `bytes`; an end of file before that is an error.
    void read(std::uint64_t offset, std::span<std::byte> bytes) const;
    [[nodiscard]] std::uint64_t size() const;
    void truncate(std::uint64_t size);
    /// Waits until the disk has it.
    void sync();
    void close();

    [[nodiscard]] const std::filesystem::path& path() const noexcept { return path_; }

  private:
    OutputFile(std::filesystem::path path, int descriptor);

    std::filesystem::path path_;
    int descriptor_ = -1;
};

}  // namespace sunbudget
