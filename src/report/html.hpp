#pragma once

#include <cstddef>
#include <span>
#include <string>
#include <string_view>
#include <utility>
#include <vector>

namespace sunbudget {

/// Text of plans, files and attributes made harmless between tags and in quoted attributes: markup signs as
/// entities, control characters and bytes that are no UTF-8 as U+FFFD.
[[nodiscard]] std::string escaped(std::string_view text);

[[nodiscard]] std::string base64(std::span<const std::byte> bytes);

/// A file that was embedded at build: "report.css".
[[nodiscard]] std::string_view report_file(std::string_view name);

/// Puts values in the places that a text marks by {{name}}; every mark must have one.
[[nodiscard]] std::string filled(std::string_view text,
                                 const std::vector<std::pair<std::string, std::string>>& values);

}  // namespace sunbudget
