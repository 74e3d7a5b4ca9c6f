#include "sunbudget/engine/order.hpp"

#include <catch2/catch.hpp>
#include <set>

using namespace sunbudget;

TEST_CASE("units_in_order: every pixel once, whatever the band", "[engine][property]") {
    for (const int band : {1, 2, 4, 64})
        for (const auto& [width, height] : {std::pair{1, 1}, {2048, 512}, {5000, 3001}}) {
            CAPTURE(band, width, height);
            long pixels = 0;
            std::set<std::pair<long, long>> corners;
            for (const auto& w : units_in_order(width, height, 512, band)) {
                pixels += static_cast<long>(w.width) * w.height;
                corners.insert({w.column, w.row});
                CHECK(w.column + w.width <= width);
                CHECK(w.row + w.height <= height);
            }
            CHECK(pixels == static_cast<long>(width) * height);
            CHECK(corners.size() == units_in_order(width, height, 512, 1).size());
        }
}

TEST_CASE("units_in_order: a band is finished before the next begins", "[engine]") {
    const auto units = units_in_order(4096, 4096, 512, 2);
    long lowest = 0;
    for (const auto& w : units) {
        CHECK(w.row / 1024 >= lowest);
        lowest = std::max(lowest, w.row / 1024);
    }
    CHECK(units[1].column == 512);
    CHECK(units[2].row == 512);
}
