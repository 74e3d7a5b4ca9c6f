#include "sunbudget/physics/gradient.hpp"

#include <cassert>
#include <cmath>
#include <limits>
#include <numbers>

#include "sunbudget/base/simd.hpp"

namespace sunbudget {

namespace {

/// `value`, or the other one where it is missing.
inline float or_else(float value, float other) noexcept {
    return value == value ? value : other;
}

SUNBUDGET_CLONES
void horn_row(const float* above, const float* centre, const float* below,
              float* __restrict per_column, float* __restrict per_row, std::size_t width) noexcept {
    for (std::size_t i = 0; i < width; ++i) {
        const float e = centre[i + 1];
        const float north = or_else(above[i + 1], or_else(2 * e - below[i + 1], e));
        const float south = or_else(below[i + 1], 2 * e - north);
        const float west = or_else(centre[i], or_else(2 * e - centre[i + 2], e));
        const float east = or_else(centre[i + 2], 2 * e - west);
        // The diagonals' differences first: heights cancel before anything is rounded twice.
        const float northwest = or_else(above[i], north + (west - e));
        const float northeast = or_else(above[i + 2], north + (east - e));
        const float southwest = or_else(below[i], south + (west - e));
        const float southeast = or_else(below[i + 2], south + (east - e));
        // A hole itself must stay one, whatever its neighbours.
        const float scale = e == e ? 0.125F : e;
        const float falling = southeast - northwest;
        const float rising = northeast - southwest;
        per_column[i] = (falling + rising + 2 * (east - west)) * scale;
        per_row[i] = (falling - rising + 2 * (south - north)) * scale;
    }
}

struct Slopes {
    float column_per_east, column_per_north, row_per_east, row_per_north;
};

SUNBUDGET_CLONES
void normal_row(const float* per_column, const float* per_row, Slopes first, Slopes step,
                float* __restrict east, float* __restrict north, float* __restrict up,
                std::size_t width) noexcept {
    for (std::size_t i = 0; i < width; ++i) {
        const auto at = static_cast<float>(static_cast<int>(i));
        const float rise_east =
            per_column[i] * (first.column_per_east + at * step.column_per_east) +
            per_row[i] * (first.row_per_east + at * step.row_per_east);
        const float rise_north =
            per_column[i] * (first.column_per_north + at * step.column_per_north) +
            per_row[i] * (first.row_per_north + at * step.row_per_north);
        const float scale =
            1.0F / std::sqrt(1.0F + (rise_east * rise_east + rise_north * rise_north));
        east[i] = -rise_east * scale;
        north[i] = -rise_north * scale;
        up[i] = scale;
    }
}

}  // namespace

void horn_gradient(std::span<const float> above, std::span<const float> centre,
                   std::span<const float> below, std::span<float> per_column,
                   std::span<float> per_row) noexcept {
    const std::size_t width = per_column.size();
    assert(per_row.size() == width && centre.size() == width + 2);
    assert(above.size() == width + 2 && below.size() == width + 2);
    horn_row(above.data(), centre.data(), below.data(), per_column.data(), per_row.data(), width);
}

void surface_normals(std::span<const float> per_column, std::span<const float> per_row,
                     const InversePixelMatrix& first, const InversePixelMatrix& last,
                     std::span<float> east, std::span<float> north, std::span<float> up) noexcept {
    const std::size_t width = per_column.size();
    assert(per_row.size() == width && east.size() == width && north.size() == width);
    assert(up.size() == width);
    const double share = width > 1 ? 1.0 / static_cast<double>(width - 1) : 0.0;
    const auto slope = [share](double from, double to) {
        return static_cast<float>((to - from) * share);
    };
    const Slopes start{
        static_cast<float>(first.column_per_east), static_cast<float>(first.column_per_north),
        static_cast<float>(first.row_per_east), static_cast<float>(first.row_per_north)};
    const Slopes step{slope(first.column_per_east, last.column_per_east),
                      slope(first.column_per_north, last.column_per_north),
                      slope(first.row_per_east, last.row_per_east),
                      slope(first.row_per_north, last.row_per_north)};
    normal_row(per_column.data(), per_row.data(), start, step, east.data(), north.data(), up.data(),
               width);
}

void slope_and_aspect(std::span<const float> east, std::span<const float> north,
                      std::span<const float> up, std::span<float> slope_rad,
                      std::span<float> aspect_rad) noexcept {
    constexpr auto turn = static_cast<float>(2 * std::numbers::pi);
    for (std::size_t i = 0; i < up.size(); ++i) {
        slope_rad[i] = std::atan2(std::hypot(east[i], north[i]), up[i]);
        const float aspect = std::atan2(east[i], north[i]);
        const float positive = aspect < 0 ? aspect + turn : aspect;
        const bool level = east[i] == 0 && north[i] == 0;
        aspect_rad[i] =
            level ? std::numeric_limits<float>::quiet_NaN() : (positive >= turn ? 0.0F : positive);
    }
}

}  // namespace sunbudget
