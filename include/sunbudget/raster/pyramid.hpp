#pragma once

#include <cstddef>
#include <cstdint>
#include <memory>
#include <span>

#include "sunbudget/base/plane.hpp"
#include "sunbudget/raster/layer_file.hpp"
#include "sunbudget/raster/spool.hpp"
#include "sunbudget/raster/statistics.hpp"

namespace sunbudget {

/// Rounds to the nearest multiple of `quantum` (halves to the even one), a power of two; 0 leaves the
/// row as it is.
/// Never gives -0. NaN stays NaN.
void round_row(std::span<float> row, float quantum) noexcept;

/// Turns full-resolution tiles into the encoded tiles of every level. A tile is encoded, kept in
/// the spool and folded 2 x 2 into the overview tile above it, which stays in memory until its last
/// child has come. Floats: mean of the valid pixels, rounded to the layer's quantum. uint16: the
/// upper left pixel. The result does not depend on the order of tiles or on threads.
class Pyramid {
  public:
    /// `spool` must be of the layer's layout and outlive this object. Tiles that it holds already,
    /// from an earlier run, are taken into the overviews that are still missing.
    /// Overview tiles in the making take up to `most_bytes`; those beyond are made from the spool when
    /// their last child has come, which costs decoding it again and changes no bit.
    Pyramid(const LayerFile& layer, Spool& spool, std::size_t most_bytes = std::size_t{1} << 30);
    ~Pyramid();

    /// Takes one full-resolution tile, each once; safe to call from many threads.
    ///
    /// shape   tile x tile, or clipped at the raster's edge; pixels beyond the edge are not looked
    /// at errors  those of Spool::append
    void put(int band, int tile_column, int tile_row, const Plane<float>& pixels,
             std::span<const BlockStatistics> blocks = {});
    void put(int band, int tile_column, int tile_row, const Plane<std::uint16_t>& pixels,
             std::span<const BlockStatistics> blocks = {});

    /// The most overview memory that was in use at any time.
    [[nodiscard]] std::size_t peak_bytes() const;

  private:
    struct State;
    std::unique_ptr<State> state_;
};

}  // namespace sunbudget
