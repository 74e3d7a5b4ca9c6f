#pragma once

#include <cstdint>
#include <optional>
#include <span>
#include <string>
#include <string_view>
#include <vector>

namespace sunbudget {

/// A decimal number as the whole of `text` ("3", "-0.5", "1e-3"), whatever the locale; nothing for
/// anything else, NaN and infinities included.
[[nodiscard]] std::optional<double> parse_number(std::string_view text) noexcept;
/// A decimal integer as the whole of `text`.
[[nodiscard]] std::optional<std::int64_t> parse_integer(std::string_view text) noexcept;
/// "512M", "2G", "1500K" or plain bytes; powers of 1024.
[[nodiscard]] std::optional<std::uint64_t> parse_bytes(std::string_view text) noexcept;

/// The shortest text that reads back as the same double.
[[nodiscard]] std::string shortest(double value);
/// "1.3 GB", "45 MB": for people, powers of 1000.
[[nodiscard]] std::string human_bytes(double bytes);

/// The candidate nearest to `name` by edits, if it is near enough to be a slip of the pen.
[[nodiscard]] std::optional<std::string> nearest_name(std::string_view name,
                                                      std::span<const std::string> candidates);
/// `did you mean "x"?`, or the list of candidates where none is near.
[[nodiscard]] std::string suggestion(std::string_view name,
                                     std::span<const std::string> candidates);

[[nodiscard]] std::string_view trimmed(std::string_view text) noexcept;
[[nodiscard]] std::vector<std::string> split(std::string_view text, char separator);
[[nodiscard]] std::string joined(std::span<const std::string> parts, std::string_view separator);
[[nodiscard]] std::string lower_case(std::string_view text);
/// Control characters as \xNN, so that a file name cannot steer a terminal.
[[nodiscard]] std::string printable(std::string_view text);

}  // namespace sunbudget
