#pragma once

#include <cstddef>
#include <cstdint>

#include "sunbudget/raster/source.hpp"

namespace sunbudget {

/// A row of stored numbers as physical values: value * scale + offset in double, then rounded to
/// float. NaN for NaN, for `nodata` (NaN: there is none) and for what is infinite or becomes so.
/// Gives the number of the latter. Stored: float or double.
template <typename Stored>
[[nodiscard]] std::uint64_t physical_row(const Stored* in, std::size_t count, Stored nodata,
                                         const Scaling& scaling, float* out) noexcept;

/// A row of whole numbers as codes, `no_code` for `nodata` (`no_code`: there is none). Stored:
/// std::uint8_t or std::int32_t.
template <typename Stored>
void code_row(const Stored* in, std::size_t count, std::int32_t nodata, std::int32_t* out) noexcept;

/// `none` where the mask is 0.
template <typename Value>
void drop_masked(const std::uint8_t* mask, std::size_t count, Value none, Value* row) noexcept;

}  // namespace sunbudget
