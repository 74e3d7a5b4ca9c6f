#pragma once

#include <vector>

#include "sunbudget/base/plane.hpp"

namespace sunbudget {

/// The windows a run works through: squares of `unit` pixels (cut at the raster's edge), in bands of
/// `band` units' height from top to bottom, and in Z-order inside a band. Striped inputs are then
/// decoded once a band, and few overview tiles wait for their children at any time.
/// `band` is a power of two.
[[nodiscard]] std::vector<Window> units_in_order(int width, int height, int unit, int band);

}  // namespace sunbudget
