#include "layer_maker.hpp"

#include <gdal_frmts.h>
#include <gdal_priv.h>
#include <ogr_spatialref.h>

#include <cmath>
#include <cstdlib>
#include <fstream>
#include <limits>
#include <memory>
#include <random>
#include <sstream>
#include <stdexcept>

#include "sunbudget/base/parallel.hpp"

namespace sunbudget::test {

namespace fs = std::filesystem;

float pixel(int band, long column, long row) {
    const auto mixed =
        static_cast<std::uint32_t>(column * 73856093L ^ row * 19349663L ^ (band + 1) * 83492791L) *
        2654435761u;
    if (mixed >> 24 < 8) return std::numeric_limits<float>::quiet_NaN();
    if (column / 150 == 2 && row / 150 == 2) return std::numeric_limits<float>::quiet_NaN();
    const double smooth = 400 + 300 * std::sin(static_cast<double>(column) / 70) +
                          100 * std::cos(static_cast<double>(row) / 90);
    return static_cast<float>(std::nearbyint(smooth * 16) / 16) +
           static_cast<float>(mixed >> 8 & 0x3f) / 16.0F;
}

std::uint16_t flags(int band, long column, long row) {
    const float value = pixel(band, column, row);
    return std::isnan(value) ? std::uint16_t{0x8001} : static_cast<std::uint16_t>(value);
}

LayerFile invented_layer(int width, int height, int tile, int bands, Sample sample) {
    OGRSpatialReference reference;
    reference.importFromEPSG(32633);
    char* wkt = nullptr;
    const char* options[] = {"FORMAT=WKT2_2019", nullptr};
    reference.exportToWkt(&wkt, options);
    LayerFile layer;
    layer.name = "net_shortwave";
    layer.grid = {width, height, {500000, 2, 0, 5600000, 0, -2}, wkt};
    CPLFree(wkt);
    layer.sample = sample;
    layer.tile = tile;
    layer.quantum = sample == Sample::float32 ? 0.0625F : 0.0F;
    layer.unit = sample == Sample::float32 ? "W/m2" : "";
    layer.metadata = {{"PLAN_DIGEST", "sha256:0123"}, {"METHOD", "a <b> & \"c\""}};
    for (int b = 0; b < bands; ++b)
        layer.bands.push_back({"2025-" + std::to_string(b + 1), {{"PERIOD_HOURS", "744"}}});
    return layer;
}

namespace {
template <typename T>
Plane<T> tile_of(const LayerFile& layer, int band, int column, int row) {
    Plane<T> plane(layer.tile, layer.tile, T{12345});
    for (int r = 0; r < layer.tile; ++r)
        for (int c = 0; c < layer.tile; ++c) {
            const long x = static_cast<long>(column) * layer.tile + c;
            const long y = static_cast<long>(row) * layer.tile + r;
            if (x >= layer.grid.width || y >= layer.grid.height) continue;
            if constexpr (std::is_same_v<T, float>)
                plane.at(c, r) = pixel(band, x, y);
            else
                plane.at(c, r) = flags(band, x, y);
        }
    return plane;
}

std::vector<TileKey> shuffled(const LayerFile& layer, unsigned seed) {
    const auto layout = layout_of(layer);
    std::vector<TileKey> keys;
    for (int band = 0; band < layout.bands; ++band)
        for (int row = 0; row < layout.levels[0].rows; ++row)
            for (int column = 0; column < layout.levels[0].columns; ++column)
                keys.push_back({0, band, column, row});
    if (seed != 0) std::shuffle(keys.begin(), keys.end(), std::mt19937(seed));
    return keys;
}

void put_one(const LayerFile& layer, Pyramid& pyramid, const TileKey& key) {
    const auto put = [&](const auto& tile) { pyramid.put(key.band, key.column, key.row, tile); };
    if (layer.sample == Sample::float32)
        put(tile_of<float>(layer, key.band, key.column, key.row));
    else
        put(tile_of<std::uint16_t>(layer, key.band, key.column, key.row));
}

struct CloseDataset {
    void operator()(GDALDataset* dataset) const { GDALClose(dataset); }
};
}  // namespace

Plane<float> invented_tile(const LayerFile& layer, int band, int column, int row) {
    return tile_of<float>(layer, band, column, row);
}

void put_all(const LayerFile& layer, Pyramid& pyramid, unsigned seed, int threads) {
    const auto keys = shuffled(layer, seed);
    parallel_for(keys.size(), threads,
                 [&](std::size_t i, int) { put_one(layer, pyramid, keys[i]); });
}

void put_some(const LayerFile& layer, Pyramid& pyramid, unsigned seed, int first, int last) {
    const auto keys = shuffled(layer, seed);
    for (int i = first; i < last; ++i)
        put_one(layer, pyramid, keys.at(static_cast<std::size_t>(i)));
}

void put_missing(const LayerFile& layer, Pyramid& pyramid, const Spool& spool) {
    for (const auto& key : shuffled(layer, 0))
        if (!spool.has(key)) put_one(layer, pyramid, key);
}

std::vector<BandStatistics> statistics_of(const LayerFile& layer) {
    std::vector<BandStatistics> bands;
    for (int band = 0; band < static_cast<int>(layer.bands.size()); ++band) {
        std::vector<BlockStatistics> blocks;
        for (int top = 0; top < layer.grid.height; top += 256)
            for (int left = 0; left < layer.grid.width; left += 256) {
                auto& block = blocks.emplace_back();
                for (int r = top; r < std::min(top + 256, layer.grid.height); ++r) {
                    std::vector<float> line;
                    for (int c = left; c < std::min(left + 256, layer.grid.width); ++c)
                        line.push_back(pixel(band, c, r));
                    add_row(block, line);
                }
            }
        bands.push_back(combined(blocks, static_cast<std::uint64_t>(layer.grid.width) *
                                             static_cast<std::uint64_t>(layer.grid.height)));
    }
    return bands;
}

fs::path made(const LayerFile& layer, const fs::path& folder, unsigned seed, int threads) {
    fs::create_directories(folder);
    auto spool = Spool::create(folder / (layer.name + ".spool"), layout_of(layer));
    Pyramid pyramid(layer, spool);
    put_all(layer, pyramid, seed, threads);
    const auto file = folder / (layer.name + ".tif");
    const auto statistics =
        layer.sample == Sample::float32 ? statistics_of(layer) : std::vector<BandStatistics>{};
    finish_layer(layer, spool, statistics, file);
    spool.remove();
    return file;
}

std::vector<std::vector<float>> reference_levels(const LayerFile& layer, int band) {
    int width = layer.grid.width, height = layer.grid.height;
    std::vector<std::vector<float>> levels(1);
    for (int y = 0; y < height; ++y)
        for (int x = 0; x < width; ++x)
            levels[0].push_back(layer.sample == Sample::float32
                                    ? pixel(band, x, y)
                                    : static_cast<float>(flags(band, x, y)));
    while (width > layer.tile || height > layer.tile) {
        const int w = (width + 1) / 2, h = (height + 1) / 2;
        const auto& fine = levels.back();
        std::vector<float> coarse;
        for (int y = 0; y < h; ++y)
            for (int x = 0; x < w; ++x) {
                double sum = 0;
                int count = 0;
                for (int j = 2 * y; j < std::min(2 * y + 2, height); ++j)
                    for (int i = 2 * x; i < std::min(2 * x + 2, width); ++i) {
                        const float value =
                            fine[static_cast<std::size_t>(j) * static_cast<std::size_t>(width) +
                                 static_cast<std::size_t>(i)];
                        if (std::isnan(value)) continue;
                        sum += static_cast<double>(value);
                        ++count;
                    }
                const double quantum = static_cast<double>(layer.quantum);
                const float corner =
                    fine[static_cast<std::size_t>(2 * y) * static_cast<std::size_t>(width) +
                         static_cast<std::size_t>(2 * x)];
                const auto mean = static_cast<float>(
                    quantum > 0 ? std::nearbyint(sum / count / quantum) * quantum : sum / count);
                coarse.push_back(layer.sample == Sample::float32 ? mean : corner);
            }
        levels.push_back(std::move(coarse));
        width = w;
        height = h;
    }
    return levels;
}

std::vector<float> read_level(const fs::path& file, int band, int level) {
    GDALRegister_GTiff();
    const std::unique_ptr<GDALDataset, CloseDataset> dataset(
        GDALDataset::Open(file.c_str(), GDAL_OF_RASTER | GDAL_OF_VERBOSE_ERROR));
    if (!dataset) throw std::runtime_error("GDAL cannot open " + file.string());
    auto* from = dataset->GetRasterBand(band + 1);
    if (level > 0) from = from->GetOverview(level - 1);
    if (from == nullptr) throw std::runtime_error("no such level in " + file.string());
    const int w = from->GetXSize(), h = from->GetYSize();
    std::vector<float> pixels(static_cast<std::size_t>(w) * static_cast<std::size_t>(h));
    if (from->RasterIO(GF_Read, 0, 0, w, h, pixels.data(), w, h, GDT_Float32, 0, 0, nullptr) !=
        CE_None)
        throw std::runtime_error("GDAL cannot read " + file.string());
    return pixels;
}

bool same_pixels(const std::vector<float>& a, const std::vector<float>& b) {
    return std::equal(a.begin(), a.end(), b.begin(), b.end(),
                      [](float x, float y) { return x == y || (std::isnan(x) && std::isnan(y)); });
}

std::pair<bool, std::string> validated(const fs::path& file) {
    const auto log = file.string() + ".log";
    const int status = std::system(("/usr/bin/python3 -m osgeo_utils.samples.validate_cloud_"
                                    "optimized_geotiff '" +
                                    file.string() + "' >'" + log + "' 2>&1")
                                       .c_str());
    std::ostringstream text;
    text << std::ifstream(log).rdbuf();
    return {status == 0, text.str()};
}

void flip_byte(const fs::path& file, std::uint64_t offset) {
    std::fstream stream(file, std::ios::in | std::ios::out | std::ios::binary);
    stream.seekg(static_cast<std::streamoff>(offset));
    const auto byte = static_cast<char>(stream.get() ^ 0x10);
    stream.seekp(static_cast<std::streamoff>(offset));
    stream.put(byte);
    if (!stream.flush()) throw std::runtime_error("cannot damage " + file.string());
}

}  // namespace sunbudget::test
