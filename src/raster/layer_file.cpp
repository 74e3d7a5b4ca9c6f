#include "sunbudget/raster/layer_file.hpp"

#include <cassert>
#include <utility>

namespace sunbudget {

std::vector<Level> levels_of(int width, int height, int tile) {
    assert(width > 0 && height > 0 && tile > 0 && tile % 16 == 0);
    const auto tiles = [tile](int pixels) { return (pixels - 1) / tile + 1; };
    const auto half = [](int pixels) { return (pixels - 1) / 2 + 1; };
    std::vector<Level> levels{{width, height, tiles(width), tiles(height)}};
    while (width > tile || height > tile) {
        width = half(width);
        height = half(height);
        levels.push_back({width, height, tiles(width), tiles(height)});
    }
    return levels;
}

std::size_t Layout::tile_count(int level) const noexcept {
    const auto& l = levels[static_cast<std::size_t>(level)];
    return static_cast<std::size_t>(bands) * static_cast<std::size_t>(l.columns) *
           static_cast<std::size_t>(l.rows);
}

std::size_t Layout::tile_count() const noexcept {
    std::size_t count = 0;
    for (int level = 0; level < static_cast<int>(levels.size()); ++level)
        count += tile_count(level);
    return count;
}

std::size_t Layout::index(const TileKey& key) const noexcept {
    assert(has(key));
    std::size_t first = 0;
    for (int level = 0; level < key.level; ++level) first += tile_count(level);
    const auto& l = levels[static_cast<std::size_t>(key.level)];
    const auto number = [](int value) { return static_cast<std::size_t>(value); };
    return first + (number(key.band) * number(l.rows) + number(key.row)) * number(l.columns) +
           number(key.column);
}

bool Layout::has(const TileKey& key) const noexcept {
    if (key.level < 0 || key.level >= static_cast<int>(levels.size())) return false;
    const auto& l = levels[static_cast<std::size_t>(key.level)];
    return key.band >= 0 && key.band < bands && key.column >= 0 && key.column < l.columns &&
           key.row >= 0 && key.row < l.rows;
}

std::size_t Layout::tile_bytes() const noexcept {
    return static_cast<std::size_t>(tile) * static_cast<std::size_t>(tile) * bytes_of(sample);
}

Layout layout_of(const LayerFile& layer) {
    assert(!layer.bands.empty());
    auto levels = levels_of(layer.grid.width, layer.grid.height, layer.tile);
    if (!layer.overviews) levels.resize(1);
    return {layer.grid.width, layer.grid.height, layer.tile, static_cast<int>(layer.bands.size()),
            layer.sample,     std::move(levels)};
}

}  // namespace sunbudget
