#pragma once

#include <array>
#include <optional>

#include "sunbudget/base/plane.hpp"
#include "sunbudget/raster/locator.hpp"

namespace sunbudget {

/// The matrices at a block's corner pixels and middle.
struct BlockFrame {
    std::array<PixelMatrix, 4> corner;  ///< upper left, upper right, lower left, lower right
    PixelMatrix middle;
    Geodetic place;

    /// At the block's left and right edge; `share` runs from 0 at the top row to 1 at the bottom row.
    [[nodiscard]] PixelMatrix left(double share) const;
    [[nodiscard]] PixelMatrix right(double share) const;
};

/// Nothing where the projection has no place for the block.
[[nodiscard]] std::optional<BlockFrame> frame_of(const Window& block, const Locator& locator);

}  // namespace sunbudget
