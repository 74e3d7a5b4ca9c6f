#pragma once

#include <string>
#include <vector>

#include "sunbudget/base/plane.hpp"
#include "sunbudget/physics/horizon.hpp"
#include "sunbudget/physics/levels.hpp"

namespace sunbudget::test {

/// A raster of heights with the matrix that holds all over it.
struct Terrain {
    std::string name;
    Plane<float> height_m;
    PixelMatrix matrix{10, 0, 0, -10};
};

/// Slopes in pixel space of a whole raster.
struct Slopes {
    Plane<float> per_column, per_row;
};
[[nodiscard]] Slopes slopes_of(const Plane<float>& height_m);

/// A window of a raster, NaN outside it.
[[nodiscard]] Plane<float> cut(const Plane<float>& raster, Window window);

/// Levels of a raster for all directions.
[[nodiscard]] std::vector<Level> levels_of(const Terrain& terrain, const Sight& sight);

/// What a block needs from the raster and its levels.
struct BlockTerrain {
    Window block;
    HeightPatch patch;
    std::vector<LevelPatch> levels;
};
[[nodiscard]] BlockTerrain block_terrain(const Terrain& terrain, const std::vector<Level>& levels,
                                         Window block);

/// Tangents of a block's horizons, as the engine works them out.
[[nodiscard]] Plane<float> block_horizon(const BlockTerrain& block, const Slopes& slopes,
                                         const Direction& direction, const Sight& sight);

/// Tangents of a whole raster's horizons, block by block.
[[nodiscard]] Plane<float> horizon_of(const Terrain& terrain, const std::vector<Level>& levels,
                                      const Slopes& slopes, const Direction& direction,
                                      const Sight& sight, int block_size = 256);

/// Band `band` of a real raster, nodata as NaN, with the matrix of its middle (spherical for
/// geographic grids: a test of the look needs no better).
[[nodiscard]] Terrain read_terrain(const std::string& name, int band = 1);

/// Hills of several sizes with a few steep towers: nothing alike twice.
[[nodiscard]] Terrain made_terrain(int width, int height, unsigned seed = 1);

}  // namespace sunbudget::test
