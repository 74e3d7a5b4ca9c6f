#pragma once

#include <array>
#include <cstddef>
#include <vector>

#include "sunbudget/physics/direction.hpp"

namespace sunbudget::detail {

/// One look along a direction: where its two samples lie from the eye, and what turns the
/// difference in height into rise.
struct Look {
    std::ptrdiff_t on = 0;      ///< values from the eye to the sample next to the line, towards it
    std::ptrdiff_t beyond = 0;  ///< to the one on the line's other side
    float share = 0;            ///< of the one beyond
    float per_step = 1;         ///< 1 / full-resolution steps
    float drop_m = 0;           ///< curvature, per step
};

inline constexpr int looks_a_pass = 8;

/// Looks from step `first` to step `last` of cells of 2^level pixels in an array of row length
/// `stride`, nearest first; the last one again until passes are full.
[[nodiscard]] std::vector<Look> looks_along(const Direction& direction, const Sight& sight,
                                            int level, int first, int last, std::size_t stride);

/// The last of `most` steps of 2^level pixels that the reach still covers.
[[nodiscard]] int last_step(const Direction& direction, const Sight& sight, int level, int most);

/// Rise that a look gives an eye at `eye_m`; `ground` points to the eye's own place.
inline float rise_of(const Look& look, const float* on, const float* beyond, float eye_m,
                     std::size_t i) noexcept {
    const float height = on[i] + look.share * (beyond[i] - on[i]);
    return (height - eye_m) * look.per_step - look.drop_m;
}

}  // namespace sunbudget::detail
