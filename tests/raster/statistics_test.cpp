#include "sunbudget/raster/statistics.hpp"

#include <algorithm>
#include <catch2/catch.hpp>
#include <cmath>
#include <limits>
#include <random>
#include <vector>

using namespace sunbudget;

namespace {
constexpr float hole = std::numeric_limits<float>::quiet_NaN();

std::vector<float> random_values(std::size_t count, double middle, double spread) {
    std::mt19937 random(11);
    std::uniform_real_distribution<double> value(middle - spread, middle + spread);
    std::vector<float> values(count);
    for (auto& v : values) v = random() % 5 == 0 ? hole : static_cast<float>(value(random));
    return values;
}

/// All at once, two passes, in long double.
BandStatistics slow(const std::vector<float>& values) {
    std::vector<long double> valid;
    for (const float v : values)
        if (!std::isnan(v)) valid.push_back(static_cast<long double>(v));
    const auto count = static_cast<long double>(valid.size());
    long double sum = 0, squares = 0;
    for (const auto v : valid) sum += v;
    const long double mean = sum / count;
    for (const auto v : valid) squares += (v - mean) * (v - mean);
    const auto [min, max] = std::minmax_element(valid.begin(), valid.end());
    return {valid.size(),
            values.size(),
            static_cast<double>(*min),
            static_cast<double>(*max),
            static_cast<double>(mean),
            static_cast<double>(std::sqrt(squares / count))};
}
}  // namespace

TEST_CASE("combined: agrees with a slow two-pass computation", "[raster][differential]") {
    const auto [middle, spread] =
        GENERATE(table<double, double>({{500, 400}, {0, 1}, {300, 0.01}, {1e7, 2}, {-1e30, 1e29}}));
    const int width = GENERATE(1, 15, 16, 100, 256);
    CAPTURE(middle, spread, width);
    const int height = 50, blocks = 7;
    const auto values =
        random_values(static_cast<std::size_t>(width * height * blocks), middle, spread);
    std::vector<BlockStatistics> parts(blocks);
    auto row = values.begin();
    for (auto& part : parts)
        for (int r = 0; r < height; ++r, row += width) add_row(part, {row, row + width});
    const auto figures = combined(parts, values.size());
    const auto expected = slow(values);
    CHECK(figures.count == expected.count);
    CHECK(figures.pixels == expected.pixels);
    CHECK(figures.min == expected.min);
    CHECK(figures.max == expected.max);
    // Double has 53 bits, and 350 merges lose at most 9 of them. The deviations are taken from such
    // means, and a standard deviation is wrong by no more than its deviations are.
    const double bound = std::ldexp(1.0, -44) * (std::abs(middle) + spread);
    CHECK(std::abs(figures.mean - expected.mean) <= bound);
    CHECK(std::abs(figures.stddev - expected.stddev) <= bound);
}

TEST_CASE("combined: one pixel, none, and infinities", "[raster][edge]") {
    BlockStatistics block;
    add_row(block, {});
    const std::vector<float> holes{hole, hole, hole};
    add_row(block, holes);
    CHECK(block == BlockStatistics{});
    CHECK(combined({}, 0).count == 0);
    CHECK(combined(std::vector{block}, 3) == BandStatistics{0, 3, 0, 0, 0, 0});

    const std::vector<float> one{hole, 2.5F};
    add_row(block, one);
    CHECK(combined(std::vector{BlockStatistics{}, block, BlockStatistics{}}, 5) ==
          BandStatistics{1, 5, 2.5, 2.5, 2.5, 0});
}

TEST_CASE("combined: equal values have no spread", "[raster][property]") {
    const std::vector<float> row(200, 0.1F);
    BlockStatistics block;
    for (int r = 0; r < 200; ++r) add_row(block, row);
    const auto figures = combined(std::vector{block, block, block}, 120000);
    CHECK(figures.min == static_cast<double>(0.1F));
    CHECK(figures.mean == Approx(static_cast<double>(0.1F)).epsilon(1e-15));
    CHECK(figures.stddev == Approx(0).margin(1e-16));
}
