#pragma once

#include <cstddef>
#include <cstdint>
#include <map>
#include <optional>
#include <string>
#include <vector>

#include "sunbudget/raster/grid.hpp"

namespace sunbudget {

/// How a layer's pixels are stored. float32: nodata is NaN. uint16: flags, overviews nearest.
enum class Sample { float32, uint16 };

[[nodiscard]] constexpr std::size_t bytes_of(Sample sample) noexcept {
    return sample == Sample::float32 ? 4 : 2;
}

/// What a band says about itself.
struct BandText {
    std::string description;
    std::map<std::string, std::string> metadata;
};

/// One output file before it has pixels: everything that is known about it beforehand.
struct LayerFile {
    std::string name;
    Grid grid;
    Sample sample = Sample::float32;
    int tile = 512;               ///< side of the file's tiles, a multiple of 16
    bool overviews = true;        ///< false: full resolution alone
    bool nearest = false;         ///< overviews take one pixel of four: angles have no plain mean
    std::vector<BandText> bands;  ///< at least one
    std::string unit;
    std::map<std::string, std::string> metadata;
    float quantum = 0;                    ///< stored floats are multiples of it; 0: not rounded
    std::optional<std::uint16_t> nodata;  ///< of a uint16 layer; a float layer's is always NaN
};

/// One resolution of a raster, cut into tiles.
struct Level {
    int width = 0;
    int height = 0;
    int columns = 0;  ///< tiles across
    int rows = 0;     ///< tiles down

    friend bool operator==(const Level&, const Level&) = default;
};

/// Full resolution first, then halved (rounded up) until both sides fit one tile.
[[nodiscard]] std::vector<Level> levels_of(int width, int height, int tile);

/// Where a tile belongs. Level 0 is full resolution; bands count from 0.
struct TileKey {
    int level = 0;
    int band = 0;
    int column = 0;
    int row = 0;

    friend bool operator==(const TileKey&, const TileKey&) = default;
};

/// The tiles of a layer, all levels and bands, counted level by level, band by band, row by row.
struct Layout {
    int width = 0;
    int height = 0;
    int tile = 0;
    int bands = 0;
    Sample sample = Sample::float32;
    std::vector<Level> levels;

    [[nodiscard]] std::size_t tile_count() const noexcept;
    /// Tiles of one level, all bands.
    [[nodiscard]] std::size_t tile_count(int level) const noexcept;
    /// The number of a tile in [0, tile_count()).
    [[nodiscard]] std::size_t index(const TileKey& key) const noexcept;
    [[nodiscard]] bool has(const TileKey& key) const noexcept;
    /// Bytes of a tile that is not encoded.
    [[nodiscard]] std::size_t tile_bytes() const noexcept;

    friend bool operator==(const Layout&, const Layout&) = default;
};

[[nodiscard]] Layout layout_of(const LayerFile& layer);

}  // namespace sunbudget
