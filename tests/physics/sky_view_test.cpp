#include "sunbudget/physics/sky_view.hpp"

#include <catch2/catch.hpp>

#include <cmath>
#include <limits>
#include <numbers>
#include <random>
#include <vector>

#include "reference/sky_view.hpp"
#include "sunbudget/base/units.hpp"
#include "sunbudget/physics/gradient.hpp"
#include "support/vectors.hpp"
#include "terrain_fixture.hpp"

namespace sunbudget::test {

namespace {

/// The kernel's sky view of one pixel; `elevation_rad(azimuth)` as for the reference.
template <typename Horizon>
double kernel_sky_view(Horizon elevation_rad, double slope_rad, double aspect_rad, int directions) {
    const auto east = static_cast<float>(std::sin(slope_rad) * std::sin(aspect_rad));
    const auto north = static_cast<float>(std::sin(slope_rad) * std::cos(aspect_rad));
    const auto up = static_cast<float>(std::cos(slope_rad));
    float sum = 0;
    for (int d = 0; d < directions; ++d) {
        const double azimuth = 2 * std::numbers::pi * d / directions;
        const double plane = -std::tan(slope_rad) * std::cos(azimuth - aspect_rad);
        const auto tangent =
            static_cast<float>(std::max({0.0, plane, std::tan(elevation_rad(azimuth))}));
        add_sky_view({&tangent, 1}, {{&east, 1}, {&north, 1}, {&up, 1}}, azimuth, {&sum, 1});
    }
    finish_sky_view({&sum, 1}, directions);
    return static_cast<double>(sum);
}

/// Horizon of a row of the table: the terrain that its kind names.
double horizon_rad(const std::string& kind, double angle_rad, double azimuth) {
    if (kind == "pit") return angle_rad;
    const double across = std::cos(azimuth);
    if (kind == "wall") return std::atan(std::tan(angle_rad) * std::max(0.0, across));
    if (kind == "valley") return std::atan(std::tan(angle_rad) * std::abs(across));
    return 0;
}

}  // namespace

TEST_CASE("sky view: planes, pits, walls and valleys are as algebra has them",
          "[physics][vector]") {
    const auto table = read_table("vectors/terrain_analytic.csv");
    int found = 0;
    for (std::size_t row = 0; row < table.rows.size(); ++row) {
        const auto kind = table.cell(row, "kind");
        if (kind == "drop" || kind == "shadow") continue;
        ++found;
        const double angle = rad_from_deg(table.number(row, "angle_deg"));
        const double slope = kind == "plane" ? angle : 0;
        const auto horizon = [&](double azimuth) { return horizon_rad(kind, angle, azimuth); };
        const double want = table.number(row, "value");
        CAPTURE(table.cell(row, "id"));
        CHECK(reference::sky_view(horizon, slope, 0.7, 7200) == Approx(want).margin(1e-6));
        // The sum over 64 directions errs where the horizon bends: by (pi / 64)^2, and by rounding.
        CHECK(kernel_sky_view(horizon, slope, 0.7, 64) == Approx(want).margin(2.4e-3));
        CHECK(kernel_sky_view(horizon, slope, 0.7, 360) == Approx(want).margin(1e-4));
    }
    CHECK(found == 21);
}

TEST_CASE("sky view: open level ground sees exactly the whole sky", "[physics][property]") {
    for (int directions = 8; directions <= 360; directions += 4) {
        CAPTURE(directions);
        CHECK(kernel_sky_view([](double) { return 0.0; }, 0, 0, directions) == 1);
    }
}

TEST_CASE("add_sky_view: equals the double-precision share", "[physics][differential]") {
    constexpr std::size_t width = 4099;
    std::mt19937 random(5);
    std::uniform_real_distribution<double> unit(0, 1);
    const double azimuth = 2.1;
    std::vector<float> tangent, east, north, up, sum(width, 0.0F);
    for (std::size_t i = 0; i < width; ++i) {
        const double slope = 1.5 * unit(random);
        const double aspect = 6.28 * unit(random);
        east.push_back(static_cast<float>(std::sin(slope) * std::sin(aspect)));
        north.push_back(static_cast<float>(std::sin(slope) * std::cos(aspect)));
        up.push_back(static_cast<float>(std::cos(slope)));
        tangent.push_back(static_cast<float>(std::tan(1.57 * unit(random) * unit(random))));
    }
    tangent[7] = 0;
    tangent[8] = 1;
    add_sky_view(tangent, {east, north, up}, azimuth, sum);
    double worst = 0;
    for (std::size_t i = 0; i < width; ++i) {
        const double h = std::numbers::pi / 2 - std::atan(static_cast<double>(tangent[i]));
        const double along = static_cast<double>(east[i]) * std::sin(azimuth) +
                             static_cast<double>(north[i]) * std::cos(azimuth);
        const double want = static_cast<double>(up[i]) * std::pow(std::sin(h), 2) +
                            along * (h - std::sin(h) * std::cos(h));
        worst = std::max(worst, std::abs(want - static_cast<double>(sum[i])));
    }
    CHECK(worst < 1e-6);
}

TEST_CASE("add_sky_view: NaN goes through and spoils no neighbour", "[physics][edge]") {
    constexpr float missing = std::numeric_limits<float>::quiet_NaN();
    const std::vector<float> tangent{0.0F, missing, 0.0F}, level{0.0F, 0.0F, 0.0F},
        up{1.0F, 1.0F, missing};
    std::vector<float> sum(3, 0.0F);
    add_sky_view(tangent, {level, level, up}, 0.3, sum);
    CHECK(sum[0] == 1);
    CHECK(std::isnan(sum[1]));
    CHECK(std::isnan(sum[2]));
}

TEST_CASE("sky view: the walls of a long V valley and of a cone see cos b of the sky on average",
          "[physics][vector]") {
    // Rows terrain-066 and 067, from heights on a grid through slopes, horizons near and far, and sum.
    const double slope_rad = rad_from_deg(GENERATE(20.0, 40.0));
    const bool cone = GENERATE(false, true);
    const int width = 261;
    const int height = cone ? 261 : 2001;
    const int middle_row = height / 2;
    constexpr double wall_px = 100.5;  // half the valley's width, to the ridges; level beyond
    Terrain terrain{"pit", Plane<float>(width, height), {10, 0, 0, -10}};
    const auto from_floor_px = [&](int c, int r) {
        return cone ? std::hypot(c - 130, r - middle_row) : std::abs(c - 130.0);
    };
    for (int r = 0; r < height; ++r)
        for (int c = 0; c < width; ++c)
            terrain.height_m.at(c, r) = static_cast<float>(std::tan(slope_rad) * 10 *
                                                           std::min(from_floor_px(c, r), wall_px));
    const Sight sight;
    const auto levels = levels_of(terrain, sight);
    const auto slopes = slopes_of(terrain.height_m);
    const Window block{0, cone ? 0 : middle_row, width, cone ? height : 1};
    const auto ground = block_terrain(terrain, levels, block);
    Plane<float> east(width, block.height), north(width, block.height), up(width, block.height),
        sum(width, block.height);
    const auto back = inverse(terrain.matrix);
    for (int d = 0; d < 64; ++d) {
        const double azimuth = 2 * std::numbers::pi * d / 64;
        const auto tangent =
            block_horizon(ground, slopes, direction_towards(terrain.matrix, azimuth), sight);
        for (int r = 0; r < block.height; ++r) {
            const int row = static_cast<int>(block.row) + r;
            surface_normals(slopes.per_column.row(row), slopes.per_row.row(row), back, back,
                            east.row(r), north.row(r), up.row(r));
            add_sky_view(tangent.row(r), {east.row(r), north.row(r), up.row(r)}, azimuth,
                         sum.row(r));
        }
    }
    double mean = 0;
    int pixels = 0;
    for (int r = 0; r < block.height; ++r) {
        finish_sky_view(sum.row(r), 64);
        for (int c = 0; c < width; ++c) {
            if (from_floor_px(c, static_cast<int>(block.row) + r) > wall_px) continue;
            mean += static_cast<double>(sum.at(c, r));
            ++pixels;
        }
    }
    mean /= pixels;
    CAPTURE(cone, deg_from_rad(slope_rad), pixels);
    // The floor's and the ridge's pixels, 1 % of all, are rounded off by the 3 x 3 slope.
    CHECK(mean == Approx(std::cos(slope_rad)).margin(5e-3));
}

}  // namespace sunbudget::test
