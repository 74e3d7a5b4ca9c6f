#pragma once

#include <filesystem>
#include <string>

#include "sunbudget/base/error.hpp"

namespace sunbudget::test {

/// What somebody might put into a title, a file's name or a zone's id.
inline const std::string hostile =
    "<script>alert(1)</script>\"'><img src=http://example.org/x onerror=alert(2)>&\x01";

/// The report of an invented run of three months, a change among its layers, six zones, and `title` for its title,
/// inputs, change and notes. Layers and zones.csv are made in the folder and gone with the call.
[[nodiscard]] std::string invented_page(const std::filesystem::path& folder,
                                        const std::string& title, int width, int height);

}  // namespace sunbudget::test
