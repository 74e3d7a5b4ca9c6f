#pragma once

#include "sunbudget/base/pixel_matrix.hpp"

namespace sunbudget {

/// A way to look from a pixel, in pixel space: the step whose larger part is exactly one pixel, and
/// its length on the ground.
struct Direction {
    double column_step = 0;
    double row_step = -1;
    double step_m = 1;
};

/// The direction of an azimuth where the matrix holds.
///
/// in      azimuth_rad  clockwise from true north, any finite value
/// errors  none; the matrix must have an inverse
/// note    parts within 1e-12 of 0 or 1 are made exactly so: the four sides and, on square pixels,
///         the four diagonals then fall on pixels and need no interpolation
[[nodiscard]] Direction direction_towards(const PixelMatrix& matrix, double azimuth_rad) noexcept;

/// Azimuth [0, 2 pi), clockwise from true north, of a step in pixel space, and its length.
[[nodiscard]] double azimuth_of_rad(const PixelMatrix& matrix, double column_step,
                                    double row_step) noexcept;
[[nodiscard]] double length_of_m(const PixelMatrix& matrix, double column_step,
                                 double row_step) noexcept;

/// How far a look reaches and how much the ground falls away from it.
struct Sight {
    double reach_m = 20000;
    /// IUGG mean radius R1 = (2 a + b) / 3 of the GRS80 and WGS84 ellipsoids, or the local radius.
    double earth_radius_m = 6371008.8;
    /// Share of the curvature that the bending of light takes back: 0.13, common practice in
    /// surveying; terrain.csv rows 080-094 also list 0 and 1/7.
    double refraction = 0.13;

    /// [1/m] The drop is this times the distance squared.
    [[nodiscard]] constexpr double drop_per_m2() const noexcept {
        return (1 - refraction) / (2 * earth_radius_m);
    }
};

/// How far ground `distance_m` away stands below the horizontal plane of the eye: d^2 (1 - k) / (2
/// R).
[[nodiscard]] constexpr double curvature_drop_m(double distance_m, const Sight& sight) noexcept {
    return distance_m * distance_m * sight.drop_per_m2();
}

}  // namespace sunbudget
