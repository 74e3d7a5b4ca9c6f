#include <algorithm>
#include <cassert>
#include <cmath>
#include <limits>
#include <optional>
#include <utility>

#include "look.hpp"
#include "sunbudget/base/simd.hpp"
#include "sunbudget/physics/horizon.hpp"

namespace sunbudget {

namespace {

using detail::Look;
using detail::looks_a_pass;
using detail::rise_of;

/// The nearest of a level's cells that is looked at: what is nearer, a finer level has.
constexpr int first_far_step = near_steps / 2 + 1;

/// One row of cells raised by eight looks, for two heights of the eye.
SUNBUDGET_CLONES
void raise_two(const Look* looks, const float* __restrict sight, const float* __restrict low,
               const float* __restrict high, float* __restrict from_low,
               float* __restrict from_high, std::size_t count) noexcept {
    const Look l0 = looks[0], l1 = looks[1], l2 = looks[2], l3 = looks[3];
    const Look l4 = looks[4], l5 = looks[5], l6 = looks[6], l7 = looks[7];
    for (std::size_t i = 0; i < count; ++i) {
        const float low_eye = low[i];
        const float high_eye = high[i];
        float low_rise = from_low[i];
        float high_rise = from_high[i];
        const auto raise = [&](const Look& look) {
            const float* on = sight + look.on;
            const float* beyond = sight + look.beyond;
            const float seen_low = rise_of(look, on, beyond, low_eye, i);
            const float seen_high = rise_of(look, on, beyond, high_eye, i);
            low_rise = seen_low > low_rise ? seen_low : low_rise;
            high_rise = seen_high > high_rise ? seen_high : high_rise;
        };
        raise(l0), raise(l1), raise(l2), raise(l3);
        raise(l4), raise(l5), raise(l6), raise(l7);
        from_low[i] = low_rise;
        from_high[i] = high_rise;
    }
}

/// The line through two rises of a cell.
SUNBUDGET_CLONES
void lines_from_rises(const float* low, const float* high, const float* from_low,
                      const float* from_high, float* __restrict at_zero,
                      float* __restrict per_metre, std::size_t count) noexcept {
    for (std::size_t i = 0; i < count; ++i) {
        per_metre[i] = (from_low[i] - from_high[i]) / (high[i] - low[i]);
        at_zero[i] = from_low[i] + per_metre[i] * low[i];
    }
}

/// A row between two rows of coarser cells: `share` of the second one.
SUNBUDGET_CLONES
void mix_rows(const float* first, const float* second, float share, float* __restrict mixed,
              std::size_t count) noexcept {
    for (std::size_t i = 0; i < count; ++i) mixed[i] = first[i] + share * (second[i] - first[i]);
}

/// Spreads coarser cells to finer ones, an even and an odd one at a time: the even one lies three
/// quarters of the way from coarse[i] to the next, the odd one a quarter further on.
SUNBUDGET_CLONES
void spread_pairs(const float* coarse, float* __restrict fine, std::size_t pairs) noexcept {
    for (std::size_t i = 0; i < pairs; ++i) {
        const float step_back = coarse[i + 1] - coarse[i];
        const float step_on = coarse[i + 2] - coarse[i + 1];
        fine[2 * i] = coarse[i] + 0.75F * step_back;
        fine[2 * i + 1] = coarse[i + 1] + 0.25F * step_on;
    }
}

/// Lines of coarser cells brought to rows of finer cells.
class Finer {
  public:
    Finer(const RiseLines& lines, long first_column, int width)
        : lines_(lines), pairs_((static_cast<std::size_t>(width) + 3) / 2) {
        // From an even column on, so that pairs start alike wherever the row begins.
        odd_ = static_cast<std::size_t>(first_column & 1);
        coarse_from_ = ((first_column - static_cast<long>(odd_)) >> 1) - 1 - lines.window.column;
        mixed_.resize(pairs_ + 2);
        at_zero_.resize(2 * pairs_);
        per_metre_.resize(2 * pairs_);
    }
    void row(long fine_row) {
        spread(lines_.at_zero_m, fine_row, at_zero_);
        spread(lines_.per_metre, fine_row, per_metre_);
    }
    [[nodiscard]] const float* at_zero() const { return at_zero_.data() + odd_; }
    [[nodiscard]] const float* per_metre() const { return per_metre_.data() + odd_; }

  private:
    void spread(const Plane<float>& plane, long fine_row, std::vector<float>& fine) {
        const auto upper = static_cast<int>(((fine_row - 1) >> 1) - lines_.window.row);
        const float share = (fine_row & 1) != 0 ? 0.25F : 0.75F;
        // A pair may need a coarse cell past the window where its second half is not asked for.
        const long skip = coarse_from_ < 0 ? -coarse_from_ : 0;
        const auto from = static_cast<std::size_t>(coarse_from_ + skip);
        const auto into = static_cast<std::size_t>(skip);
        const std::size_t count =
            std::min(mixed_.size() - into, static_cast<std::size_t>(plane.width()) - from);
        mix_rows(plane.row(upper).data() + from, plane.row(upper + 1).data() + from, share,
                 mixed_.data() + into, count);
        spread_pairs(mixed_.data(), fine.data(), pairs_);
    }

    const RiseLines& lines_;
    std::size_t pairs_;
    std::size_t odd_ = 0;
    long coarse_from_ = 0;
    std::vector<float> mixed_, at_zero_, per_metre_;
};

/// Share of a line's value at height 0 that rounding may have put on: taken off, so that level
/// ground at any height sees exactly nothing.
constexpr float rounding = 4 * std::numeric_limits<float>::epsilon();

SUNBUDGET_CLONES
void raise_to_lines(const float* at_zero, const float* per_metre, const float* eye,
                    float* __restrict rise, std::size_t count) noexcept {
    for (std::size_t i = 0; i < count; ++i) {
        const float slack = rounding * std::abs(at_zero[i]);
        const float seen = (at_zero[i] - per_metre[i] * eye[i]) - slack;
        rise[i] = seen > rise[i] ? seen : rise[i];
    }
}

/// Tangent that stands for seeing no ground: 45 degrees down. Not 0: a line through two heights of
/// which one sees the far ground below it must not be bent up.
constexpr double least_tangent = -1.0;

/// Rises of one level's observers as lines, `coarser` (if any) being those of the next level.
RiseLines lines_of(const LevelPatch& patch, const RiseLines* coarser, const Direction& direction,
                   const Sight& sight, Window observers) {
    RiseLines lines{observers, Plane<float>(observers.width, observers.height),
                    Plane<float>(observers.width, observers.height)};
    const int last = detail::last_step(direction, sight, patch.level, near_steps);
    std::vector<Look> looks;
    if (last >= first_far_step)
        looks = detail::looks_along(direction, sight, patch.level, first_far_step, last,
                                    patch.sight_m.stride());
    const auto width = static_cast<std::size_t>(observers.width);
    std::vector<float> from_low(width), from_high(width);
    const auto column = static_cast<std::size_t>(observers.column - patch.window.column);
    std::optional<Finer> finer;
    if (coarser != nullptr) finer.emplace(*coarser, observers.column, observers.width);
    const auto least_rise_m = static_cast<float>(least_tangent * direction.step_m);
    for (int r = 0; r < observers.height; ++r) {
        const auto source_row = static_cast<int>(observers.row + r - patch.window.row);
        const float* low = patch.low_m.row(r).data();
        const float* high = patch.high_m.row(r).data();
        const float* ground = patch.sight_m.row(source_row).data() + column;
        std::ranges::fill(from_low, least_rise_m);
        std::ranges::fill(from_high, least_rise_m);
        if (finer) {
            finer->row(observers.row + r);
            raise_to_lines(finer->at_zero(), finer->per_metre(), low, from_low.data(), width);
            raise_to_lines(finer->at_zero(), finer->per_metre(), high, from_high.data(), width);
        }
        for (std::size_t pass = 0; pass < looks.size(); pass += looks_a_pass)
            raise_two(&looks[pass], ground, low, high, from_low.data(), from_high.data(), width);
        lines_from_rises(low, high, from_low.data(), from_high.data(),
                         lines.at_zero_m.row(r).data(), lines.per_metre.row(r).data(), width);
    }
    return lines;
}

}  // namespace

RiseLines far_rise(std::span<const LevelPatch> levels, const Direction& direction,
                   const Sight& sight, Window block) {
    std::optional<RiseLines> coarser;
    for (std::size_t i = levels.size(); i-- > 0;) {
        const auto& patch = levels[i];
        assert(patch.level == static_cast<int>(i) + 1);
        coarser = lines_of(patch, coarser ? &*coarser : nullptr, direction, sight,
                           observer_window(block, patch.level));
    }
    return coarser ? std::move(*coarser) : RiseLines{};
}

void raise_by_far(const RiseLines& lines, const HeightPatch& patch, Window block,
                  Plane<float>& rise_m) {
    if (lines.at_zero_m.empty()) return;
    Finer finer(lines, block.column, block.width);
    const auto column = static_cast<std::size_t>(block.column - patch.window.column);
    for (int r = 0; r < block.height; ++r) {
        finer.row(block.row + r);
        const auto* eye =
            patch.height_m.row(static_cast<int>(block.row + r - patch.window.row)).data() + column;
        raise_to_lines(finer.at_zero(), finer.per_metre(), eye, rise_m.row(r).data(),
                       static_cast<std::size_t>(block.width));
    }
}

}  // namespace sunbudget
