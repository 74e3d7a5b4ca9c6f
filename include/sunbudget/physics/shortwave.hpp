#pragma once

#include <span>

namespace sunbudget {

/// Shortwave absorbed by one row of pixels:
/// (1 - albedo_direct) * direct + (1 - albedo_diffuse) * diffuse.
///
/// shape   five rows of the same length; the two albedos may be one row, absorbed may be any of
/// them units   albedo [1]; direct, diffuse and absorbed alike [W m-2] or [J m-2], on the pixel's
/// own plane;
///         diffuse holds all light that is not beam
/// nodata  NaN in any input gives NaN out
/// errors  none; rows of unequal length are a caller's bug (asserted)
void absorbed_shortwave(std::span<const float> albedo_direct, std::span<const float> direct,
                        std::span<const float> albedo_diffuse, std::span<const float> diffuse,
                        std::span<float> absorbed) noexcept;

}  // namespace sunbudget
