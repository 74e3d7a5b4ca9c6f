#include "sunbudget/physics/air_mass.hpp"

#include <cmath>

#include "sunbudget/base/units.hpp"

namespace sunbudget {

// Both powers take the angle in degrees although the sine takes radians.
double relative_air_mass(double apparent_elevation_rad) noexcept {
    const double elevation_deg = deg_from_rad(apparent_elevation_rad);
    return 1 / (std::sin(apparent_elevation_rad) +
                0.50572 * std::pow(elevation_deg + 6.07995, -1.6364));
}

double relative_air_mass_kasten1966(double elevation_rad) noexcept {
    const double elevation_deg = deg_from_rad(elevation_rad);
    return 1 / (std::sin(elevation_rad) + 0.15 * std::pow(elevation_deg + 3.885, -1.25));
}

double pressure_ratio(double height_m) noexcept {
    return std::exp(-height_m / 8434.5);
}

}  // namespace sunbudget
