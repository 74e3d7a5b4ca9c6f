#pragma once

#include <optional>
#include <string>
#include <string_view>

/// Pieces of written times that time.cpp, zone.cpp and instant.cpp share.
namespace sunbudget::detail {

/// Digits only, at most nine of them.
[[nodiscard]] std::optional<int> digits(std::string_view text) noexcept;
/// "07:05:00".
[[nodiscard]] std::string format_clock(double seconds_of_day);
/// "+02:00".
[[nodiscard]] std::string format_offset(double offset_s);
[[nodiscard]] std::optional<double> parse_offset(std::string_view text) noexcept;

}  // namespace sunbudget::detail
