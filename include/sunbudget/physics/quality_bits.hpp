#pragma once

#include <cstdint>
#include <span>

namespace sunbudget {

/// Why a pixel is rejected: small numbers that the caller hands out, the weightiest first.
using RejectReason = std::uint8_t;
inline constexpr RejectReason not_rejected = 255;

/// One test on the code of a quality raster. It holds where
/// ((code >> first_bit) & (2^bits - 1)) == value.
struct QualityBits {
    int first_bit = 0;                   ///< [0, 30]
    int bits = 1;                        ///< [1, 31 - first_bit]
    std::int32_t value = 1;              ///< [0, 2^bits - 1]
    std::uint16_t flag = 0;              ///< joined with | to the flags where it holds
    RejectReason reason = not_rejected;  ///< lowers the pixel's reason to this where it holds
};

/// Applies tests to a row of a product's quality raster. Several rasters, and several calls, may
/// work on the same two rows in any order: of all reasons the smallest number stays, so that each
/// rejected pixel counts under one reason.
///
/// in      a negative code is a pixel without one; it gets `missing` as a reason and no flag
/// shape   rows of the same length; flags and reasons are added to, so the caller clears them first
///         (0 and not_rejected)
/// errors  none; bits out of range, or rows of unequal length, are a caller's bug (asserted)
/// source  bit fields as in the USGS Landsat Collection 2 quality bands; any product whose quality
///         is a bit field or a plain class (bits = 8)
void apply_quality(std::span<const std::int32_t> codes, std::span<const QualityBits> tests,
                   RejectReason missing, std::span<std::uint16_t> flags,
                   std::span<RejectReason> reasons) noexcept;

/// Makes the values of rejected pixels NaN.
///
/// shape   rows of the same length, `values` in place
/// errors  none; rows of unequal length are a caller's bug (asserted)
void drop_rejected(std::span<const RejectReason> reasons, std::span<float> values) noexcept;

}  // namespace sunbudget
