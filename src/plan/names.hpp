#pragma once

#include <array>
#include <string_view>

#include "sunbudget/plan/plan.hpp"

namespace sunbudget {

// The words of the plan file for our enumerations, in their order.
inline constexpr std::array<std::string_view, 2> like_names{"surface", "elevation"};
inline constexpr std::array<std::string_view, 6> totals_names{"whole", "hour",   "day",
                                                              "month", "season", "year"};
inline constexpr std::array<std::string_view, 2> format_names{"cog", "geotiff"};
inline constexpr std::array<std::string_view, 3> height_unit_names{"m", "ft", "us-ft"};
inline constexpr std::array<std::string_view, 2> slope_from_names{"elevation", "flat"};
inline constexpr std::array<std::string_view, 2> day_names{"all", "mid-month"};
inline constexpr std::array<std::string_view, 3> product_names{"auto", "surface-reflectance",
                                                               "top-of-atmosphere"};
inline constexpr std::array<std::string_view, 2> fill_names{"nodata", "cover"};
inline constexpr std::array<std::string_view, 2> implausible_names{"stop", "allow"};
inline constexpr std::array<std::string_view, 5> separator_names{"auto", "comma", "semicolon",
                                                                 "tab", "blanks"};
inline constexpr std::array<std::string_view, 2> decimal_names{"point", "comma"};
inline constexpr std::array<std::string_view, 2> header_names{"line", "none"};
inline constexpr std::array<std::string_view, 3> stamp_names{"start", "middle", "end"};
inline constexpr std::array<std::string_view, 2> years_names{"own", "typical"};
inline constexpr std::array<std::string_view, 2> gaps_names{"report", "stop"};

inline constexpr std::array<std::string_view, 2> emissivity_from_names{"cover", "ndvi"};
inline constexpr std::array<std::string_view, 1> surface_table_names{"table"};
inline constexpr std::array<std::string_view, 1> surface_product_names{"landsat-c2"};
inline constexpr std::array<std::string_view, 2> raster_covers_names{"instant", "period-mean"};
inline constexpr std::array<std::string_view, 1> heat_source_names{"balance"};
inline constexpr std::array<std::string_view, 3> wind_names{"low", "medium", "high"};
inline constexpr std::array<std::string_view, 2> pressure_at_names{"station", "sea-level"};

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
constexpr const auto& names_for(Separator) {
    return separator_names;
}
constexpr const auto& names_for(DecimalSign) {
    return decimal_names;
}
constexpr const auto& names_for(HeaderChoice) {
    return header_names;
}
constexpr const auto& names_for(Stamp) {
    return stamp_names;
}
constexpr const auto& names_for(Years) {
    return years_names;
}
constexpr const auto& names_for(Gaps) {
    return gaps_names;
}
constexpr const auto& names_for(EmissivityFrom) {
    return emissivity_from_names;
}
constexpr const auto& names_for(SurfaceTable) {
    return surface_table_names;
}
constexpr const auto& names_for(SurfaceProduct) {
    return surface_product_names;
}
constexpr const auto& names_for(RasterCovers) {
    return raster_covers_names;
}
constexpr const auto& names_for(HeatSource) {
    return heat_source_names;
}
constexpr const auto& names_for(WindCase) {
    return wind_names;
}
constexpr const auto& names_for(PressureAt) {
    return pressure_at_names;
}

}  // namespace sunbudget
