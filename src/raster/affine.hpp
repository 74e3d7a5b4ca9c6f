#pragma once

#include "sunbudget/raster/grid.hpp"

namespace sunbudget {

[[nodiscard]] inline double determinant(const Affine& a) noexcept {
    return a[1] * a[5] - a[2] * a[4];
}

/// (easting, northing) to (column, row), in place. The determinant may not be 0.
inline void to_pixels(const Affine& a, double& easting, double& northing) noexcept {
    const double x = easting - a[0];
    const double y = northing - a[3];
    const double d = determinant(a);
    easting = (x * a[5] - y * a[2]) / d;
    northing = (y * a[1] - x * a[4]) / d;
}

}  // namespace sunbudget
