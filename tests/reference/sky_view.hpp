#pragma once

#include <algorithm>
#include <cmath>
#include <numbers>

namespace sunbudget::reference {

/// Sky view after Dozier & Frew 1990 by plain summation in double precision. `elevation_rad(azimuth)`
/// gives the horizon of the terrain; the plane's own is added here.
template <typename Horizon>
double sky_view(Horizon elevation_rad, double slope_rad, double aspect_rad, int directions) {
    constexpr double quarter = std::numbers::pi / 2;
    double sum = 0;
    for (int d = 0; d < directions; ++d) {
        const double azimuth = 2 * std::numbers::pi * d / directions;
        const double plane = std::atan(-std::tan(slope_rad) * std::cos(azimuth - aspect_rad));
        const double h = quarter - std::max({0.0, plane, elevation_rad(azimuth)});
        sum +=
            std::cos(slope_rad) * std::sin(h) * std::sin(h) +
            std::sin(slope_rad) * std::cos(azimuth - aspect_rad) * (h - std::sin(h) * std::cos(h));
    }
    return sum / directions;
}

}  // namespace sunbudget::reference
