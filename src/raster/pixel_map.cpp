#include "pixel_map.hpp"

#include <algorithm>
#include <array>
#include <cmath>

#include "affine.hpp"
#include "sunbudget/raster/grid_build.hpp"

namespace sunbudget {
namespace {

/// Interpolated places may be off by this much, source pixels: a bilinear value then moves by at
/// most 1 % of the step to its neighbour, less than any elevation or reflectance is known to.
constexpr double tolerance_px = 0.01;

/// A cell's exact places: corners, then the middles of top, left, bottom and right sides, then the
/// centre. The middles are asked because maps between conformal projections are harmonic: their
/// interpolation errors cancel at the centre.
constexpr std::array<std::array<double, 2>, 9> probes{
    {{0, 0}, {1, 0}, {0, 1}, {1, 1}, {0.5, 0}, {0, 0.5}, {0.5, 1}, {1, 0.5}, {0.5, 0.5}}};

double between(const std::array<double, 9>& v, double x, double y) {
    return (v[0] * (1 - x) + v[1] * x) * (1 - y) + (v[2] * (1 - x) + v[3] * x) * y;
}

bool interpolates(const std::array<double, 9>& v) {
    for (std::size_t i = 4; i < probes.size(); ++i)
        // Written so that NaN fails.
        if (!(std::abs(between(v, probes[i][0], probes[i][1]) - v[i]) < tolerance_px)) return false;
    return true;
}

long floor_to_cell(long pixel) {
    const long rest = pixel % place_cell_px;
    return pixel - (rest < 0 ? rest + place_cell_px : rest);
}

}  // namespace

PixelMap::PixelMap(const Grid& target, const Grid& source)
    : target_(target), source_(source), turn_(full_turn(source.crs_wkt)) {
    if (!same_crs(target.crs_wkt, source.crs_wkt))
        transform_.emplace(target.crs_wkt, source.crs_wkt, target);
    if (!turn_) return;
    middle_ = source.easting(0.5 * source.width, 0.5 * source.height);
    turn_columns_ = *turn_ / std::hypot(source.affine[1], source.affine[4]);
    const double whole = std::round(*turn_columns_);
    // The last column must meet the first to a millionth of a pixel.
    if (!source.rotated() && std::abs(*turn_columns_ - whole) < 1e-6 && whole >= source.width)
        period_ = static_cast<long>(whole);
}

void PixelMap::exact(std::span<double> column, std::span<double> row) const {
    for (std::size_t i = 0; i < column.size(); ++i) {
        const double c = column[i], r = row[i];
        column[i] = target_.easting(c, r);
        row[i] = target_.northing(c, r);
    }
    if (transform_) transform_->apply(column, row);
    for (std::size_t i = 0; i < column.size(); ++i) {
        if (turn_) column[i] += *turn_ * std::round((middle_ - column[i]) / *turn_);
        to_pixels(source_.affine, column[i], row[i]);
    }
}

PixelMap::Cell PixelMap::cell(long first_column, long first_row) const {
    Cell cell;
    cell.column = first_column;
    cell.row = first_row;
    auto& x = cell.x;
    auto& y = cell.y;
    for (std::size_t i = 0; i < probes.size(); ++i) {
        x[i] = static_cast<double>(first_column) + probes[i][0] * place_cell_px;
        y[i] = static_cast<double>(first_row) + probes[i][1] * place_cell_px;
    }
    exact(x, y);
    cell.smooth = interpolates(x) && interpolates(y);
    // Steps a pixel, from one side of the cell to the other; behind the globe columns jump a turn.
    const auto columns = [this](double from, double to) {
        const double d = to - from;
        return turn_columns_ ? d - *turn_columns_ * std::round(d / *turn_columns_) : d;
    };
    // The axis-parallel box with the same spread along each axis as the pixel's outline has.
    const auto extent = [](double along, double across) {
        const double side = std::hypot(along, across) / place_cell_px;
        return std::isfinite(side) ? static_cast<float>(std::max(1.0, side)) : 1.0f;
    };
    cell.wide = extent(columns(x[5], x[7]), columns(x[4], x[6]));
    cell.high = extent(y[7] - y[5], y[6] - y[4]);
    return cell;
}

std::array<double, 2> PixelMap::middle_of(const Cell& cell, long column, long row) const {
    const double c = static_cast<double>(column) + 0.5, r = static_cast<double>(row) + 0.5;
    if (cell.smooth) {
        const double u = (c - static_cast<double>(cell.column)) / place_cell_px;
        const double v = (r - static_cast<double>(cell.row)) / place_cell_px;
        return {between(cell.x, u, v), between(cell.y, u, v)};
    }
    std::array<double, 1> x{c}, y{r};
    exact(x, y);
    return {x[0], y[0]};
}

void PixelMap::fill(const Cell& cell, const Window& window, PlacedWindow& placed) const {
    const long last_column = std::min(cell.column + place_cell_px, window.column + window.width);
    const long last_row = std::min(cell.row + place_cell_px, window.row + window.height);
    for (long row = std::max(cell.row, window.row); row < last_row; ++row)
        for (long column = std::max(cell.column, window.column); column < last_column; ++column) {
            const int c = static_cast<int>(column - window.column);
            const int r = static_cast<int>(row - window.row);
            const auto [x, y] = middle_of(cell, column, row);
            placed.column.at(c, r) = x;
            placed.row.at(c, r) = y;
            placed.columns_wide.at(c, r) = cell.wide;
            placed.rows_high.at(c, r) = cell.high;
        }
}

PlacedWindow PixelMap::place(const Window& window) const {
    const int width = window.width, height = window.height;
    PlacedWindow placed{Plane<double>(width, height), Plane<double>(width, height),
                        Plane<float>(width, height), Plane<float>(width, height)};
    for (long row = floor_to_cell(window.row); row < window.row + height; row += place_cell_px)
        for (long column = floor_to_cell(window.column); column < window.column + width;
             column += place_cell_px)
            fill(cell(column, row), window, placed);
    return placed;
}

}  // namespace sunbudget
