#pragma once

#include "pixel_map.hpp"

namespace sunbudget {

/// How a source lies over the target grid.
struct Overlay {
    /// Each target pixel is one source pixel, shifted by whole columns and rows.
    bool copied = false;
    long column_shift = 0;
    long row_shift = 0;
    double columns_per_pixel = 1;
    double rows_per_pixel = 1;
    double coverage = 0;
};
[[nodiscard]] Overlay overlay_of(const PixelMap& map);

}  // namespace sunbudget
