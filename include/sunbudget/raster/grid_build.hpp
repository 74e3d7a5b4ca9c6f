#pragma once

#include <optional>
#include <string>
#include <string_view>
#include <utility>

#include "sunbudget/raster/grid.hpp"
#include "sunbudget/raster/raster_file.hpp"

namespace sunbudget {

/// A rectangle in a CRS's own unit, easting or longitude first.
struct Bounds {
    double west = 0;
    double south = 0;
    double east = 0;
    double north = 0;

    friend bool operator==(const Bounds&, const Bounds&) = default;
};

/// WKT2 of a CRS the user names ("EPSG:32633", WKT, a PROJ string). Throws Error(usage) when it is
/// unknown, has no place on Earth, or is three-dimensional only.
[[nodiscard]] std::string crs_wkt_of(std::string_view text);

/// Short name for people: "WGS 84 / UTM zone 12N (EPSG:32612)".
[[nodiscard]] std::string crs_name(const std::string& crs_wkt);
/// "EPSG:32612" where the CRS carries or certainly has a code.
[[nodiscard]] std::optional<std::string> crs_code(const std::string& crs_wkt);
[[nodiscard]] bool same_crs(const std::string& a_wkt, const std::string& b_wkt);
/// Degrees rather than lengths.
[[nodiscard]] bool is_geographic(const std::string& crs_wkt);
/// Metres in the unit of a projected CRS.
[[nodiscard]] double metres_per_unit(const std::string& crs_wkt);

/// The same ground with the first row in the north and the first column in the west, and how it lay
/// before. A rotated grid stays as it is.
[[nodiscard]] std::pair<Grid, Storage> upright(const Grid& stored);

/// The smallest grid of square cells from the north-west corner on that covers the bounds.
/// Throws Error(usage) for empty bounds, a cell that is not positive, or too many pixels.
[[nodiscard]] Grid grid_from(const std::string& crs_wkt, const Bounds& bounds, double cell);

/// The part of `grid` inside `bounds` (all of it without), in cells of `cell` (its own without).
/// Corners stay on the grid's own lattice, and on every k-th line of it when `cell` is k of its
/// cells; a crop grows outward to whole cells, never beyond the grid's own edge by a full cell.
/// Throws Error(usage) when nothing is left or the grid is rotated and a cell is given.
[[nodiscard]] Grid cropped(const Grid& grid, const std::optional<Bounds>& bounds,
                           std::optional<double> cell);

[[nodiscard]] Bounds bounds_of(const Grid& grid);

/// Same size, CRS and corners to within a millionth of a cell.
[[nodiscard]] bool same_grid(const Grid& a, const Grid& b);

/// "1128 x 1428 cells of 30 x 30 m, WGS 84 / UTM zone 12N (EPSG:32612)".
[[nodiscard]] std::string describe(const Grid& grid);

/// Width and height of the middle cell on the ground, metres. Throws Error(input) when the CRS gives
/// no position there.
struct CellSize {
    double width_m = 0;
    double height_m = 0;
};
[[nodiscard]] CellSize cell_size(const Grid& grid);

}  // namespace sunbudget
