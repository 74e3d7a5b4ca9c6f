#pragma once

#include <array>
#include <optional>
#include <string>

namespace sunbudget {

/// The six numbers of an affine map from (column, row) in pixels, counted from the outer corner of
/// the first pixel, to (easting, northing) in the CRS's own unit, in GDAL's order:
/// easting = t[0] + t[1] column + t[2] row;  northing = t[3] + t[4] column + t[5] row.
using Affine = std::array<double, 6>;

/// Where a raster lies: size, affine map and CRS. The run's grid is never south-up nor mirrored when
/// its axes are those of the CRS (`upright` turns such a grid); rotated grids stay as they are.
struct Grid {
    int width = 0;
    int height = 0;
    Affine affine{0, 1, 0, 0, 0, -1};
    std::string crs_wkt;  ///< WKT2, traditional GIS axis order; never empty for a run's grid

    friend bool operator==(const Grid&, const Grid&) = default;

    [[nodiscard]] double easting(double column, double row) const {
        return affine[0] + affine[1] * column + affine[2] * row;
    }
    [[nodiscard]] double northing(double column, double row) const {
        return affine[3] + affine[4] * column + affine[5] * row;
    }
    [[nodiscard]] bool rotated() const { return affine[2] != 0 || affine[4] != 0; }
};

}  // namespace sunbudget
