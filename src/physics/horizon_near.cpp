#include <algorithm>
#include <array>
#include <cassert>
#include <cmath>
#include <cstdlib>
#include <limits>

#include "look.hpp"
#include "sunbudget/base/simd.hpp"
#include "sunbudget/physics/horizon.hpp"

namespace sunbudget {

namespace {

using detail::Look;
using detail::looks_a_pass;
using detail::rise_of;

/// Pixels of a row that stop together, and rows that share one look-up of what is left to see.
constexpr int segment_columns = 128;
constexpr int segment_rows = 16;

/// After how many passes a segment asks whether it may stop: once the horizon has had a chance to
/// rise, and not so often that asking costs more than it saves.
constexpr std::array<int, 4> rests{0, 1, 2, 4};

/// One row of pixels raised by eight looks.
SUNBUDGET_CLONES
void raise_pass(const Look* looks, const float* __restrict ground, float* __restrict best,
                std::size_t count) noexcept {
    const Look l0 = looks[0], l1 = looks[1], l2 = looks[2], l3 = looks[3];
    const Look l4 = looks[4], l5 = looks[5], l6 = looks[6], l7 = looks[7];
    for (std::size_t i = 0; i < count; ++i) {
        const float eye = ground[i];
        float rise = best[i];
        const auto raise = [&](const Look& look) {
            const float seen = rise_of(look, ground + look.on, ground + look.beyond, eye, i);
            rise = seen > rise ? seen : rise;
        };
        raise(l0), raise(l1), raise(l2), raise(l3);
        raise(l4), raise(l5), raise(l6), raise(l7);
        best[i] = rise;
    }
}

/// Where the direction leaves the pixel, half a step away: the bilinear surface between the pixel,
/// the next one along the direction, the one across it and the one on the diagonal.
struct EdgeLook {
    std::ptrdiff_t along = 0;
    std::ptrdiff_t across = 0;
    float half_slant = 0;
};

SUNBUDGET_CLONES
void raise_at_edge(EdgeLook look, const float* __restrict ground, float* __restrict best,
                   std::size_t count) noexcept {
    const float* along = ground + look.along;
    const float* across = ground + look.across;
    const float* diagonal = ground + look.along + look.across;
    for (std::size_t i = 0; i < count; ++i) {
        const float eye = ground[i];
        const float seen =
            (along[i] - eye) + look.half_slant * ((across[i] - eye) + (diagonal[i] - along[i]));
        best[i] = seen > best[i] ? seen : best[i];
    }
}

EdgeLook edge_look(const Direction& direction, std::size_t stride) noexcept {
    const auto row = static_cast<std::ptrdiff_t>(stride);
    const std::ptrdiff_t column_way = direction.column_step < 0 ? -1 : 1;
    const std::ptrdiff_t row_way = direction.row_step < 0 ? -row : row;
    if (std::abs(direction.column_step) == 1)
        return {column_way, row_way, static_cast<float>(std::abs(direction.row_step) / 2)};
    return {row_way, column_way, static_cast<float>(std::abs(direction.column_step) / 2)};
}

/// Whether ground as high as `highest_m`, at the distance of `look` or beyond, could raise any
/// pixel.
SUNBUDGET_CLONES
bool may_rise(float highest_m, Look look, const float* ground, const float* best,
              std::size_t count) noexcept {
    int any = 0;
    for (std::size_t i = 0; i < count; ++i)
        any |= (highest_m - ground[i]) * look.per_step - look.drop_m > best[i] ? 1 : 0;
    return any != 0;
}

/// A hair more than the height, for what interpolation between two heights may round up.
float padded(float height_m) noexcept {
    return height_m + std::abs(height_m) * (4 * std::numeric_limits<float>::epsilon());
}

/// Highest ground within the looks from number `first` on, from any pixel of a segment (in pixels
/// of the patch).
float highest_left_m(const HeightPatch& patch, const Direction& direction, Window segment,
                     int first, int last) noexcept {
    const auto reach = [](double step, int steps) {
        return static_cast<long>(std::ceil(std::abs(step) * steps)) * (step < 0 ? -1 : 1);
    };
    const long from_column = reach(direction.column_step, first - 1);
    const long to_column = reach(direction.column_step, last);
    const long from_row = reach(direction.row_step, first - 1);
    const long to_row = reach(direction.row_step, last);
    const auto width = static_cast<int>(std::labs(to_column - from_column)) + segment.width;
    const auto height = static_cast<int>(std::labs(to_row - from_row)) + segment.height;
    return patch.highest_m({segment.column + std::min(from_column, to_column),
                            segment.row + std::min(from_row, to_row), width, height});
}

class NearLook {
  public:
    NearLook(const HeightPatch& patch, const Direction& direction, const Sight& sight)
        : patch_(patch),
          direction_(direction),
          last_(detail::last_step(direction, sight, 0, near_steps)),
          edge_(edge_look(direction, patch.height_m.stride())),
          looks_(last_ < 1 ? std::vector<Look>{}
                           : detail::looks_along(direction, sight, 0, 1, last_,
                                                 patch.height_m.stride())) {}

    /// Raises a segment of at most segment_columns x segment_rows pixels of the block.
    void raise(Window segment, Window block, Plane<float>& rise_m) const {
        Window seen = segment;
        seen.column -= patch_.window.column;
        seen.row -= patch_.window.row;
        std::array<float, rests.size()> left{};
        for (std::size_t rest = 0; rest < rests.size(); ++rest) {
            const int first = rests[rest] * looks_a_pass + 1;
            if (first <= last_)
                left[rest] = padded(highest_left_m(patch_, direction_, seen, first, last_));
        }
        for (int r = 0; r < segment.height; ++r) {
            const float* ground = patch_.height_m.row(static_cast<int>(seen.row) + r).data();
            float* rise = rise_m.row(static_cast<int>(segment.row - block.row) + r).data();
            raise_row(ground + seen.column, rise + (segment.column - block.column),
                      static_cast<std::size_t>(segment.width), left);
        }
    }

  private:
    void raise_row(const float* ground, float* rise, std::size_t width,
                   const std::array<float, rests.size()>& left) const {
        std::size_t rest = 0;
        raise_at_edge(edge_, ground, rise, width);
        for (std::size_t first = 0; first < looks_.size(); first += looks_a_pass) {
            if (rest < rests.size() &&
                first == static_cast<std::size_t>(rests[rest] * looks_a_pass)) {
                if (!may_rise(left[rest], looks_[first], ground, rise, width)) return;
                ++rest;
            }
            raise_pass(&looks_[first], ground, rise, width);
        }
    }

    const HeightPatch& patch_;
    const Direction& direction_;
    int last_;
    EdgeLook edge_;
    std::vector<Look> looks_;
};

SUNBUDGET_CLONES
void own_plane_row(const float* per_column, const float* per_row, float column_step, float row_step,
                   float* __restrict rise, std::size_t count) noexcept {
    for (std::size_t i = 0; i < count; ++i) {
        const float plane = per_column[i] * column_step + per_row[i] * row_step;
        rise[i] = plane > 0 ? plane : 0.0F;
    }
}

SUNBUDGET_CLONES
void tangent_row(const float* height, const float* rise, StepScale scale, float* __restrict tangent,
                 std::size_t count) noexcept {
    constexpr float missing = std::numeric_limits<float>::quiet_NaN();
    for (std::size_t i = 0; i < count; ++i) {
        const auto at = static_cast<float>(static_cast<int>(i));
        const float value = rise[i] * (scale.per_m + at * scale.per_m_each_column);
        tangent[i] = is_ground(height[i]) ? value : missing;
    }
}

}  // namespace

void start_rise(std::span<const float> per_column, std::span<const float> per_row,
                const Direction& direction, std::span<float> rise_m) noexcept {
    assert(per_column.size() == rise_m.size() && per_row.size() == rise_m.size());
    own_plane_row(per_column.data(), per_row.data(), static_cast<float>(direction.column_step),
                  static_cast<float>(direction.row_step), rise_m.data(), rise_m.size());
}

void raise_by_near(const HeightPatch& patch, const Direction& direction, const Sight& sight,
                   Window block, Plane<float>& rise_m) {
    assert(rise_m.width() == block.width && rise_m.height() == block.height);
    const NearLook look(patch, direction, sight);
    for (int row = 0; row < block.height; row += segment_rows)
        for (int column = 0; column < block.width; column += segment_columns)
            look.raise({block.column + column, block.row + row,
                        std::min(segment_columns, block.width - column),
                        std::min(segment_rows, block.height - row)},
                       block, rise_m);
}

void tangents(std::span<const float> height_m, std::span<const float> rise_m, StepScale scale,
              std::span<float> tangent) noexcept {
    assert(height_m.size() == rise_m.size() && tangent.size() == rise_m.size());
    tangent_row(height_m.data(), rise_m.data(), scale, tangent.data(), tangent.size());
}

}  // namespace sunbudget
