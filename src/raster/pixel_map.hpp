#pragma once

#include <array>
#include <optional>
#include <span>
#include <vector>

#include "crs.hpp"
#include "sunbudget/base/plane.hpp"
#include "sunbudget/raster/grid.hpp"

namespace sunbudget {

/// Where the pixels of a window fall in the source, and how large they are there.
///
/// Exact places are computed on every 16th line of the target's lattice and interpolated between,
/// wherever that is right to a hundredth of a source pixel; elsewhere every pixel is exact. Cells
/// hang on the lattice, so a pixel's place does not depend on the window.
struct PlacedWindow {
    Plane<double> column;  ///< in source pixels from the outer corner; NaN: no place
    Plane<double> row;
    Plane<float> columns_wide;  ///< the target pixel's extent, at least 1
    Plane<float> rows_high;
};

/// From pixels of the target grid to pixels of an upright source grid.
class PixelMap {
  public:
    PixelMap(const Grid& target, const Grid& source);

    /// In place: target columns and rows to source columns and rows; NaN where there is no answer.
    /// Longitudes are taken within half a turn of the source's middle.
    void exact(std::span<double> column, std::span<double> row) const;

    [[nodiscard]] PlacedWindow place(const Window& window) const;

    /// Source columns of a full turn in longitude; nothing when the source is not geographic.
    [[nodiscard]] std::optional<double> turn() const noexcept { return turn_columns_; }
    /// The same where it is a whole number, else 0: the columns meet again behind the globe.
    [[nodiscard]] long period() const noexcept { return period_; }
    [[nodiscard]] const Grid& source() const noexcept { return source_; }
    [[nodiscard]] const Grid& target() const noexcept { return target_; }

  private:
    /// A square of the target's lattice with the exact places of its corners, sides' middles and
    /// centre in the source.
    struct Cell {
        long column = 0;
        long row = 0;
        std::array<double, 9> x{};
        std::array<double, 9> y{};
        bool smooth = false;  ///< may be interpolated
        float wide = 1;
        float high = 1;
    };
    [[nodiscard]] Cell cell(long first_column, long first_row) const;
    [[nodiscard]] std::array<double, 2> middle_of(const Cell& cell, long column, long row) const;
    void fill(const Cell& cell, const Window& window, PlacedWindow& placed) const;

    Grid target_;
    Grid source_;
    std::optional<PointTransform> transform_;
    std::optional<double> turn_;
    std::optional<double> turn_columns_;
    double middle_ = 0;
    long period_ = 0;
};

/// Side of the cells between exact places, pixels.
inline constexpr int place_cell_px = 16;

}  // namespace sunbudget
