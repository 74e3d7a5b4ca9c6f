#include "sunbudget/raster/grid_build.hpp"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <limits>

#include "affine.hpp"
#include "sunbudget/base/error.hpp"
#include "sunbudget/base/text.hpp"
#include "sunbudget/raster/locator.hpp"

namespace sunbudget {
namespace {

/// Lattices nearer than this share of a cell are one lattice.
constexpr double lattice_tolerance = 1e-6;

/// Rounding noise in a header is no rotation: it must move no corner by a lattice tolerance.
Affine without_noise(const Grid& grid) {
    Affine a = grid.affine;
    const double across = std::abs(a[1]) * lattice_tolerance;
    const double down = std::abs(a[5]) * lattice_tolerance;
    if (std::abs(a[2]) * grid.height < across && std::abs(a[4]) * grid.width < down)
        a[2] = a[4] = 0;
    return a;
}

int checked_side(double cells) {
    if (!(cells <= std::numeric_limits<int>::max()))
        throw Error(Cause::usage, "the grid would have " + shortest(cells) + " cells along a side",
                    "grid", "check bounds, cell and the CRS's unit");
    return std::max(1, static_cast<int>(cells));
}

Grid checked_grid(const std::string& crs_wkt, double west, double north, double cell_x,
                  double cell_y, double columns, double rows) {
    constexpr double most_cells = 1e12;
    if (columns * rows > most_cells)
        throw Error(Cause::usage,
                    "the grid would have " + shortest(columns) + " x " + shortest(rows) + " cells",
                    "grid", "at most 1e12 are possible: check bounds, cell and the CRS's unit");
    return {
        checked_side(columns), checked_side(rows), {west, cell_x, 0, north, 0, -cell_y}, crs_wkt};
}

void check_bounds(const Bounds& b) {
    const bool finite = std::isfinite(b.west) && std::isfinite(b.east) && std::isfinite(b.south) &&
                        std::isfinite(b.north);
    if (!finite || b.west >= b.east || b.south >= b.north)
        throw Error(
            Cause::usage,
            fmt::format("bounds [{}, {}, {}, {}] hold no area", b.west, b.south, b.east, b.north),
            "grid.bounds", "give west, south, east, north in the CRS's unit");
}

void check_cell(double cell) {
    if (!(cell > 0) || !std::isfinite(cell))
        throw Error(Cause::usage, "a cell of " + shortest(cell), "grid.cell",
                    "give a size above 0");
}

/// First and one past the last cell of a span on a lattice, grown outward to whole cells.
struct Cells {
    double first = 0;
    double last = 0;
};
Cells cells_of(double from, double to) {
    return {std::floor(from + lattice_tolerance), std::ceil(to - lattice_tolerance)};
}

/// A whole multiple of the grid's cells keeps its lattice exactly.
double snapped_cell(double cell, double own) {
    const double ratio = cell / own;
    const double whole = std::round(ratio);
    return whole >= 1 && std::abs(ratio - whole) < lattice_tolerance * whole ? whole * own : cell;
}

/// Bounds as distances from the grid's north-west corner, cut to the grid: west, north, east, south.
struct Rectangle {
    double left, top, right, bottom;
};
Rectangle inside(const Grid& grid, const std::optional<Bounds>& bounds) {
    const double across = grid.width * grid.affine[1];
    const double down = grid.height * -grid.affine[5];
    if (!bounds) return {0, 0, across, down};
    check_bounds(*bounds);
    const Rectangle cut{std::max(0.0, bounds->west - grid.affine[0]),
                        std::max(0.0, grid.affine[3] - bounds->north),
                        std::min(across, bounds->east - grid.affine[0]),
                        std::min(down, grid.affine[3] - bounds->south)};
    if (cut.left >= cut.right || cut.top >= cut.bottom) {
        const auto all = bounds_of(grid);
        throw Error(
            Cause::usage, "the bounds lie outside the raster", "grid.bounds",
            fmt::format("it covers [{}, {}, {}, {}]", all.west, all.south, all.east, all.north));
    }
    return cut;
}

/// Rotated grids are cut in pixels, to the rectangle that holds the bounds.
Grid cropped_rotated(const Grid& grid, const std::optional<Bounds>& bounds) {
    if (!bounds) return grid;
    check_bounds(*bounds);
    double left = grid.width, top = grid.height, right = 0, bottom = 0;
    for (double x : {bounds->west, bounds->east})
        for (double y : {bounds->south, bounds->north}) {
            double column = x, row = y;
            to_pixels(grid.affine, column, row);
            left = std::min(left, column);
            right = std::max(right, column);
            top = std::min(top, row);
            bottom = std::max(bottom, row);
        }
    const Cells across = cells_of(std::max(0.0, left), std::min<double>(grid.width, right));
    const Cells down = cells_of(std::max(0.0, top), std::min<double>(grid.height, bottom));
    if (across.first >= across.last || down.first >= down.last)
        throw Error(Cause::usage, "the bounds lie outside the raster", "grid.bounds", "check them");
    Grid cut = grid;
    cut.width = checked_side(across.last - across.first);
    cut.height = checked_side(down.last - down.first);
    cut.affine[0] = grid.easting(across.first, down.first);
    cut.affine[3] = grid.northing(across.first, down.first);
    return cut;
}

double metres_between(const std::optional<Geodetic>& a, const std::optional<Geodetic>& b) {
    if (!a || !b) return std::numeric_limits<double>::quiet_NaN();
    constexpr double earth_radius_m = 6371008.8;  // mean radius R1 of the IUGG; a size for people
    const double north = b->latitude_rad - a->latitude_rad;
    const double east = std::remainder(b->longitude_rad - a->longitude_rad, 2 * std::numbers::pi) *
                        std::cos(0.5 * (a->latitude_rad + b->latitude_rad));
    return earth_radius_m * std::hypot(north, east);
}

}  // namespace

std::pair<Grid, Storage> upright(const Grid& stored) {
    Grid grid = stored;
    grid.affine = without_noise(stored);
    if (grid.rotated()) return {stored, Storage::rotated};
    const bool south_up = grid.affine[5] > 0;
    const bool mirrored = grid.affine[1] < 0;
    if (south_up) {
        grid.affine[3] += grid.height * grid.affine[5];
        grid.affine[5] = -grid.affine[5];
    }
    if (mirrored) {
        grid.affine[0] += grid.width * grid.affine[1];
        grid.affine[1] = -grid.affine[1];
    }
    if (south_up && mirrored) return {grid, Storage::south_up_mirrored};
    if (south_up) return {grid, Storage::south_up};
    return {grid, mirrored ? Storage::mirrored : Storage::north_up};
}

Grid grid_from(const std::string& crs_wkt, const Bounds& bounds, double cell) {
    check_bounds(bounds);
    check_cell(cell);
    const Cells across = cells_of(0, (bounds.east - bounds.west) / cell);
    const Cells down = cells_of(0, (bounds.north - bounds.south) / cell);
    return checked_grid(crs_wkt, bounds.west, bounds.north, cell, cell, across.last, down.last);
}

Grid cropped(const Grid& grid, const std::optional<Bounds>& bounds, std::optional<double> cell) {
    if (cell) check_cell(*cell);
    if (grid.rotated()) {
        if (cell)
            throw Error(Cause::usage, "a rotated raster cannot give its grid another cell",
                        "grid.cell", "leave cell out, or give crs, bounds and cell");
        return cropped_rotated(grid, bounds);
    }
    const double cell_x = cell ? snapped_cell(*cell, grid.affine[1]) : grid.affine[1];
    const double cell_y = cell ? snapped_cell(*cell, -grid.affine[5]) : -grid.affine[5];
    const auto cut = inside(grid, bounds);
    const Cells across = cells_of(cut.left / cell_x, cut.right / cell_x);
    const Cells down = cells_of(cut.top / cell_y, cut.bottom / cell_y);
    return checked_grid(grid.crs_wkt, grid.affine[0] + across.first * cell_x,
                        grid.affine[3] - down.first * cell_y, cell_x, cell_y,
                        across.last - across.first, down.last - down.first);
}

Bounds bounds_of(const Grid& grid) {
    const double right = grid.width, bottom = grid.height;
    const auto [west, east] = std::minmax({grid.easting(0, 0), grid.easting(right, 0),
                                           grid.easting(0, bottom), grid.easting(right, bottom)});
    const auto [south, north] =
        std::minmax({grid.northing(0, 0), grid.northing(right, 0), grid.northing(0, bottom),
                     grid.northing(right, bottom)});
    return {west, south, east, north};
}

bool same_grid(const Grid& a, const Grid& b) {
    if (a.width != b.width || a.height != b.height || !same_crs(a.crs_wkt, b.crs_wkt)) return false;
    for (const double x : {0, a.width})
        for (const double y : {0, a.height}) {
            double column = b.easting(x, y), row = b.northing(x, y);
            to_pixels(a.affine, column, row);
            if (std::abs(column - x) > lattice_tolerance || std::abs(row - y) > lattice_tolerance)
                return false;
        }
    return true;
}

std::string describe(const Grid& grid) {
    const double cell_x = std::hypot(grid.affine[1], grid.affine[4]);
    const double cell_y = std::hypot(grid.affine[2], grid.affine[5]);
    const double metres = is_geographic(grid.crs_wkt) ? 0 : metres_per_unit(grid.crs_wkt);
    const auto unit = metres == 0   ? "deg"
                      : metres == 1 ? "m"
                                    : fmt::format("units of {:.6g} m", metres);
    return fmt::format("{} x {} cells of {:.7g} x {:.7g} {}{}, {}", grid.width, grid.height, cell_x,
                       cell_y, unit, grid.rotated() ? ", rotated" : "", crs_name(grid.crs_wkt));
}

CellSize cell_size(const Grid& grid) {
    const Locator locator(grid);
    const double column = 0.5 * grid.width, row = 0.5 * grid.height;
    const CellSize size{
        metres_between(locator.at(column - 0.5, row), locator.at(column + 0.5, row)),
        metres_between(locator.at(column, row - 0.5), locator.at(column, row + 0.5))};
    if (!std::isfinite(size.width_m) || !std::isfinite(size.height_m))
        throw Error(Cause::input, "the middle of the grid lies off the globe", describe(grid),
                    "crop it with grid.bounds");
    return size;
}

}  // namespace sunbudget
