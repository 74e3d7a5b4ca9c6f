#pragma once

#include <cstddef>
#include <cstdint>
#include <span>

namespace sunbudget {

/// Bands that one weight set may have.
inline constexpr std::size_t most_bands = 8;

/// One band of a row of pixels and its weight.
struct WeightedBand {
    float weight = 0;
    std::span<const float> reflectance;
};

/// Narrow-band reflectance to broadband albedo: constant + sum of weight times reflectance.
///
/// in      up to 8 bands, added in the order given. Reflectance goes in as it is, also below 0 (dark
///         water, deep shadow) and above 1 (snow, sunny slopes): the weights are a linear fit, and
///         cutting single bands would shift the sum. What comes out is judged by `keep_albedo`.
/// shape   rows of the same length; `albedo` may not be one of the bands
/// units   [1]
/// nodata  NaN in any band gives NaN out
/// errors  none; more than 8 bands, or rows of unequal length, are a caller's bug (asserted)
/// source  the form common to Liang 2001, Remote Sens. Environ. 76, 213-238, and its followers
void broadband_sum(std::span<const WeightedBand> bands, float constant,
                   std::span<float> albedo) noexcept;

/// Keeps a row of albedos inside [0, 1] and marks every pixel that it changes.
///
/// in      margin   how far outside [0, 1] still counts as 0 or 1: the standard error of the fit that
///                  made the albedo, since there the nearest possible albedo is no farther away than
///                  the fit's own error
///         flag     joined with | to the pixel's flags
/// out     inside [0, 1] unchanged; within the margin outside it 0 or 1, flagged; farther out NaN,
///         flagged: such a number is no albedo
/// shape   rows of the same length, changed in place
/// units   [1]
/// nodata  NaN stays NaN and gets no flag
/// errors  none; a margin that is negative or NaN, or rows of unequal length, are a caller's bug
///         (asserted)
/// source  this project's choice
void keep_albedo(std::span<float> albedo, float margin, std::uint16_t flag,
                 std::span<std::uint16_t> flags) noexcept;

}  // namespace sunbudget
