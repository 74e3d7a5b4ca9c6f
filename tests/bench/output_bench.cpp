// How long the output side takes for one layer of float pixels: encode, overviews and spool; finish.
//
//     raster_output_bench [SIDE [THREADS [FOLDER]]]
#include <chrono>
#include <cmath>
#include <cstdio>
#include <cstdlib>
#include <filesystem>
#include <limits>

#include "sunbudget/base/parallel.hpp"
#include "sunbudget/raster/finish.hpp"
#include "sunbudget/raster/pyramid.hpp"
#include "sunbudget/raster/tile_codec.hpp"

using namespace sunbudget;

namespace {
double seconds() {
    using namespace std::chrono;
    return duration<double>(steady_clock::now().time_since_epoch()).count();
}

/// Slopes, roofs and noise, as net shortwave has them, rounded to 1/16.
Plane<float> pixels(int tile, int column, int row) {
    Plane<float> plane(tile, tile);
    for (int r = 0; r < tile; ++r) {
        const auto y = static_cast<double>(row * tile + r);
        for (int c = 0; c < tile; ++c) {
            const auto x = static_cast<double>(column * tile + c);
            const auto noise = static_cast<std::uint32_t>((column * tile + c) * 73856093 ^
                                                          (row * tile + r) * 19349663) *
                               2654435761u;
            plane.at(c, r) = static_cast<float>(500 + 200 * std::sin(x / 300) * std::cos(y / 200) +
                                                (noise >> 28));
        }
        round_row(plane.row(r), 0.0625F);
    }
    return plane;
}

LayerFile layer_of(int side) {
    LayerFile layer;
    layer.name = "bench";
    layer.grid = {side, side, {0, 1, 0, 0, 0, -1}, "LOCAL_CS[\"bench\",UNIT[\"metre\",1]]"};
    layer.bands.resize(1);
    layer.quantum = 0.0625F;
    return layer;
}

template <typename T>
void time_codec(const char* what, const Plane<T>& plane) {
    constexpr int rounds = 40;
    const double start = seconds();
    std::size_t bytes = 0;
    for (int i = 0; i < rounds; ++i) bytes = encode_tile(plane).size();
    const double each = (seconds() - start) / rounds / plane.width() / plane.height();
    std::printf("encode %-22s %.4f us per pixel, %zu bytes\n", what, each * 1e6, bytes);
}

template <typename T>
void time_statistics(const Plane<T>& plane) {
    constexpr int rounds = 40;
    const double start = seconds();
    BlockStatistics block;
    for (int i = 0; i < rounds; ++i)
        for (int r = 0; r < plane.height(); ++r) add_row(block, plane.row(r));
    const double each = (seconds() - start) / rounds / plane.width() / plane.height();
    std::printf("statistics %.4f us per pixel (mean %g)\n", each * 1e6, block.mean);
}
}  // namespace

int main(int count, char** arguments) {
    const int side = count > 1 ? std::atoi(arguments[1]) : 8192;
    const int threads = count > 2 ? std::atoi(arguments[2]) : available_threads();
    const std::filesystem::path folder = count > 3 ? arguments[3] : ".";
    const auto layer = layer_of(side);

    time_codec("one float tile", pixels(512, 3, 5));
    time_codec("a tile of NaN", Plane<float>(512, 512, std::numeric_limits<float>::quiet_NaN()));
    time_codec("a tile of flags", Plane<std::uint16_t>(512, 512, 4));
    time_statistics(pixels(512, 3, 5));

    const auto size = layout_of(layer).levels[0];
    std::vector<Plane<float>> tiles;
    for (int i = 0; i < 16; ++i) tiles.push_back(pixels(layer.tile, i % 4, i / 4));
    auto spool = Spool::create(folder / "bench.spool", layout_of(layer));
    Pyramid pyramid(layer, spool);
    double start = seconds();
    parallel_for(static_cast<std::size_t>(size.columns * size.rows), threads,
                 [&](std::size_t i, int) {
                     const int number = static_cast<int>(i);
                     const int column = number % size.columns, row = number / size.columns;
                     const auto sample = static_cast<std::size_t>(column % 4 + row % 4 * 4);
                     pyramid.put(0, column, row, tiles[sample]);
                 });
    std::printf("%d x %d, %d threads: encode, overviews and spool %.3f s", side, side, threads,
                seconds() - start);
    std::printf(", %.1f MB, overviews in memory at most %.1f MB\n",
                static_cast<double>(spool.bytes()) / 1e6,
                static_cast<double>(pyramid.peak_bytes()) / 1e6);
    start = seconds();
    finish_layer(layer, spool, {}, folder / "bench.tif");
    std::printf("finish with fsync and verification %.3f s\n", seconds() - start);
    spool.remove();
    std::filesystem::remove(folder / "bench.tif");
}
