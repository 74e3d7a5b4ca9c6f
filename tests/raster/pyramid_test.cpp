#include "sunbudget/raster/pyramid.hpp"

#include <bit>
#include <catch2/catch.hpp>
#include <cmath>
#include <limits>
#include <random>

#include "layer_maker.hpp"
#include "reference/shortwave.hpp"
#include "sunbudget/base/digest.hpp"
#include "support/vectors.hpp"

using namespace sunbudget;
using namespace sunbudget::test;

TEST_CASE("round_row: equals rounding in double precision, bit for bit", "[raster][differential]") {
    const float quantum = GENERATE(1.0f / 8192, 1.0f / 16, 1.0f / 256, 2.0f);
    std::mt19937 random(7);
    std::uniform_real_distribution<float> values(-2000, 2000);
    std::vector<float> row(1000);
    for (auto& value : row) value = values(random);
    for (int i = 0; i < 100; ++i)
        row[static_cast<std::size_t>(i)] = (static_cast<float>(i) + 0.5f) * quantum;  // halves
    const auto before = row;
    round_row(row, quantum);
    int differ = 0;
    for (std::size_t i = 0; i < row.size(); ++i)
        differ += static_cast<double>(row[i]) !=
                  quantised_reference(static_cast<double>(before[i]), static_cast<double>(quantum));
    CHECK(differ == 0);
}

TEST_CASE("round_row: nearest multiple, halves to even, never minus zero", "[raster]") {
    std::vector<float> row{0.03F,    -0.03F,   0.09375F,
                           0.15625F, -100.04F, std::numeric_limits<float>::quiet_NaN()};
    round_row(row, 0.0625F);
    CHECK(row[0] == 0.0F);
    CHECK(std::bit_cast<std::uint32_t>(row[1]) == 0);
    CHECK(row[2] == 0.125F);  // 1.5 quanta
    CHECK(row[3] == 0.125F);  // 2.5 quanta
    CHECK(row[4] == -100.0625F);
    CHECK(std::isnan(row[5]));
    std::vector<float> kept{0.03F};
    round_row(kept, 0.0F);
    CHECK(kept[0] == 0.03F);
}

TEST_CASE("round_row: what is rounded stays as it is", "[raster][property]") {
    std::vector<float> once;
    for (int i = 0; i < 1000; ++i) once.push_back(static_cast<float>(i) * 1.2345F - 300);
    round_row(once, 0.0001220703125F);
    auto twice = once;
    round_row(twice, 0.0001220703125F);
    CHECK(once == twice);
}

TEST_CASE("Pyramid: planes clipped at the edge serve as well as whole squares",
          "[raster][differential]") {
    const auto layer = invented_layer(300, 200, 128, 1, Sample::float32);
    TemporaryFolder folder;
    const auto expected = sha256_of_file(made(layer, folder.path() / "whole"));
    auto spool = Spool::create(folder.path() / "spool", layout_of(layer));
    Pyramid pyramid(layer, spool);
    for (int row = 0; row < 2; ++row)
        for (int column = 0; column < 3; ++column) {
            const auto whole = invented_tile(layer, 0, column, row);
            Plane<float> clipped(std::min(128, 300 - 128 * column), std::min(128, 200 - 128 * row));
            for (int r = 0; r < clipped.height(); ++r)
                std::copy_n(whole.row(r).begin(), clipped.width(), clipped.row(r).begin());
            pyramid.put(0, column, row, clipped);
        }
    finish_layer(layer, spool, statistics_of(layer), folder.path() / "clipped.tif");
    CHECK(sha256_of_file(folder.path() / "clipped.tif") == expected);
}

TEST_CASE("Pyramid: overview tiles are let go once they are whole", "[raster]") {
    const auto layer = invented_layer(2048, 2048, 128, 1, Sample::float32);
    TemporaryFolder folder;
    auto spool = Spool::create(folder.path() / "spool", layout_of(layer));
    Pyramid pyramid(layer, spool);
    const auto pixels = invented_tile(layer, 0, 0, 0);
    for (unsigned i = 0; i < 256; ++i) {  // Z-order
        int column = 0, row = 0;
        for (int bit = 0; bit < 4; ++bit) {
            column |= static_cast<int>(i >> (2 * bit) & 1) << bit;
            row |= static_cast<int>(i >> (2 * bit + 1) & 1) << bit;
        }
        pyramid.put(0, column, row, pixels);
    }
    CHECK(spool.missing() == 0);
    // In Z-order one tile a level waits: 4 levels of 64 kB tiles.
    CHECK(pyramid.peak_bytes() == 4 * 128 * 128 * 4);
}

TEST_CASE("Pyramid: goes on from an interrupted run and ends with the same bytes",
          "[raster][differential]") {
    const auto sample = GENERATE(Sample::float32, Sample::uint16);
    const int done = GENERATE(0, 1, 17, 60, 79, 80);
    const bool spoilt = GENERATE(false, true);
    CAPTURE(static_cast<int>(sample), done, spoilt);
    const auto layer = invented_layer(1000, 600, 128, 2, sample);
    TemporaryFolder folder;
    const auto expected = sha256_of_file(made(layer, folder.path() / "straight"));
    const auto file = folder.path() / "spool";
    {
        auto spool = Spool::create(file, layout_of(layer));
        Pyramid pyramid(layer, spool);
        put_some(layer, pyramid, 5, 0, done);
    }
    if (spoilt && done > 0) flip_byte(file, 10);
    auto spool = Spool::reopen(file, layout_of(layer));
    Pyramid pyramid(layer, spool);
    put_missing(layer, pyramid, spool);
    REQUIRE(spool.missing() == 0);
    const auto statistics =
        sample == Sample::float32 ? statistics_of(layer) : std::vector<BandStatistics>{};
    finish_layer(layer, spool, statistics, folder.path() / "resumed.tif");
    CHECK(sha256_of_file(folder.path() / "resumed.tif") == expected);
}

TEST_CASE("Pyramid: overviews beyond the memory limit are made from the spool, with the same bits",
          "[raster][differential]") {
    // 5 x 3 tiles of 64: parents with four, two and one children.
    LayerFile layer;
    layer.name = "layer";
    layer.grid = {300, 170, {0, 1, 0, 0, 0, -1}, {}};
    layer.tile = 64;
    layer.bands.resize(2);
    layer.quantum = 0.125f;
    std::vector<std::vector<std::byte>> found[2];
    for (const std::size_t limit : {std::size_t{1} << 30, std::size_t{0}}) {
        test::TemporaryFolder folder;
        auto spool = Spool::create(folder.path() / "s", layout_of(layer));
        Pyramid pyramid(layer, spool, limit);
        for (int band = 0; band < 2; ++band)
            for (int row = 0; row < 3; ++row)
                for (int column = 0; column < 5; ++column) {
                    Plane<float> tile(std::min(64, 300 - 64 * column),
                                      std::min(64, 170 - 64 * row));
                    for (int r = 0; r < tile.height(); ++r)
                        for (int c = 0; c < tile.width(); ++c)
                            tile.at(c, r) = (c * r) % 7 == 0
                                                ? std::numeric_limits<float>::quiet_NaN()
                                                : static_cast<float>(band + (column * 64 + c) % 13 +
                                                                     row * 0.125);
                    pyramid.put(band, column, row, tile);
                }
        CHECK(spool.missing() == 0);
        CHECK((pyramid.peak_bytes() == 0) == (limit == 0));
        const auto layout = layout_of(layer);
        for (int level = 0; level < static_cast<int>(layout.levels.size()); ++level) {
            const auto& size = layout.levels[static_cast<std::size_t>(level)];
            for (int band = 0; band < 2; ++band)
                for (int row = 0; row < size.rows; ++row)
                    for (int column = 0; column < size.columns; ++column)
                        found[limit == 0].push_back(spool.read({level, band, column, row}));
        }
    }
    CHECK(found[0] == found[1]);
}
