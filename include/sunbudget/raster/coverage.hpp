#pragma once

#include <span>
#include <vector>

#include "sunbudget/base/plane.hpp"
#include "sunbudget/raster/locator.hpp"

namespace sunbudget {

/// A ring of a polygon in pixels of a grid; closed without its first place being repeated.
using Ring = std::vector<PixelPlace>;

/// Rings of polygons that do not overlap. Outer rings turn so that `signed_area` is positive, holes so that it
/// is negative.
using Rings = std::vector<Ring>;

/// Area in pixels, positive or negative by the sense of turning.
[[nodiscard]] double signed_area(std::span<const PixelPlace> ring) noexcept;

/// The share of each pixel's area that lies inside: exact for straight edges, to rounding.
///
/// shape   `window` may lie anywhere; `shares` becomes window.width x window.height
/// out     [0, 1]; 0 below 1e-12, so that a border along the pixels' own borders touches no neighbour
/// method  each edge adds, in every row it crosses, the area to its right; sums along the row give the shares
void cover(const Rings& rings, const Window& window, Plane<double>& shares);

}  // namespace sunbudget
