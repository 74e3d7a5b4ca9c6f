#include "sunbudget/physics/levels.hpp"

#include <catch2/catch.hpp>

#include <cmath>
#include <limits>
#include <random>

namespace sunbudget::test {

namespace {

constexpr float missing = std::numeric_limits<float>::quiet_NaN();

Plane<float> rough(int width, int height, float holes) {
    std::mt19937 random(3);
    std::uniform_real_distribution<float> unit(0, 1);
    Plane<float> plane(width, height);
    for (int r = 0; r < height; ++r)
        for (float& value : plane.row(r))
            value = unit(random) < holes ? missing : -20 + 500 * unit(random);
    return plane;
}

/// Greatest height below a cell, looked up pixel by pixel.
float greatest(const Plane<float>& pixels, int level, int column, int row) {
    float best = missing;
    for (int r = row << level; r < std::min((row + 1) << level, pixels.height()); ++r)
        for (int c = column << level; c < std::min((column + 1) << level, pixels.width()); ++c)
            if (!std::isnan(pixels.at(c, r)) && !(pixels.at(c, r) <= best)) best = pixels.at(c, r);
    return best;
}

/// Mean of the four cells below, recursively, in double.
double mean_below(const Plane<float>& pixels, int level, int column, int row) {
    if (column >= cells_along(pixels.width(), level) || row >= cells_along(pixels.height(), level))
        return std::numeric_limits<double>::quiet_NaN();
    if (level == 0) return static_cast<double>(pixels.at(column, row));
    double sum = 0;
    int count = 0;
    for (const int r : {2 * row, 2 * row + 1})
        for (const int c : {2 * column, 2 * column + 1}) {
            const double below = mean_below(pixels, level - 1, c, r);
            if (std::isnan(below)) continue;
            sum += below;
            ++count;
        }
    return sum / count;
}

}  // namespace

TEST_CASE("build_levels: maxima and means equal the slow way, odd sizes and holes included",
          "[physics][differential]") {
    const auto [width, height] = GENERATE(table<int, int>({{64, 32}, {37, 51}, {1, 9}, {130, 1}}));
    const float holes = GENERATE(0.0F, 0.4F);
    const auto pixels = rough(width, height, holes);
    const auto levels = build_levels(pixels, 5);
    for (int level = 1; level <= 5; ++level) {
        const auto& made = levels[static_cast<std::size_t>(level - 1)];
        REQUIRE(made.maximum_m.width() == cells_along(width, level));
        REQUIRE(made.mean_m.height() == cells_along(height, level));
        bool maxima_equal = true;
        double worst = 0;
        for (int r = 0; r < made.mean_m.height(); ++r)
            for (int c = 0; c < made.mean_m.width(); ++c) {
                const float want = greatest(pixels, level, c, r);
                const float got = made.maximum_m.at(c, r);
                maxima_equal = maxima_equal && (std::isnan(want) ? std::isnan(got) : got == want);
                const double mean = mean_below(pixels, level, c, r);
                const auto got_mean = static_cast<double>(made.mean_m.at(c, r));
                if (std::isnan(mean) != std::isnan(got_mean)) worst = 1e9;
                if (!std::isnan(mean)) worst = std::max(worst, std::abs(mean - got_mean));
            }
        CAPTURE(width, height, level);
        CHECK(maxima_equal);
        CHECK(worst < 5 * 3e-5);  // a rounding of heights up to 480 m (2^-15 m) for each level
    }
}

TEST_CASE("LevelBuilder: every row of every level comes once and in order", "[physics][edge]") {
    const auto pixels = rough(23, 13, 0.1F);
    std::vector<int> rows(4, 0);
    LevelBuilder builder(23, 4, [&](int level, int row, auto maximum, auto mean) {
        auto& next = rows[static_cast<std::size_t>(level - 1)];
        REQUIRE(row == next);
        ++next;
        REQUIRE(maximum.size() == static_cast<std::size_t>(cells_along(23, level)));
        REQUIRE(mean.size() == maximum.size());
    });
    for (int r = 0; r < 13; ++r) builder.add_row(pixels.row(r));
    builder.finish();
    CHECK(rows == std::vector<int>{7, 4, 2, 1});
}

}  // namespace sunbudget::test
