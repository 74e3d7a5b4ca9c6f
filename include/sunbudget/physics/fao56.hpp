#pragma once

namespace sunbudget {

// Daily astronomy of FAO Irrigation and Drainage Paper 56 (Allen, Pereira, Raes & Smith 1998). Its
// declination is off by up to 1.1 deg in September: use it inside that method only.
// `day` is the day of the year, 1..366.

/// FAO-56's own solar constant, eq. 21.
inline constexpr double fao56_solar_constant_mj_m2_min = 0.0820;

/// The same in W m-2.
inline constexpr double fao56_solar_constant_w_m2 = fao56_solar_constant_mj_m2_min * 1e6 / 60;

/// Clear-sky global over extraterrestrial light on a horizontal plane at a height, eq. 37.
[[nodiscard]] double fao56_clear_share(double height_m) noexcept;

/// Inverse relative distance Earth-sun, eq. 23.
[[nodiscard]] double fao56_inverse_distance(int day) noexcept;
/// Solar declination, eq. 24.
[[nodiscard]] double fao56_declination_rad(int day) noexcept;
/// Daily extraterrestrial radiation on a horizontal plane, eq. 21, with eq. 25 held to polar day
/// and night.
[[nodiscard]] double fao56_extraterrestrial_mj_m2_day(int day, double latitude_rad) noexcept;
/// Daylight hours, eq. 34.
[[nodiscard]] double fao56_daylight_h(int day, double latitude_rad) noexcept;

}  // namespace sunbudget
