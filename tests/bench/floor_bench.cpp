// The least a run can cost: reading the inputs tile by tile and encoding the product's tiles, overviews
// included, all threads busy, nothing else. The product is in memory before the clock starts.
//
//     floor_bench THREADS PRODUCT INPUT...
#include <gdal_priv.h>

#include <chrono>
#include <cstdio>
#include <cstdlib>
#include <ctime>
#include <deque>
#include <limits>
#include <optional>
#include <vector>

#include "sunbudget/base/error.hpp"
#include "sunbudget/base/parallel.hpp"
#include "sunbudget/raster/gdal_setup.hpp"
#include "sunbudget/raster/source.hpp"
#include "sunbudget/raster/tile_codec.hpp"

using namespace sunbudget;

namespace {
constexpr int tile = 512;

Source open(const char* path, const Grid& grid) {
    SourceSpec spec;
    spec.name.path = path;
    const auto info = inspect(spec.name);
    spec.kind = info.type == PixelType::u8 ? DataKind::code : DataKind::continuous;
    return Source::open(spec, grid);
}

std::vector<Window> tiles_of(const Grid& grid) {
    std::vector<Window> windows;
    for (int row = 0; row < grid.height; row += tile)
        for (int column = 0; column < grid.width; column += tile)
            windows.push_back({column, row, tile, tile});
    return windows;
}

/// The product's overviews, cut into tiles that are padded with nodata at the edges as the file's are.
std::vector<Plane<float>> overview_tiles(const char* product) {
    std::vector<Plane<float>> tiles;
    const GDALDatasetUniquePtr file(GDALDataset::Open(product, GDAL_OF_RASTER));
    auto* band = file->GetRasterBand(1);
    for (int n = 0; n < band->GetOverviewCount(); ++n) {
        auto* level = band->GetOverview(n);
        for (int row = 0; row < level->GetYSize(); row += tile)
            for (int column = 0; column < level->GetXSize(); column += tile) {
                auto& plane =
                    tiles.emplace_back(tile, tile, std::numeric_limits<float>::quiet_NaN());
                const int width = std::min(tile, level->GetXSize() - column),
                          height = std::min(tile, level->GetYSize() - row);
                if (level->RasterIO(GF_Read, column, row, width, height, plane.data(), width,
                                    height, GDT_Float32, 4,
                                    static_cast<GSpacing>(plane.stride() * sizeof(float)),
                                    nullptr) != CE_None)
                    throw Error(Cause::input, "an overview cannot be read", product);
            }
    }
    return tiles;
}

/// One thread's readers of all inputs.
class Inputs {
  public:
    explicit Inputs(const std::deque<Source>& sources) {
        for (const auto& source : sources) readers_.emplace_back(source);
        for (const auto& source : sources) codes_.push_back(source.spec().kind == DataKind::code);
    }
    void read(const Window& window) {
        for (std::size_t i = 0; i < readers_.size(); ++i) {
            if (codes_[i])
                readers_[i].read_codes(window, numbers_);
            else
                readers_[i].read(window, values_);
        }
    }

  private:
    std::vector<Reader> readers_;
    std::vector<bool> codes_;
    Plane<std::int32_t> numbers_;
    Plane<float> values_;
};

double core_seconds() {
    return static_cast<double>(std::clock()) / CLOCKS_PER_SEC;
}

void run(int threads, const char* product_path, const std::vector<const char*>& paths) {
    gdal_setup(std::uint64_t{128} << 20);
    RasterName product_name;
    product_name.path = product_path;
    const Grid grid = inspect(product_name).grid;
    const auto windows = tiles_of(grid);
    const auto product = open(product_path, grid);
    std::vector<Plane<float>> tiles(windows.size());
    Reader reader(product);
    for (std::size_t i = 0; i < windows.size(); ++i) reader.read(windows[i], tiles[i]);
    const auto overviews = overview_tiles(product_path);

    const auto start = std::chrono::steady_clock::now();
    const double core_start = core_seconds();
    std::deque<Source> sources;
    for (const auto* path : paths) sources.push_back(open(path, grid));
    std::vector<std::optional<Inputs>> inputs(static_cast<std::size_t>(threads));
    std::vector<std::size_t> bytes(inputs.size());
    parallel_for(windows.size(), threads, [&](std::size_t i, int thread) {
        const auto t = static_cast<std::size_t>(thread);
        if (!inputs[t]) inputs[t].emplace(sources);
        inputs[t]->read(windows[i]);
        bytes[t] += encode_tile(tiles[i]).size();
    });
    parallel_for(overviews.size(), threads, [&](std::size_t i, int thread) {
        bytes[static_cast<std::size_t>(thread)] += encode_tile(overviews[i]).size();
    });
    const std::chrono::duration<double> wall = std::chrono::steady_clock::now() - start;
    std::size_t all = 0;
    for (const auto count : bytes) all += count;
    std::printf("wall_s %.3f core_s %.3f bytes %zu\n", wall.count(), core_seconds() - core_start,
                all);
}
}  // namespace

int main(int count, char** arguments) {
    if (count < 4) {
        std::fputs("usage: floor_bench THREADS PRODUCT INPUT...\n", stderr);
        return 2;
    }
    try {
        run(std::atoi(arguments[1]), arguments[2], {arguments + 3, arguments + count});
    } catch (const Error& error) {
        std::fprintf(stderr, "floor_bench: %s\n", error.what());
        return 1;
    }
    return 0;
}
