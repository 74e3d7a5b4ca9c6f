#include "sunbudget/raster/locator.hpp"

#include <array>
#include <cassert>
#include <cmath>
#include <utility>

#include "affine.hpp"
#include "crs.hpp"
#include "sunbudget/base/units.hpp"
#include "sunbudget/raster/grid_build.hpp"

namespace sunbudget {

struct Locator::State {
    Grid grid;
    PointTransform to_wgs84;
};

Locator::Locator(const Grid& grid)
    : state_(new State{grid, PointTransform(grid.crs_wkt, wgs84_text, grid)}) {}
Locator::~Locator() = default;
Locator::Locator(Locator&&) noexcept = default;
Locator& Locator::operator=(Locator&&) noexcept = default;
Locator Locator::clone() const {
    return Locator(state_->grid);
}

std::optional<Geodetic> Locator::at(double column, double row) const {
    Geodetic place;
    locate({&column, 1}, {&row, 1}, {&place.latitude_rad, 1}, {&place.longitude_rad, 1});
    if (std::isnan(place.latitude_rad)) return std::nullopt;
    return place;
}

void Locator::locate(std::span<const double> column, std::span<const double> row,
                     std::span<double> latitude_rad, std::span<double> longitude_rad) const {
    assert(column.size() == row.size() && column.size() == latitude_rad.size() &&
           column.size() == longitude_rad.size());
    for (std::size_t i = 0; i < column.size(); ++i) {
        longitude_rad[i] = state_->grid.easting(column[i], row[i]);
        latitude_rad[i] = state_->grid.northing(column[i], row[i]);
    }
    state_->to_wgs84.apply(longitude_rad, latitude_rad);
    for (std::size_t i = 0; i < column.size(); ++i) {
        longitude_rad[i] = rad_from_deg(std::remainder(longitude_rad[i], 360.0));
        latitude_rad[i] = rad_from_deg(latitude_rad[i]);
    }
}

namespace {

struct Vector3 {
    double x, y, z;
};

/// Earth-centred place on the WGS84 ellipsoid (EPSG:7030), metres.
Vector3 earth_centred(const Geodetic& place) {
    constexpr double a = 6378137.0, f = 1 / 298.257223563, e2 = f * (2 - f);
    const double s = std::sin(place.latitude_rad), c = std::cos(place.latitude_rad);
    const double normal_m = a / std::sqrt(1 - e2 * s * s);
    return {normal_m * c * std::cos(place.longitude_rad),
            normal_m * c * std::sin(place.longitude_rad), normal_m * (1 - e2) * s};
}

}  // namespace

std::optional<PixelMatrix> Locator::matrix(double column, double row) const {
    // Differences of places in space: neither the poles nor the 180th meridian are special there.
    const auto middle = at(column, row);
    const auto left = at(column - 0.5, row), right = at(column + 0.5, row);
    const auto above = at(column, row - 0.5), below = at(column, row + 0.5);
    if (!middle || !left || !right || !above || !below) return std::nullopt;
    const double sin_lat = std::sin(middle->latitude_rad), cos_lat = std::cos(middle->latitude_rad);
    const double sin_lon = std::sin(middle->longitude_rad),
                 cos_lon = std::cos(middle->longitude_rad);
    const auto step = [&](const Geodetic& from, const Geodetic& to) {
        const auto a = earth_centred(from), b = earth_centred(to);
        const double x = b.x - a.x, y = b.y - a.y, z = b.z - a.z;
        return std::pair{-sin_lon * x + cos_lon * y,
                         -sin_lat * (cos_lon * x + sin_lon * y) + cos_lat * z};
    };
    const auto [east_per_column, north_per_column] = step(*left, *right);
    const auto [east_per_row, north_per_row] = step(*above, *below);
    const PixelMatrix found{east_per_column, east_per_row, north_per_column, north_per_row};
    const double size =
        std::hypot(east_per_column, north_per_column) * std::hypot(east_per_row, north_per_row);
    if (!(std::abs(found.determinant()) > 1e-6 * size)) return std::nullopt;
    return found;
}

void places_in(const Grid& grid, const Grid& from, std::span<double> column,
               std::span<double> row) {
    for (std::size_t i = 0; i < column.size(); ++i) {
        const double easting = from.easting(column[i], row[i]),
                     northing = from.northing(column[i], row[i]);
        column[i] = easting;
        row[i] = northing;
    }
    if (!same_crs(grid.crs_wkt, from.crs_wkt))
        PointTransform(from.crs_wkt, grid.crs_wkt, from).apply(column, row);
    for (std::size_t i = 0; i < column.size(); ++i)
        if (!std::isnan(column[i]) && !std::isnan(row[i]))
            to_pixels(grid.affine, column[i], row[i]);
}

std::optional<PixelPlace> place_in(const Grid& grid, double easting, double northing,
                                   const std::string& crs_wkt) {
    if (!same_crs(grid.crs_wkt, crs_wkt)) {
        const Grid around{1, 1, {easting, 0, 0, northing, 0, 0}, crs_wkt};
        const PointTransform transform(crs_wkt, grid.crs_wkt, around);
        transform.apply({&easting, 1}, {&northing, 1});
    }
    if (std::isnan(easting) || std::isnan(northing)) return std::nullopt;
    to_pixels(grid.affine, easting, northing);
    return PixelPlace{easting, northing};
}

}  // namespace sunbudget
