#pragma once

#include <cmath>

#include "sunbudget/physics/sun.hpp"

namespace sunbudget {

/// A direction in the sky of a place.
struct Horizontal {
    double elevation_rad;  ///< [-pi/2, pi/2]
    double azimuth_rad;    ///< clockwise from true north, [0, 2 pi)
};

/// The sun's parallax at 1 au, rad: 8.794 arc seconds (Reda & Andreas 2004, eq. 33).
inline constexpr double solar_parallax_rad = rad_from_deg(8.794 / 3600);

/// Where the sun's centre stands in the sky of a place, with parallax, without refraction.
///
/// in      latitude_rad geodetic [-pi/2, pi/2], longitude_rad east positive, height_m above the
///         WGS84 ellipsoid
/// out     azimuth has no meaning within 1e-6 rad of zenith and nadir, nor at the poles themselves,
/// where
///         north is taken along the given longitude's meridian
/// errors  none; NaN in gives NaN out
/// source  rotation to local east, north, up; the observer's place on WGS84 (EPSG:7030) taken off
[[nodiscard]] Horizontal horizontal(const SunState& sun, double latitude_rad, double longitude_rad,
                                    double height_m = 0) noexcept;

/// A unit vector fixed to the Earth: x to latitude 0, longitude 0; y to 90 E; z to the north pole.
struct EarthVector {
    double x, y, z;
};

[[nodiscard]] inline double dot(const EarthVector& a, const EarthVector& b) noexcept {
    return a.x * b.x + a.y * b.y + a.z * b.z;
}

/// The geodetic vertical of a place; also the point under the sun, as latitude and longitude.
[[nodiscard]] inline EarthVector up_direction(double latitude_rad, double longitude_rad) noexcept {
    const double c = std::cos(latitude_rad);
    return {c * std::cos(longitude_rad), c * std::sin(longitude_rad), std::sin(latitude_rad)};
}
[[nodiscard]] inline EarthVector sun_direction(const SunState& sun) noexcept {
    return up_direction(sun.declination_rad, -sun.greenwich_hour_angle_rad);
}

/// Sine of the geocentric elevation lowered by parallax: sin h - p (1 - sin^2 h) / R.
/// Within 3e-7 of horizontal(): what the flattening of the Earth does to parallax is left out.
[[nodiscard]] inline double with_parallax(double sin_geocentric, double distance_au) noexcept {
    return sin_geocentric -
           solar_parallax_rad / distance_au * (1 - sin_geocentric * sin_geocentric);
}

/// Sine of the sun's elevation at a place, with parallax, without refraction: the fast form. For
/// many places and one sun keep the two directions and use dot and with_parallax.
[[nodiscard]] inline double sin_elevation(const SunState& sun, double latitude_rad,
                                          double longitude_rad) noexcept {
    return with_parallax(dot(sun_direction(sun), up_direction(latitude_rad, longitude_rad)),
                         sun.distance_au);
}

/// How much higher than it is the sun appears, rad.
///
/// in      elevation_rad true; pressure_hpa of the place; temperature_k of its air
/// out     0 for a sun wholly below the horizon (true elevation under -0.8334 deg): the formula
/// means
///         nothing there
/// errors  none; NaN in gives NaN out
/// source  Reda & Andreas 2004, eq. 42 (after Saemundsson 1986); good to 0.001 deg above 15 deg and
/// about
///         0.01 deg at the horizon in average air (common practice)
[[nodiscard]] double refraction(double elevation_rad, double pressure_hpa = 1013.25,
                                double temperature_k = 288.15) noexcept;

}  // namespace sunbudget
