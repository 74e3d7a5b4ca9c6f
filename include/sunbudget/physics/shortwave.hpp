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

/// Standard uncertainty of absorbed shortwave, to first order:
/// light * sqrt(u(albedo)^2 + ((1 - albedo) * light_uncertainty)^2).
///
/// shape   four rows of the same length; uncertainty may be the row `light`
/// units   albedo and its standard uncertainty [1]; light and uncertainty alike [W m-2] or [J m-2];
///         light_uncertainty is relative and the same at all times, so that sums have it too
/// nodata  NaN in any input gives NaN out
/// errors  none; rows of unequal length are a caller's bug (asserted)
/// source  law of propagation for inputs that do not hang on each other, JCGM 100:2008, 5.1.2
///         (from memory)
void absorbed_uncertainty(std::span<const float> albedo, std::span<const float> albedo_uncertainty,
                          std::span<const float> light, float light_uncertainty,
                          std::span<float> uncertainty) noexcept;

}  // namespace sunbudget
