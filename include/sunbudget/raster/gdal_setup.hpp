#pragma once

#include <cstddef>
#include <cstdint>
#include <filesystem>
#include <string>
#include <vector>

namespace sunbudget {

/// Prepares GDAL and PROJ for this process; the first call counts, later ones set the cache only.
/// Call it before the first thread starts: it removes GDAL's variables from the environment.
///
/// - Only the drivers of `raster_drivers()` are known; VRT joins them when a file named .vrt is opened.
/// - Every file system of GDAL but memory is refused (network, archives), unless `allow_network`.
/// - Messages are kept per thread (GdalMessages), never printed.
/// - Nothing in the environment or in GDAL's own configuration files changes a result.
///
/// cache_bytes   GDAL's block cache, shared by all threads
void gdal_setup(std::uint64_t cache_bytes, bool allow_network = false);

/// The formats an input may have, by GDAL's short names.
[[nodiscard]] std::vector<std::string> raster_drivers();

/// "/vsi..." or "scheme://...".
[[nodiscard]] bool is_special_name(const std::filesystem::path& name);

/// Throws Error(input) for a special name, unless `allow_network` was given to gdal_setup, and for
/// "DRIVER:..." and text in place of a file's name.
void refuse_special_name(const std::filesystem::path& name);

/// What GDAL and PROJ complain about in this thread while the object lives. Objects nest; the
/// innermost one gets the messages. Each stays in the thread and the scope it was made in.
class GdalMessages {
  public:
    GdalMessages();
    ~GdalMessages();
    GdalMessages(const GdalMessages&) = delete;
    GdalMessages& operator=(const GdalMessages&) = delete;

    [[nodiscard]] bool failed() const noexcept { return failures_ > 0; }
    [[nodiscard]] std::size_t failures() const noexcept { return failures_; }
    /// The first failure's text, empty when there is none.
    [[nodiscard]] const std::string& first_failure() const noexcept { return first_failure_; }
    /// At most 20 of them, each once.
    [[nodiscard]] const std::vector<std::string>& warnings() const noexcept { return warnings_; }

    /// For the handler only.
    void add(bool failure, const char* text);

  private:
    GdalMessages* outer_;
    std::size_t failures_ = 0;
    std::string first_failure_;
    std::vector<std::string> warnings_;
};

}  // namespace sunbudget
