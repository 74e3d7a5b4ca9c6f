#include "sunbudget/physics/fao56.hpp"

#include <cmath>
#include <numbers>

#include "sunbudget/physics/sun_day.hpp"

namespace sunbudget {

namespace {
// Every year has 365 days in these two equations.
double year_angle_rad(int day) noexcept {
    return 2 * std::numbers::pi / 365 * day;
}
}  // namespace

double fao56_clear_share(double height_m) noexcept {
    return 0.75 + 2e-5 * height_m;
}

double fao56_inverse_distance(int day) noexcept {
    return 1 + 0.033 * std::cos(year_angle_rad(day));
}

double fao56_declination_rad(int day) noexcept {
    return 0.409 * std::sin(year_angle_rad(day) - 1.39);
}

double fao56_extraterrestrial_mj_m2_day(int day, double latitude_rad) noexcept {
    constexpr double minutes_per_day = 1440;
    const double declination_rad = fao56_declination_rad(day);
    const double ws = sunset_hour_angle_rad(latitude_rad, declination_rad);
    const double mean_sine = ws * std::sin(latitude_rad) * std::sin(declination_rad) +
                             std::cos(latitude_rad) * std::cos(declination_rad) * std::sin(ws);
    return minutes_per_day / std::numbers::pi * fao56_solar_constant_mj_m2_min *
           fao56_inverse_distance(day) * mean_sine;
}

double fao56_daylight_h(int day, double latitude_rad) noexcept {
    return 24 / std::numbers::pi * sunset_hour_angle_rad(latitude_rad, fao56_declination_rad(day));
}

}  // namespace sunbudget
