#pragma once

#include <algorithm>
#include <cmath>
#include <limits>

#include "sunbudget/base/plane.hpp"
#include "sunbudget/physics/direction.hpp"

namespace sunbudget::reference {

/// Height of the bilinear surface through the pixels' centres, in pixel coordinates; NaN outside
/// and where a pixel that counts has no ground.
inline double surface_m(const Plane<float>& height_m, double column, double row) {
    constexpr double none = std::numeric_limits<double>::quiet_NaN();
    const double left = std::floor(column);
    const double top = std::floor(row);
    const double right_share = column - left;
    const double bottom_share = row - top;
    const auto part = [&](double c, double r, double share) {
        if (share == 0) return 0.0;
        if (c < 0 || r < 0 || c >= height_m.width() || r >= height_m.height()) return none;
        return share * static_cast<double>(height_m.at(static_cast<int>(c), static_cast<int>(r)));
    };
    return part(left, top, (1 - right_share) * (1 - bottom_share)) +
           part(left + 1, top, right_share * (1 - bottom_share)) +
           part(left, top + 1, (1 - right_share) * bottom_share) +
           part(left + 1, top + 1, right_share * bottom_share);
}

/// Rise of the pixel's own plane (Horn's window, whole) for a step of the direction.
inline double own_plane_rise_m(const Plane<float>& height_m, int column, int row,
                               const Direction& direction) {
    const auto at = [&](int c, int r) {
        return static_cast<double>(height_m.at(column + c, row + r));
    };
    const double per_column =
        (at(1, -1) + 2 * at(1, 0) + at(1, 1)) - (at(-1, -1) + 2 * at(-1, 0) + at(-1, 1));
    const double per_row =
        (at(-1, 1) + 2 * at(0, 1) + at(1, 1)) - (at(-1, -1) + 2 * at(0, -1) + at(1, -1));
    return (per_column * direction.column_step + per_row * direction.row_step) / 8;
}

/// Tangent of the greatest elevation angle of the surface along a direction, by walking there in
/// small steps; nothing clever, double precision, no lower bound.
inline double ray_tangent(const Plane<float>& height_m, int column, int row,
                          const Direction& direction, const Sight& sight, double step = 0.25) {
    const auto eye = static_cast<double>(height_m.at(column, row));
    double best = -std::numeric_limits<double>::infinity();
    for (int i = 2;; ++i) {
        const double steps = i * step;
        const double distance_m = steps * direction.step_m;
        const double c = column + steps * direction.column_step;
        const double r = row + steps * direction.row_step;
        if (distance_m > sight.reach_m || c < -1 || r < -1 || c > height_m.width() ||
            r > height_m.height())
            return best;
        const double ground = surface_m(height_m, c, r) - curvature_drop_m(distance_m, sight);
        if (ground == ground) best = std::max(best, (ground - eye) / distance_m);
    }
}

}  // namespace sunbudget::reference
