#pragma once

#include "sunbudget/base/plane.hpp"

namespace sunbudget {

/// What ground in view is taken to reflect where nothing is known of its albedo (common practice).
inline constexpr double albedo_where_unknown = 0.2;

/// The mean of the valid values in the square of `radius` pixels around each pixel.
///
/// shape   `values` holds `radius` pixels more on every side than the result
/// nodata  NaN values are left out; albedo_where_unknown where none is valid
/// accuracy sums in double: 1e-7
[[nodiscard]] Plane<float> mean_around(const Plane<float>& values, int radius);

}  // namespace sunbudget
