#include "sunbudget/physics/sun_place.hpp"

#include <cmath>
#include <numbers>

namespace sunbudget {

namespace {

struct LocalVector {
    double east, north, up;
};

/// The observer's place seen from the Earth's centre, in equatorial radii, east being 0. North is
/// not 0 because the vertical misses the centre of a flattened Earth.
LocalVector observer(double latitude_rad, double height_m) noexcept {
    constexpr double radius_m = 6378137.0, flattening = 1 / 298.257223563;  // WGS84, EPSG:7030
    constexpr double e2 = flattening * (2 - flattening);
    const double s = std::sin(latitude_rad), c = std::cos(latitude_rad);
    const double w = std::sqrt(1 - e2 * s * s);
    return {0, -e2 * s * c / w, w + height_m / radius_m};
}

}  // namespace

Horizontal horizontal(const SunState& sun, double latitude_rad, double longitude_rad,
                      double height_m) noexcept {
    const double hour_angle_rad = sun.greenwich_hour_angle_rad + longitude_rad;
    const double sd = std::sin(sun.declination_rad), cd = std::cos(sun.declination_rad);
    const double sl = std::sin(latitude_rad), cl = std::cos(latitude_rad);
    const double ch = std::cos(hour_angle_rad);
    const auto place = observer(latitude_rad, height_m);
    const double parallax_rad = solar_parallax_rad / sun.distance_au;
    const double east = -cd * std::sin(hour_angle_rad);
    const double north = sd * cl - cd * sl * ch - parallax_rad * place.north;
    const double up = sd * sl + cd * cl * ch - parallax_rad * place.up;
    double azimuth_rad = std::atan2(east, north);
    if (azimuth_rad < 0) azimuth_rad += 2 * std::numbers::pi;
    return {std::atan2(up, std::hypot(east, north)), azimuth_rad};
}

double refraction(double elevation_rad, double pressure_hpa, double temperature_k) noexcept {
    // Upper limb on the refracted horizon: the sun's radius 0.26667 deg and 0.5667 deg of
    // refraction.
    constexpr double lowest_deg = -(0.26667 + 0.5667);
    const double elevation_deg = deg_from_rad(elevation_rad);
    if (elevation_deg < lowest_deg) return 0;
    const double temperature_celsius = temperature_k - 273.15;
    const double bent_deg =
        1.02 / (60 * std::tan(rad_from_deg(elevation_deg + 10.3 / (elevation_deg + 5.11))));
    return rad_from_deg(pressure_hpa / 1010 * 283 / (273 + temperature_celsius) * bent_deg);
}

}  // namespace sunbudget
