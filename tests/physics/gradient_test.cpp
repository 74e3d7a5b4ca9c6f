#include "sunbudget/physics/gradient.hpp"

#include <catch2/catch.hpp>

#include <array>
#include <cmath>
#include <limits>
#include <numbers>
#include <random>
#include <vector>

#include "reference/gradient.hpp"
#include "sunbudget/base/units.hpp"
#include "support/vectors.hpp"

namespace sunbudget::test {

namespace {

constexpr float missing = std::numeric_limits<float>::quiet_NaN();

struct PixelSlopes {
    float per_column, per_row;
};

using Three = std::array<float, 3>;

PixelSlopes window_slopes(const std::array<Three, 3>& window) {
    PixelSlopes slopes{};
    horn_gradient(window[0], window[1], window[2], {&slopes.per_column, 1}, {&slopes.per_row, 1});
    return slopes;
}

struct Facing {
    float east, north, up, slope_deg, aspect_deg;
};

Facing facing(PixelSlopes slopes, const PixelMatrix& matrix) {
    Facing f{};
    const auto back = inverse(matrix);
    surface_normals({&slopes.per_column, 1}, {&slopes.per_row, 1}, back, back, {&f.east, 1},
                    {&f.north, 1}, {&f.up, 1});
    float slope = 0;
    float aspect = 0;
    slope_and_aspect({&f.east, 1}, {&f.north, 1}, {&f.up, 1}, {&slope, 1}, {&aspect, 1});
    f.slope_deg = static_cast<float>(deg_from_rad(static_cast<double>(slope)));
    f.aspect_deg = static_cast<float>(deg_from_rad(static_cast<double>(aspect)));
    return f;
}

}  // namespace

TEST_CASE("horn_gradient: agrees with worked windows", "[physics][vector]") {
    const auto table = read_table("vectors/terrain_windows.csv");
    for (std::size_t row = 0; row < table.rows.size(); ++row) {
        const auto at = [&](const char* name) {
            return static_cast<float>(table.number(row, name));
        };
        CAPTURE(table.cell(row, "id"));
        const auto slopes =
            window_slopes({Three{at("a"), at("b"), at("c")}, Three{at("d"), at("e"), at("f")},
                           Three{at("g"), at("h"), at("i")}});
        const auto cell = table.number(row, "cell");
        CHECK(static_cast<double>(slopes.per_column) / cell ==
              Approx(table.number(row, "per_east")).margin(1e-6));
        CHECK(-static_cast<double>(slopes.per_row) / cell ==
              Approx(table.number(row, "per_north")).margin(1e-6));
        const auto f = facing(slopes, {cell, 0, 0, -cell});
        CHECK(static_cast<double>(f.slope_deg) == Approx(table.number(row, "slope")).margin(1e-5));
        // Single precision: 180 degrees are known to 1.5e-5.
        CHECK(static_cast<double>(f.aspect_deg) ==
              Approx(table.number(row, "aspect")).margin(4e-5));
    }
}

TEST_CASE("horn_gradient: equals the double-precision reference, holes included",
          "[physics][differential]") {
    constexpr int width = 2000;
    std::mt19937 random(7);
    std::uniform_real_distribution<float> height(1000, 1100);
    std::uniform_real_distribution<float> chance(0, 1);
    std::array<std::vector<float>, 3> rows;
    for (auto& row : rows)
        for (int i = 0; i < width + 2; ++i)
            row.push_back(chance(random) < 0.25F ? missing : height(random));
    std::vector<float> per_column(width), per_row(width);
    horn_gradient(rows[0], rows[1], rows[2], per_column, per_row);
    for (std::size_t i = 0; i < width; ++i) {
        reference::HeightWindow window{};
        for (std::size_t r = 0; r < 3; ++r)
            for (std::size_t c = 0; c < 3; ++c) window[r][c] = static_cast<double>(rows[r][i + c]);
        const auto slope = reference::horn(window);
        CAPTURE(i);
        if (std::isnan(window[1][1])) {
            CHECK(std::isnan(per_column[i]));
            CHECK(std::isnan(per_row[i]));
        } else {
            // Sums of eight heights near 1000 m in single precision: a few units of 2^-13 m.
            CHECK(static_cast<double>(per_column[i]) == Approx(slope.per_column).margin(5e-4));
            CHECK(static_cast<double>(per_row[i]) == Approx(slope.per_row).margin(5e-4));
        }
    }
}

TEST_CASE("horn_gradient: a plane keeps its slope along edges, in corners and beside a hole",
          "[physics][edge]") {
    const auto plane = [](int c, int r) { return static_cast<float>(100 + 3 * c - 2 * r); };
    const auto holes = GENERATE(as<std::vector<int>>{}, std::vector<int>{0, 1, 2},
                                std::vector<int>{0, 3, 6}, std::vector<int>{2, 5, 8},
                                std::vector<int>{0, 1, 2, 3, 6}, std::vector<int>{2, 5, 6, 7, 8},
                                std::vector<int>{4 + 1}, std::vector<int>{0, 2, 6, 8});
    std::array<Three, 3> window{};
    for (int r = 0; r < 3; ++r)
        for (int c = 0; c < 3; ++c)
            window[static_cast<std::size_t>(r)][static_cast<std::size_t>(c)] = plane(c, r);
    for (const int hole : holes)
        window[static_cast<std::size_t>(hole / 3)][static_cast<std::size_t>(hole % 3)] = missing;
    const auto slopes = window_slopes(window);
    CHECK(slopes.per_column == 3);
    CHECK(slopes.per_row == -2);
}

TEST_CASE("horn_gradient: a lone pixel is level", "[physics][edge]") {
    const Three none{missing, missing, missing};
    const auto slopes = window_slopes({none, Three{missing, 42, missing}, none});
    CHECK(slopes.per_column == 0);
    CHECK(slopes.per_row == 0);
    const auto f = facing(slopes, {5, 0, 0, -5});
    CHECK(f.up == 1);
    CHECK(f.slope_deg == 0);
    CHECK(std::isnan(f.aspect_deg));
}

TEST_CASE("surface_normals: a plane that falls to true south reads 180 degrees on any grid",
          "[physics][property]") {
    const double turn_deg = GENERATE(0.0, 12.0, 90.0, 133.0, 180.0, 271.0);
    const bool south_up = GENERATE(false, true);
    const double wide_m = 12;
    const double high_m = south_up ? 7 : -7;
    const double c = std::cos(rad_from_deg(turn_deg));
    const double s = std::sin(rad_from_deg(turn_deg));
    const PixelMatrix matrix{wide_m * c, -high_m * s, wide_m * s, high_m * c};
    // Height rises by 0.5 m a metre to the north: by the chain rule along columns and rows.
    const PixelSlopes slopes{static_cast<float>(0.5 * matrix.north_per_column),
                             static_cast<float>(0.5 * matrix.north_per_row)};
    const auto f = facing(slopes, matrix);
    CAPTURE(turn_deg, south_up);
    CHECK(static_cast<double>(f.aspect_deg) == Approx(180).margin(1e-4));
    CHECK(static_cast<double>(f.slope_deg) == Approx(deg_from_rad(std::atan(0.5))).margin(1e-5));
    CHECK(static_cast<double>(f.east * f.east + f.north * f.north + f.up * f.up) ==
          Approx(1).margin(1e-6));
}

TEST_CASE("surface_normals: takes the matrix at each pixel between the row's ends",
          "[physics][property]") {
    constexpr std::size_t width = 257;
    const std::vector<float> rising(width, 1.0F), level(width, 0.0F);
    std::vector<float> east(width), north(width), up(width);
    const InversePixelMatrix first{0.1, 0, 0, -0.1};
    const InversePixelMatrix last{0.2, 0, 0, -0.1};
    surface_normals(rising, level, first, last, east, north, up);
    for (const std::size_t i : {std::size_t{0}, width / 2, width - 1}) {
        const double slope = 0.1 + 0.1 * static_cast<double>(i) / (width - 1);
        CHECK(static_cast<double>(-east[i] / up[i]) == Approx(slope).epsilon(1e-6));
    }
}

TEST_CASE("slope_and_aspect: NaN goes through, north reads 0 and never 360", "[physics][edge]") {
    const std::array<float, 3> east{missing, -1e-12F, 0.0F}, north{missing, 0.6F, 0.6F},
        up{missing, 0.8F, 0.8F};
    std::array<float, 3> slope{}, aspect{};
    slope_and_aspect(east, north, up, slope, aspect);
    CHECK(std::isnan(slope[0]));
    CHECK(std::isnan(aspect[0]));
    CHECK(aspect[1] == 0);
    CHECK(aspect[2] == 0);
    CHECK(static_cast<double>(slope[2]) == Approx(std::atan2(0.6, 0.8)).epsilon(1e-6));
}

}  // namespace sunbudget::test
