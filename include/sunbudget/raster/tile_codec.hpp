#pragma once

#include <cstddef>
#include <cstdint>
#include <span>
#include <vector>

#include "sunbudget/base/plane.hpp"

namespace sunbudget {

/// A square of pixels as the bytes of one TIFF tile: the predictor of its type (3 for floats, 2 for
/// whole numbers), then ZSTD level 1. Every NaN is stored as the same one, whatever its sign.
///
/// shape   tile x tile, tile a multiple of 16
/// errors  Error(internal) when ZSTD fails, which it does for want of memory only
/// source  TIFF 6.0 section 14 (predictor 2); Adobe Photoshop TIFF Technical Note 3 (predictor 3)
[[nodiscard]] std::vector<std::byte> encode_tile(const Plane<float>& square);
[[nodiscard]] std::vector<std::byte> encode_tile(const Plane<std::uint16_t>& square);

/// The pixels again. T: float or std::uint16_t.
///
/// errors  Error(output) when the bytes are not an encoded tile of that size: they come from a file
///         this program wrote
template <typename T>
[[nodiscard]] Plane<T> decode_tile(std::span<const std::byte> bytes, int tile);

}  // namespace sunbudget
