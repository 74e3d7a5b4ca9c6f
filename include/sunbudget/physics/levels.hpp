#pragma once

#include <functional>
#include <span>
#include <vector>

#include "sunbudget/base/plane.hpp"

namespace sunbudget {

/// Coarser levels of a height raster: a cell of level L covers 2^L x 2^L pixels, counted from the
/// raster's first pixel, and holds the greatest height and the mean height. A cell on the right or
/// bottom edge covers what there is.

/// Cells of a level along a side of `pixels` pixels.
[[nodiscard]] constexpr int cells_along(int pixels, int level) noexcept {
    return (pixels + (1 << level) - 1) >> level;
}

/// One row of a level from two rows of the level below it.
///
/// shape   upper, lower: one length n (lower may be empty: the last row of an odd height);
///         out: (n + 1) / 2. The last cell of an odd n has one cell below it a row
/// nodata  NaN cells are left out; NaN where all are NaN
/// accuracy exact (maximum); the mean weights each cell below with ground alike, however much of it
///         is ground: 2^-23 of the height
void halve_maximum(std::span<const float> upper, std::span<const float> lower,
                   std::span<float> out) noexcept;
void halve_mean(std::span<const float> upper, std::span<const float> lower,
                std::span<float> out) noexcept;

/// Makes all levels in one pass over the raster's rows, holding two rows a level.
class LevelBuilder {
  public:
    /// Takes one finished row of level 1, 2, ..., in increasing order of rows for each level.
    using Sink = std::function<void(int level, int row, std::span<const float> maximum_m,
                                    std::span<const float> mean_m)>;

    /// `width` pixels a row; levels 1 to `levels`.
    LevelBuilder(int width, int levels, Sink sink);
    /// The next row of heights [m], NaN where there is none.
    void add_row(std::span<const float> height_m);
    /// After the last row: emits the rows that are still open. No row may follow.
    void finish();

  private:
    struct Level {
        std::vector<float> waiting_maximum, waiting_mean;  ///< upper row, from the level below
        std::vector<float> maximum, mean;                  ///< row just made
        bool waiting = false;
        int rows = 0;
    };
    void take(std::size_t index, std::span<const float> maximum, std::span<const float> mean);
    void emit(std::size_t index, std::span<const float> lower_maximum,
              std::span<const float> lower_mean);

    Sink sink_;
    std::vector<Level> levels_;
};

/// One level in memory.
struct Level {
    Plane<float> maximum_m;
    Plane<float> mean_m;
};

/// Levels 1 to `levels` of a raster that fits in memory; the first is level 1.
[[nodiscard]] std::vector<Level> build_levels(const Plane<float>& height_m, int levels);

}  // namespace sunbudget
