#pragma once

#include <optional>
#include <span>
#include <vector>

#include "sunbudget/base/plane.hpp"
#include "sunbudget/model/change.hpp"
#include "sunbudget/model/terrain.hpp"
#include "sunbudget/raster/source.hpp"

namespace sunbudget {

/// Holes no wider than this are bridged; larger ones stay holes.
inline constexpr int bridged_px = 3;

/// Fills holes of up to bridged_px pixels: where ground lies within reach on both sides along a row, a
/// column or a diagonal, the pixel gets the mean of the straight lines between the two sides.
///
/// shape   `heights_m` holds bridged_px pixels more on every side than `out`, which is as large as wanted
/// nodata  NaN; what cannot be bridged stays NaN
/// out     how many pixels of `out` were bridged
long bridge_holes(const Plane<float>& heights_m, Plane<float>& out);

/// Heights from one or several rasters laid over the run's grid; where they overlap the first that has
/// a value gives it. One object a thread.
class ElevationReader {
  public:
    explicit ElevationReader(std::span<const Source> sources);
    /// The heights that shade, after what a change has made of them.
    explicit ElevationReader(const Terrain& terrain);

    /// Heights of a window of the grid's lattice, also beyond the grid; small holes bridged.
    /// Bits do not depend on the window.
    void read(const Window& window, Plane<float>& heights_m);

    [[nodiscard]] std::uint64_t infinities() const;

  private:
    void read_all(const Window& window, Plane<float>& heights_m);

    std::vector<Reader> readers_;
    std::optional<ChangeReader> raised_;
    Plane<float> wide_, next_;
};

/// The pixels of the grid's lattice on which the rasters lie, roughly, from their outlines.
[[nodiscard]] Window extent_on_grid(std::span<const Source> sources, const Grid& grid);

}  // namespace sunbudget
