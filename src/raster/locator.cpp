#include "sunbudget/raster/locator.hpp"

#include <array>
#include <cassert>
#include <cmath>

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
