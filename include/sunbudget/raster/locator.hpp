#pragma once

#include <memory>
#include <optional>
#include <span>
#include <string>

#include "sunbudget/base/pixel_matrix.hpp"
#include "sunbudget/raster/grid.hpp"

namespace sunbudget {

/// A place on the WGS84 ellipsoid.
struct Geodetic {
    double latitude_rad = 0;   ///< [-pi/2, pi/2]
    double longitude_rad = 0;  ///< [-pi, pi], east positive
};

/// A place in pixels of a grid, counted from the outer corner of the first pixel.
struct PixelPlace {
    double column = 0;
    double row = 0;
};

/// From pixels to places on Earth, through PROJ. One object per thread: `clone` it.
class Locator {
  public:
    /// Throws Error(input) when no way from the CRS to WGS84 is known.
    explicit Locator(const Grid& grid);
    ~Locator();
    Locator(Locator&&) noexcept;
    Locator& operator=(Locator&&) noexcept;
    [[nodiscard]] Locator clone() const;

    /// Nothing where the projection has no answer: off the globe.
    [[nodiscard]] std::optional<Geodetic> at(double column, double row) const;

    /// Metres on the ground (east, north, on the WGS84 ellipsoid) for a step of a pixel, at a place;
    /// nothing where there is no answer, or where the projection folds the ground to a line.
    [[nodiscard]] std::optional<PixelMatrix> matrix(double column, double row) const;

    /// Many points; NaN where there is no answer. A point's result does not depend on the others.
    ///
    /// shape   four spans of one length
    void locate(std::span<const double> column, std::span<const double> row,
                std::span<double> latitude_rad, std::span<double> longitude_rad) const;

  private:
    struct State;
    std::unique_ptr<State> state_;
};

/// Where a point of another CRS falls in a grid; nothing where there is no answer. It may lie
/// outside the grid.
[[nodiscard]] std::optional<PixelPlace> place_in(const Grid& grid, double easting, double northing,
                                                 const std::string& crs_wkt);

/// Where places of another grid fall in a grid: many at once, NaN where there is no answer.
///
/// in      column, row  of `from`, counted from its first pixel's outer corner
/// out     the same in pixels of `grid`, in place
void places_in(const Grid& grid, const Grid& from, std::span<double> column, std::span<double> row);

}  // namespace sunbudget
