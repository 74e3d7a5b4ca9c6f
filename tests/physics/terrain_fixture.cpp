#include "terrain_fixture.hpp"

#include <gdal_priv.h>

#include <algorithm>
#include <array>
#include <cmath>
#include <limits>
#include <numbers>
#include <random>
#include <stdexcept>

#include "sunbudget/base/units.hpp"
#include "sunbudget/physics/gradient.hpp"
#include "support/vectors.hpp"

namespace sunbudget::test {

namespace {
constexpr float missing = std::numeric_limits<float>::quiet_NaN();

PixelMatrix middle_matrix(GDALDataset& dataset) {
    std::array<double, 6> t{};
    dataset.GetGeoTransform(t.data());
    const auto* crs = dataset.GetSpatialRef();
    if (crs == nullptr || crs->IsGeographic() == 0) return {t[1], t[2], t[4], t[5]};
    const double latitude_deg = t[3] + t[5] * dataset.GetRasterYSize() / 2;
    const double metres = rad_from_deg(1.0) * 6371008.8;
    return {t[1] * metres * std::cos(rad_from_deg(latitude_deg)), 0, 0, t[5] * metres};
}
}  // namespace

Plane<float> cut(const Plane<float>& raster, Window window) {
    Plane<float> piece(window.width, window.height, missing);
    for (int r = 0; r < window.height; ++r)
        for (int c = 0; c < window.width; ++c) {
            const long column = window.column + c;
            const long row = window.row + r;
            if (column >= 0 && row >= 0 && column < raster.width() && row < raster.height())
                piece.at(c, r) = raster.at(static_cast<int>(column), static_cast<int>(row));
        }
    return piece;
}

Slopes slopes_of(const Plane<float>& height_m) {
    const int width = height_m.width();
    const int height = height_m.height();
    const auto padded = cut(height_m, {-1, -1, width + 2, height + 2});
    Slopes slopes{Plane<float>(width, height), Plane<float>(width, height)};
    for (int r = 0; r < height; ++r)
        horn_gradient(padded.row(r), padded.row(r + 1), padded.row(r + 2), slopes.per_column.row(r),
                      slopes.per_row.row(r));
    return slopes;
}

std::vector<Level> levels_of(const Terrain& terrain, const Sight& sight) {
    const double shortest =
        std::min(length_of_m(terrain.matrix, 1, 0), length_of_m(terrain.matrix, 0, 1));
    return build_levels(terrain.height_m, levels_for(shortest, sight));
}

BlockTerrain block_terrain(const Terrain& terrain, const std::vector<Level>& levels, Window block) {
    const Window around = patch_window(block);
    BlockTerrain made{block, make_height_patch(around, cut(terrain.height_m, around)), {}};
    for (std::size_t i = 0; i < levels.size(); ++i) {
        const int level = static_cast<int>(i) + 1;
        const Window window = level_window(block, level);
        made.levels.push_back(make_level_patch(level, window, cut(levels[i].maximum_m, window),
                                               cut(levels[i].mean_m, window)));
    }
    return made;
}

Plane<float> block_horizon(const BlockTerrain& terrain, const Slopes& slopes,
                           const Direction& direction, const Sight& sight) {
    const Window block = terrain.block;
    Plane<float> rise(block.width, block.height);
    const auto part = [&](const Plane<float>& plane, int r) {
        return plane.row(static_cast<int>(block.row) + r)
            .subspan(static_cast<std::size_t>(block.column), static_cast<std::size_t>(block.width));
    };
    for (int r = 0; r < block.height; ++r)
        start_rise(part(slopes.per_column, r), part(slopes.per_row, r), direction, rise.row(r));
    raise_by_far(far_rise(terrain.levels, direction, sight, block), terrain.patch, block, rise);
    raise_by_near(terrain.patch, direction, sight, block, rise);
    for (int r = 0; r < block.height; ++r)
        tangents(terrain.patch.height_m.row(r + near_steps)
                     .subspan(near_steps, static_cast<std::size_t>(block.width)),
                 rise.row(r), {static_cast<float>(1 / direction.step_m), 0}, rise.row(r));
    return rise;
}

Plane<float> horizon_of(const Terrain& terrain, const std::vector<Level>& levels,
                        const Slopes& slopes, const Direction& direction, const Sight& sight,
                        int block_size) {
    const int width = terrain.height_m.width();
    const int height = terrain.height_m.height();
    Plane<float> whole(width, height);
    for (int row = 0; row < height; row += block_size)
        for (int column = 0; column < width; column += block_size) {
            const Window block{column, row, std::min(block_size, width - column),
                               std::min(block_size, height - row)};
            const auto part =
                block_horizon(block_terrain(terrain, levels, block), slopes, direction, sight);
            for (int r = 0; r < block.height; ++r)
                std::ranges::copy(part.row(r), whole.row(row + r).begin() + column);
        }
    return whole;
}

Terrain read_terrain(const std::string& name, int band) {
    GDALAllRegister();
    const auto file = real_data(name);
    if (!file) throw std::runtime_error("no real raster " + name);
    const GDALDatasetUniquePtr dataset(GDALDataset::Open(file->c_str(), GDAL_OF_RASTER));
    if (!dataset) throw std::runtime_error("cannot open " + name);
    auto* source = dataset->GetRasterBand(band);
    Terrain terrain{name, Plane<float>(source->GetXSize(), source->GetYSize()),
                    middle_matrix(*dataset)};
    int has_nodata = 0;
    const auto nodata = static_cast<float>(source->GetNoDataValue(&has_nodata));
    for (int r = 0; r < source->GetYSize(); ++r) {
        const auto row = terrain.height_m.row(r);
        if (source->RasterIO(GF_Read, 0, r, source->GetXSize(), 1, row.data(), source->GetXSize(),
                             1, GDT_Float32, 0, 0) != CE_None)
            throw std::runtime_error("cannot read " + name);
        if (has_nodata != 0) std::ranges::replace(row, nodata, missing);
    }
    return terrain;
}

Terrain made_terrain(int width, int height, unsigned seed) {
    std::mt19937 random(seed);
    std::uniform_real_distribution<double> unit(0, 1);
    Terrain terrain{"made", Plane<float>(width, height, 500.0F)};
    for (int wave = 0; wave < 24; ++wave) {
        const double length_px = 6 * std::pow(1.35, wave);
        const double turn = unit(random) * 2 * std::numbers::pi;
        const double shift = unit(random) * 100;
        const double size_m = 0.35 * length_px * (0.4 + unit(random));
        for (int r = 0; r < height; ++r)
            for (int c = 0; c < width; ++c)
                terrain.height_m.at(c, r) +=
                    static_cast<float>(size_m * std::sin((c * std::cos(turn) + r * std::sin(turn)) /
                                                             length_px * 2 * std::numbers::pi +
                                                         shift));
    }
    for (int tower = 0; tower < width * height / 4000; ++tower)
        terrain.height_m.at(static_cast<int>(unit(random) * width),
                            static_cast<int>(unit(random) * height)) += 60.0F;
    return terrain;
}

}  // namespace sunbudget::test
