#include "sunbudget/physics/direction.hpp"

#include <algorithm>
#include <cmath>
#include <numbers>

namespace sunbudget {

namespace {
double snapped(double part) noexcept {
    if (std::abs(part) < 1e-12) return 0;
    if (std::abs(std::abs(part) - 1) < 1e-12) return std::copysign(1.0, part);
    return part;
}
}  // namespace

Direction direction_towards(const PixelMatrix& matrix, double azimuth_rad) noexcept {
    const auto back = inverse(matrix);
    const double east = std::sin(azimuth_rad);
    const double north = std::cos(azimuth_rad);
    const double column = back.column_per_east * east + back.column_per_north * north;
    const double row = back.row_per_east * east + back.row_per_north * north;
    const double larger = std::max(std::abs(column), std::abs(row));
    const Direction step{snapped(column / larger), snapped(row / larger), 0};
    return {step.column_step, step.row_step, length_of_m(matrix, step.column_step, step.row_step)};
}

double azimuth_of_rad(const PixelMatrix& matrix, double column_step, double row_step) noexcept {
    const double east = matrix.east_per_column * column_step + matrix.east_per_row * row_step;
    const double north = matrix.north_per_column * column_step + matrix.north_per_row * row_step;
    const double azimuth = std::atan2(east, north);
    return azimuth < 0 ? azimuth + 2 * std::numbers::pi : azimuth;
}

double length_of_m(const PixelMatrix& matrix, double column_step, double row_step) noexcept {
    return std::hypot(matrix.east_per_column * column_step + matrix.east_per_row * row_step,
                      matrix.north_per_column * column_step + matrix.north_per_row * row_step);
}

}  // namespace sunbudget
