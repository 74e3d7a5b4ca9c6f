#pragma once

#include <cstdint>
#include <functional>

#include "pixel_map.hpp"
#include "sunbudget/base/plane.hpp"

namespace sunbudget {

/// Fills a plane with a window of the source, NaN or `no_code` for no value.
template <typename Value>
using LoadWindow = std::function<void(const Window& source, Plane<Value>& out)>;

/// The source pixel under the middle of each target pixel; `no_code` where the middle lies outside.
void take_nearest(const PixelMap& map, const Window& window, const LoadWindow<std::int32_t>& load,
                  Plane<std::int32_t>& out);

/// The weighted mean of the source pixels under a box around the middle of each target pixel. The
/// box is as large as the target pixel, and at least one source pixel a side: for smaller target
/// pixels that is bilinear interpolation, for larger ones the average over their area, and nothing
/// jumps between the two.
///
/// nodata  a target pixel has a value when its middle lies on the source and at least half of the
///         weight on the source has one: areas without value neither grow nor shrink
void take_mean(const PixelMap& map, const Window& window, const LoadWindow<float>& load,
               Plane<float>& out);

}  // namespace sunbudget
