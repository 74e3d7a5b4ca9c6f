#include "sunbudget/raster/layer_file.hpp"

#include <catch2/catch.hpp>
#include <set>

using namespace sunbudget;

TEST_CASE("levels_of: halves, rounded up, until the raster fits one tile", "[raster]") {
    const auto levels = levels_of(1000, 1300, 256);
    REQUIRE(levels.size() == 4);
    CHECK(levels[0] == Level{1000, 1300, 4, 6});
    CHECK(levels[1] == Level{500, 650, 2, 3});
    CHECK(levels[2] == Level{250, 325, 1, 2});
    CHECK(levels[3] == Level{125, 163, 1, 1});
}

TEST_CASE("levels_of: a raster that fits one tile has one level", "[raster][edge]") {
    CHECK(levels_of(1, 1, 512).size() == 1);
    CHECK(levels_of(512, 512, 512).size() == 1);
    CHECK(levels_of(513, 511, 512).back() == Level{257, 256, 1, 1});
    CHECK(levels_of(1, 700, 512).back() == Level{1, 350, 1, 1});
}

TEST_CASE("Layout: every tile of every level and band has its own number", "[raster][property]") {
    LayerFile layer;
    layer.grid.width = 1000;
    layer.grid.height = 300;
    layer.tile = 128;
    layer.bands.resize(3);
    const auto layout = layout_of(layer);
    std::set<std::size_t> numbers;
    for (int level = 0; level < static_cast<int>(layout.levels.size()); ++level) {
        const auto& l = layout.levels[static_cast<std::size_t>(level)];
        for (int band = 0; band < 3; ++band)
            for (int row = 0; row < l.rows; ++row)
                for (int column = 0; column < l.columns; ++column)
                    numbers.insert(layout.index({level, band, column, row}));
    }
    CHECK(numbers.size() == layout.tile_count());
    CHECK(*numbers.rbegin() + 1 == layout.tile_count());
    CHECK_FALSE(layout.has({0, 3, 0, 0}));
    CHECK_FALSE(layout.has({0, 0, 8, 0}));
    CHECK_FALSE(layout.has({4, 0, 0, 0}));
}
