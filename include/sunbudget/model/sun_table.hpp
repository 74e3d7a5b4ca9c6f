#pragma once

#include <optional>
#include <vector>

#include "sunbudget/model/light.hpp"
#include "sunbudget/physics/sun.hpp"

namespace sunbudget {

/// Where and under which sky `sunbudget sun` looks.
struct SunPlace {
    double latitude_rad = 0;
    double longitude_rad = 0;
    double height_m = 0;
    Sky sky;  ///< does not wait for the ground
    double slope_rad = 0;
    double slope_azimuth_rad = 0;  ///< downslope, clockwise from true north
    double ground_albedo = 0.2;    ///< of the ground that a slope sees
};

/// The sun and its clear-sky light at one moment.
struct SunMoment {
    UtcSeconds utc = 0;
    double elevation_rad = 0;  ///< true, of the sun's centre
    double elevation_refracted_rad = 0;
    double azimuth_rad = 0;  ///< clockwise from true north
    double distance_au = 1;
    std::optional<double> air_mass;    ///< relative; nothing with the sun below the horizon
    double extraterrestrial_w_m2 = 0;  ///< on a plane facing the sun
    double beam_w_m2 = 0;              ///< on a plane facing the sun
    double diffuse_w_m2 = 0;           ///< on the horizontal
    double global_w_m2 = 0;            ///< on the horizontal
    double on_slope_w_m2 = 0;  ///< direct, diffuse and reflected, per square metre of the slope
};

[[nodiscard]] SunMoment sun_moment(const SunPlace& place, const Zone& zone, UtcSeconds utc);

/// One day of a table. Times are nothing where the sun does not rise, set or pass the meridian.
struct SunDayRow {
    CivilDate date;
    std::optional<UtcSeconds> sunrise, transit, sunset;  ///< of the sun's centre, no refraction
    std::optional<UtcSeconds> sunrise_apparent,
        sunset_apparent;  ///< of its upper limb, with mean refraction
    double day_length_s = 0;
    double transit_elevation_rad = 0;  ///< true elevation at the transit
    double extraterrestrial_j_m2 = 0;  ///< horizontal
    double direct_j_m2 = 0;            ///< horizontal
    double diffuse_j_m2 = 0;
    double on_slope_j_m2 = 0;
};

/// Days [from, to], both included, light summed at `step_s`.
[[nodiscard]] std::vector<SunDayRow> sun_days(const SunPlace& place, const Zone& zone,
                                              CivilDate from, CivilDate to, double step_s);
/// Moments every `step_s` from the start of `from` to the end of `to`.
[[nodiscard]] std::vector<SunMoment> sun_moments(const SunPlace& place, const Zone& zone,
                                                 CivilDate from, CivilDate to, double step_s);

}  // namespace sunbudget
