#include "sunbudget/physics/fao56_balance.hpp"

#include <algorithm>
#include <cmath>
#include <numbers>

#include "sunbudget/physics/fao56.hpp"
#include "sunbudget/physics/sun_day.hpp"

namespace sunbudget {

namespace {

constexpr double zero_celsius_k = 273.16;  // the paper's
// MJ K-4 m-2 for a day and an hour.
constexpr double fao56_sigma_day = 4.903e-9, fao56_sigma_h = 2.043e-10;
constexpr double asce2005_sigma_day = 4.901e-9, asce2005_sigma_h = 2.042e-10;
constexpr double asce2005_least_relative_sunlight = 0.3;

double fourth_power_k(double celsius) noexcept {
    const double k = celsius + zero_celsius_k;
    return k * k * k * k;
}
double vapour_term(double vapour_kpa) noexcept {
    return 0.34 - 0.14 * std::sqrt(vapour_kpa);
}
double cloud_term(double relative_sunlight) noexcept {
    return 1.35 * relative_sunlight - 0.35;
}
double net_up(double emission, double vapour_kpa, double relative_sunlight) noexcept {
    return emission * vapour_term(vapour_kpa) * cloud_term(relative_sunlight);
}
double mean_fourth_power_k(double min_celsius, double max_celsius) noexcept {
    return (fourth_power_k(min_celsius) + fourth_power_k(max_celsius)) / 2;
}
double asce2005_limited(double relative_sunlight) noexcept {
    return std::clamp(relative_sunlight, asce2005_least_relative_sunlight, 1.0);
}

}  // namespace

double fao56_emission_mj_m2_day(double celsius) noexcept {
    return fao56_sigma_day * fourth_power_k(celsius);
}
double fao56_emission_mj_m2_h(double celsius) noexcept {
    return fao56_sigma_h * fourth_power_k(celsius);
}

double fao56_saturation_kpa(double celsius) noexcept {
    return 0.6108 * std::exp(17.27 * celsius / (celsius + 237.3));
}

double fao56_vapour_pressure_kpa(double min_celsius, double max_celsius, double humidity_max,
                                 double humidity_min) noexcept {
    return (fao56_saturation_kpa(min_celsius) * humidity_max / 100 +
            fao56_saturation_kpa(max_celsius) * humidity_min / 100) /
           2;
}

double fao56_sunshine_radiation(double sunshine_h, double daylight_h,
                                double extraterrestrial) noexcept {
    return (0.25 + 0.50 * sunshine_h / daylight_h) * extraterrestrial;
}

double fao56_temperature_radiation(double min_celsius, double max_celsius, double extraterrestrial,
                                   double coefficient) noexcept {
    return coefficient * std::sqrt(max_celsius - min_celsius) * extraterrestrial;
}

double fao56_net_longwave_mj_m2_day(double min_celsius, double max_celsius, double vapour_kpa,
                                    double relative_sunlight) noexcept {
    return net_up(fao56_sigma_day * mean_fourth_power_k(min_celsius, max_celsius), vapour_kpa,
                  std::min(relative_sunlight, 1.0));
}

double fao56_net_longwave_mj_m2_h(double celsius, double vapour_kpa,
                                  double relative_sunlight) noexcept {
    return net_up(fao56_emission_mj_m2_h(celsius), vapour_kpa, std::min(relative_sunlight, 1.0));
}

double asce2005_net_longwave_mj_m2_day(double min_celsius, double max_celsius, double vapour_kpa,
                                       double relative_sunlight) noexcept {
    return net_up(asce2005_sigma_day * mean_fourth_power_k(min_celsius, max_celsius), vapour_kpa,
                  asce2005_limited(relative_sunlight));
}

double asce2005_net_longwave_mj_m2_h(double celsius, double vapour_kpa,
                                     double relative_sunlight) noexcept {
    return net_up(asce2005_sigma_h * fourth_power_k(celsius), vapour_kpa,
                  asce2005_limited(relative_sunlight));
}

double fao56_net_radiation(double sunlight, double net_longwave_up, double albedo) noexcept {
    return (1 - albedo) * sunlight - net_longwave_up;
}

double fao56_seasonal_correction_h(int day) noexcept {
    const double b = 2 * std::numbers::pi * (day - 81) / 364;
    return 0.1645 * std::sin(2 * b) - 0.1255 * std::cos(b) - 0.025 * std::sin(b);
}

double fao56_hour_angle_rad(double clock_h, double zone_west_deg, double place_west_deg,
                            int day) noexcept {
    return std::numbers::pi / 12 *
           (clock_h + 0.06667 * (zone_west_deg - place_west_deg) +
            fao56_seasonal_correction_h(day) - 12);
}

double fao56_extraterrestrial_mj_m2_h(int day, double latitude_rad,
                                      double hour_angle_rad) noexcept {
    constexpr double half_hour_rad = std::numbers::pi / 24;
    constexpr double minutes_per_hour = 60;
    const double declination_rad = fao56_declination_rad(day);
    const double sunset_rad = sunset_hour_angle_rad(latitude_rad, declination_rad);
    const double begin_rad = std::clamp(hour_angle_rad - half_hour_rad, -sunset_rad, sunset_rad);
    const double end_rad = std::clamp(hour_angle_rad + half_hour_rad, -sunset_rad, sunset_rad);
    return 12 * minutes_per_hour / std::numbers::pi * fao56_solar_constant_mj_m2_min *
           fao56_inverse_distance(day) *
           ((end_rad - begin_rad) * std::sin(latitude_rad) * std::sin(declination_rad) +
            std::cos(latitude_rad) * std::cos(declination_rad) *
                (std::sin(end_rad) - std::sin(begin_rad)));
}

}  // namespace sunbudget
