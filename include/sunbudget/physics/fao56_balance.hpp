#pragma once

namespace sunbudget {

// Daily and hourly radiation balance of the FAO-56 and ASCE reference methods, in the papers' own units (deg
// C, kPa, MJ m-2) and with their own constants: sigma 4.903e-9 and 4.901e-9 MJ K-4 m-2 day-1, K = C + 273.16.
// For those who report by them; not to be mixed with the rest of the balance.
// source  Allen, Pereira, Raes & Smith 1998, FAO Irrigation and Drainage Paper 56; ASCE-EWRI 2005, The ASCE
//         Standardized Reference Evapotranspiration Equation (its constants and limits from memory)

/// Albedo of the grass reference, eq. 38.
inline constexpr double fao56_albedo = 0.23;

/// sigma T^4, Table 2.8 (the factor of 24 between them is the paper's).
[[nodiscard]] double fao56_emission_mj_m2_day(double celsius) noexcept;
[[nodiscard]] double fao56_emission_mj_m2_h(double celsius) noexcept;

/// Saturation vapour pressure, eq. 11.
[[nodiscard]] double fao56_saturation_kpa(double celsius) noexcept;
/// From the day's extremes of humidity in per cent, eq. 17.
[[nodiscard]] double fao56_vapour_pressure_kpa(double min_celsius, double max_celsius,
                                               double humidity_max, double humidity_min) noexcept;

/// Sunlight from hours of sunshine, eq. 35 with its usual constants 0.25 and 0.50.
[[nodiscard]] double fao56_sunshine_radiation(double sunshine_h, double daylight_h,
                                              double extraterrestrial) noexcept;
/// Sunlight from the range of temperature, eq. 50; `coefficient` 0.16 inland, 0.19 at a coast.
[[nodiscard]] double fao56_temperature_radiation(double min_celsius, double max_celsius,
                                                 double extraterrestrial,
                                                 double coefficient) noexcept;

/// Net longwave upwards, eq. 39: positive where the ground loses.
///
/// in      relative_sunlight  Rs/Rso; above 1 it counts as 1
[[nodiscard]] double fao56_net_longwave_mj_m2_day(double min_celsius, double max_celsius,
                                                  double vapour_kpa,
                                                  double relative_sunlight) noexcept;
[[nodiscard]] double fao56_net_longwave_mj_m2_h(double celsius, double vapour_kpa,
                                                double relative_sunlight) noexcept;
/// The same after ASCE 2005: Rs/Rso held within 0.3 and 1.
[[nodiscard]] double asce2005_net_longwave_mj_m2_day(double min_celsius, double max_celsius,
                                                     double vapour_kpa,
                                                     double relative_sunlight) noexcept;
[[nodiscard]] double asce2005_net_longwave_mj_m2_h(double celsius, double vapour_kpa,
                                                   double relative_sunlight) noexcept;

/// Net radiation, eqs. 38 and 40: (1 - albedo) * sunlight - net longwave.
[[nodiscard]] double fao56_net_radiation(double sunlight, double net_longwave_up,
                                         double albedo = fao56_albedo) noexcept;

/// Seasonal correction of solar time, eq. 32.
[[nodiscard]] double fao56_seasonal_correction_h(int day) noexcept;
/// The sun's hour angle, eq. 31. Longitudes in degrees WEST of Greenwich: of the clock's zone and of the place.
[[nodiscard]] double fao56_hour_angle_rad(double clock_h, double zone_west_deg,
                                          double place_west_deg, int day) noexcept;
/// Extraterrestrial radiation of an hour around that angle, eq. 28, 0 while the sun is down.
[[nodiscard]] double fao56_extraterrestrial_mj_m2_h(int day, double latitude_rad,
                                                    double hour_angle_rad) noexcept;

}  // namespace sunbudget
