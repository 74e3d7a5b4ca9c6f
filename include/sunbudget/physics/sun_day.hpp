#pragma once

#include <functional>
#include <optional>
#include <vector>

#include "sunbudget/physics/sun.hpp"

namespace sunbudget {

struct TimeSpan {
    UtcSeconds begin;
    UtcSeconds end;
};

/// The parts of [begin, end) in which `height` is above zero, in order.
///
/// in      height: smooth, at most one turning point in any 90 minutes, defined up to half an hour
///         outside the span: the sine of a sun's elevation less that of a threshold
/// out     borders found to 0.1 ms; grazing passes above or below zero are found down to a height
/// of 1e-7 errors  what `height` throws
[[nodiscard]] std::vector<TimeSpan> spans_above_zero(
    const std::function<double(UtcSeconds)>& height, UtcSeconds begin, UtcSeconds end);

/// One day of the sun at a place.
struct SunDay {
    std::optional<UtcSeconds> sunrise;  ///< the first passage upwards
    std::optional<UtcSeconds> transit;  ///< hour angle 0; the first
    std::optional<UtcSeconds>
        sunset;               ///< the last passage downwards; before sunrise if the day starts lit
    double day_length_s = 0;  ///< all time above the threshold
    bool always_up = false;
    bool always_down = false;
};

/// Thresholds for sun_day: the geometric centre, and the almanac's upper limb with mean refraction
/// (50 arc minutes: 34 of refraction, 16 of radius).
inline constexpr double geometric_horizon_rad = 0;
inline constexpr double almanac_horizon_rad = rad_from_deg(-0.8333);

/// Sunrise, transit and sunset in [begin, end), a day of some clock.
///
/// in      track covers the span; threshold_rad is compared with the geocentric elevation, as
/// almanacs
///         do (parallax would shift the times by about half a second)
/// out     always_up and always_down where the sun does not pass the threshold in the span
/// errors  none
[[nodiscard]] SunDay sun_day(const SunTrack& track, UtcSeconds begin, UtcSeconds end,
                             double latitude_rad, double longitude_rad,
                             double threshold_rad = geometric_horizon_rad);

/// Hour angle at which a sun of fixed declination sets: 0 in polar night, pi in polar day.
[[nodiscard]] double sunset_hour_angle_rad(double latitude_rad, double declination_rad) noexcept;

/// Extraterrestrial irradiation of a horizontal square metre over a day, J m-2, the sun's
/// declination and distance held: 86400/pi E0 (ws sin lat sin dec + cos lat cos dec sin ws). source
/// Duffie & Beckman, Solar Engineering of Thermal Processes, eq. 1.10.3
[[nodiscard]] double daily_extraterrestrial_j_m2(double extraterrestrial_normal_w_m2,
                                                 double latitude_rad,
                                                 double declination_rad) noexcept;

}  // namespace sunbudget
