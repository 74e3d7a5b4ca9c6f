#pragma once

#include <array>
#include <string_view>

#include "sunbudget/plan/plan.hpp"

namespace sunbudget {

// The words of the plan file for our enumerations, in their order.
inline constexpr std::array<std::string_view, 2> like_names{"surface", "elevation"};
inline constexpr std::array<std::string_view, 5> totals_names{"whole", "day", "month", "season",
                                                              "year"};
inline constexpr std::array<std::string_view, 2> format_names{"cog", "geotiff"};
inline constexpr std::array<std::string_view, 3> height_unit_names{"m", "ft", "us-ft"};
inline constexpr std::array<std::string_view, 2> slope_from_names{"elevation", "flat"};
inline constexpr std::array<std::string_view, 2> day_names{"all", "mid-month"};
inline constexpr std::array<std::string_view, 3> product_names{"auto", "surface-reflectance",
                                                               "top-of-atmosphere"};
inline constexpr std::array<std::string_view, 2> fill_names{"nodata", "cover"};
inline constexpr std::array<std::string_view, 2> implausible_names{"stop", "allow"};

constexpr const auto& names_for(LikeInput) {
    return like_names;
}
constexpr const auto& names_for(Totals) {
    return totals_names;
}
constexpr const auto& names_for(FileFormat) {
    return format_names;
}
constexpr const auto& names_for(HeightUnit) {
    return height_unit_names;
}
constexpr const auto& names_for(SlopeFrom) {
    return slope_from_names;
}
constexpr const auto& names_for(DayChoice) {
    return day_names;
}
constexpr const auto& names_for(ProductChoice) {
    return product_names;
}
constexpr const auto& names_for(FillFrom) {
    return fill_names;
}
constexpr const auto& names_for(Implausible) {
    return implausible_names;
}

}  // namespace sunbudget
