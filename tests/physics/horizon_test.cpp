#include "sunbudget/physics/horizon.hpp"

#include <catch2/catch.hpp>

#include <cmath>
#include <limits>
#include <numbers>
#include <random>

#include "reference/ray_cast.hpp"
#include "sunbudget/base/units.hpp"
#include "support/vectors.hpp"
#include "terrain_fixture.hpp"

namespace sunbudget::test {

namespace {

Terrain level_ground(int width, int height, float height_m = 300.0F) {
    return {"level", Plane<float>(width, height, height_m), {10, 0, 0, -10}};
}

Plane<float> look(const Terrain& terrain, double azimuth_deg, const Sight& sight = {},
                  int block = 256) {
    return horizon_of(terrain, levels_of(terrain, sight), slopes_of(terrain.height_m),
                      direction_towards(terrain.matrix, rad_from_deg(azimuth_deg)), sight, block);
}

/// Whether two planes hold the same bits; NaN equals NaN.
bool same_bits(const Plane<float>& a, const Plane<float>& b) {
    if (a.width() != b.width() || a.height() != b.height()) return false;
    for (int r = 0; r < a.height(); ++r)
        for (int c = 0; c < a.width(); ++c)
            if (a.at(c, r) != b.at(c, r) && !(std::isnan(a.at(c, r)) && std::isnan(b.at(c, r))))
                return false;
    return true;
}

}  // namespace

TEST_CASE("curvature_drop_m: agrees with worked values", "[physics][vector]") {
    const auto table = read_table("vectors/terrain_analytic.csv");
    for (std::size_t row = 0; row < table.rows.size(); ++row) {
        if (table.cell(row, "kind") != "drop") continue;
        CAPTURE(table.cell(row, "id"));
        const Sight sight{20000, 6371000, table.number(row, "angle_deg")};
        CHECK(curvature_drop_m(table.number(row, "size"), sight) ==
              Approx(table.number(row, "value")).margin(1e-4));
    }
}

TEST_CASE("direction_towards: goes where the azimuth says, by whole pixels",
          "[physics][property]") {
    const double azimuth_deg = GENERATE(0.0, 17.0, 45.0, 90.0, 201.0, 315.0, 359.0);
    const PixelMatrix matrix{30, 4, -3, -25};
    const auto direction = direction_towards(matrix, rad_from_deg(azimuth_deg));
    CHECK(std::max(std::abs(direction.column_step), std::abs(direction.row_step)) == 1);
    const double back = azimuth_of_rad(matrix, direction.column_step, direction.row_step);
    CHECK(std::cos(back - rad_from_deg(azimuth_deg)) == Approx(1).margin(1e-12));
    CHECK(direction.step_m ==
          Approx(length_of_m(matrix, direction.column_step, direction.row_step)));
}

TEST_CASE("direction_towards: sides and diagonals of square pixels fall on pixels",
          "[physics][edge]") {
    const PixelMatrix matrix{10, 0, 0, -10};
    for (int eighth = 0; eighth < 8; ++eighth) {
        const auto d = direction_towards(matrix, eighth * std::numbers::pi / 4);
        CHECK(d.column_step == std::round(d.column_step));
        CHECK(d.row_step == std::round(d.row_step));
    }
}

TEST_CASE("horizons: level ground has exactly none, at every distance", "[physics][property]") {
    auto terrain = level_ground(700, 300, GENERATE(0.0F, -431.7F, 300.0F, 8000.1F));
    const double cell_m = GENERATE(0.5, 30.0);
    terrain.matrix = {cell_m, 0, 0, -cell_m};
    const double azimuth_deg = GENERATE(0.0, 33.0, 90.0, 200.0);
    const auto horizon = look(terrain, azimuth_deg);
    CHECK(same_bits(horizon, Plane<float>(700, 300, 0.0F)));
}

TEST_CASE("horizons: a plane is its own horizon upslope and none downslope",
          "[physics][property]") {
    auto terrain = level_ground(160, 160);
    for (int r = 0; r < 160; ++r)
        for (int c = 0; c < 160; ++c) terrain.height_m.at(c, r) = static_cast<float>(4 * r);
    const double azimuth_deg = GENERATE(180.0, 150.0, 240.0, 90.0, 20.0);
    // Rises by 0.4 m a metre to the south.
    const double want = std::max(0.0, -0.4 * std::cos(rad_from_deg(azimuth_deg)));
    const auto near_only = look(terrain, azimuth_deg, {600, 6371008.8, 0.13});
    CHECK(static_cast<double>(near_only.at(80, 80)) == Approx(want).margin(2e-6));
    // From afar eyes at two heights see the same plane begin and end: 0.001 is 0.06 degrees.
    const auto all = look(terrain, azimuth_deg);
    CHECK(static_cast<double>(all.at(80, 80)) == Approx(want).margin(1e-3));
}

TEST_CASE("horizons: a wall on level ground stands as high as algebra says, near and far",
          "[physics][vector]") {
    auto terrain = level_ground(3000, 40, 100.0F);
    for (int r = 0; r < 40; ++r)
        for (int c = 0; c < 1000; ++c) terrain.height_m.at(c, r) = 300.0F;
    const Sight sight{25000, 6371008.8, 0.13};
    const auto horizon = look(terrain, 270.0, sight);
    for (const int away : {1, 2, 5, 17, 64}) {
        const double distance_m = 10.0 * away;
        const double want = (200 - curvature_drop_m(distance_m, sight)) / distance_m;
        CAPTURE(away);
        CHECK(static_cast<double>(horizon.at(999 + away, 20)) == Approx(want).epsilon(1e-5));
    }
    // Far cells are as wide as 1/32 to 1/64 of their distance, and the wall's edge lies in one of
    // them: the angle is right to that share.
    for (const int away : {70, 100, 150, 300, 500, 900, 1900}) {
        const double distance_m = 10.0 * away;
        const double want = (200 - curvature_drop_m(distance_m, sight)) / distance_m;
        CAPTURE(away, horizon.at(999 + away, 20));
        CHECK(static_cast<double>(horizon.at(999 + away, 20)) == Approx(want).epsilon(1.0 / 32));
    }
}

TEST_CASE("horizons: shadows of a wall end where algebra says", "[physics][vector]") {
    const auto table = read_table("vectors/terrain_analytic.csv");
    for (std::size_t row = 0; row < table.rows.size(); ++row) {
        if (table.cell(row, "kind") != "shadow") continue;
        auto terrain = level_ground(400, 8, 0.0F);
        terrain.matrix = {1, 0, 0, -1};
        for (int r = 0; r < 8; ++r)
            terrain.height_m.at(200, r) = static_cast<float>(table.number(row, "size"));
        const auto horizon = look(terrain, 90.0);
        const auto sun = std::tan(rad_from_deg(table.number(row, "angle_deg")));
        int shaded = 0;
        while (static_cast<double>(horizon.at(199 - shaded, 4)) > sun) ++shaded;
        CAPTURE(table.cell(row, "id"), shaded);
        // One cell of the level that sees it: 1 m within 64 m, 2 m to 128 m, 4 m to 256 m.
        const double cell = shaded < 64 ? 1 : (shaded < 128 ? 2 : 4);
        CHECK(shaded == Approx(table.number(row, "value")).margin(cell));
    }
}

TEST_CASE("horizons: the same bits however the raster is cut into blocks",
          "[physics][differential]") {
    auto terrain = made_terrain(500, 330);
    terrain.matrix = {9, 1, 0.5, -11};
    for (int r = 100; r < 130; ++r)
        for (int c = 200; c < 260; ++c)
            terrain.height_m.at(c, r) = std::numeric_limits<float>::quiet_NaN();
    const double azimuth_deg = GENERATE(0.0, 11.0, 45.0, 77.0, 90.0, 160.0, 222.0, 333.0);
    const auto whole = look(terrain, azimuth_deg, {}, 1000);
    CAPTURE(azimuth_deg);
    CHECK(same_bits(whole, look(terrain, azimuth_deg, {}, 256)));
    CHECK(same_bits(whole, look(terrain, azimuth_deg, {}, 100)));
    CHECK(same_bits(whole, look(terrain, azimuth_deg, {}, 37)));
    CHECK(std::isnan(whole.at(230, 115)));
    CHECK_FALSE(std::isnan(whole.at(190, 115)));
}

TEST_CASE("horizons: a mirrored raster gives mirrored bits", "[physics][property]") {
    const auto terrain = made_terrain(256, 128);
    Terrain mirrored{"mirrored", Plane<float>(256, 128), terrain.matrix};
    for (int r = 0; r < 128; ++r)
        for (int c = 0; c < 256; ++c) mirrored.height_m.at(c, r) = terrain.height_m.at(255 - c, r);
    const auto east = direction_towards(terrain.matrix, rad_from_deg(63.0));
    const Direction west{-east.column_step, east.row_step, east.step_m};
    const Sight sight;
    const auto seen =
        horizon_of(terrain, levels_of(terrain, sight), slopes_of(terrain.height_m), east, sight);
    const auto back =
        horizon_of(mirrored, levels_of(mirrored, sight), slopes_of(mirrored.height_m), west, sight);
    int different = 0;
    for (int r = 0; r < 128; ++r)
        for (int c = 0; c < 256; ++c) different += seen.at(c, r) != back.at(255 - c, r) ? 1 : 0;
    CHECK(different == 0);
}

TEST_CASE("raise_by_near: equals the looks taken one by one in double precision",
          "[physics][differential]") {
    const auto terrain = made_terrain(300, 200);
    const Sight sight;
    const Window block{64, 64, 170, 70};
    const auto patch =
        make_height_patch(patch_window(block), cut(terrain.height_m, patch_window(block)));
    const double azimuth_deg = GENERATE(5.0, 45.0, 120.0, 270.0, 300.0);
    const auto direction = direction_towards(terrain.matrix, rad_from_deg(azimuth_deg));
    Plane<float> rise(block.width, block.height);
    raise_by_near(patch, direction, sight, block, rise);
    double worst = 0;
    for (int r = 0; r < block.height; ++r)
        for (int c = 0; c < block.width; ++c) {
            const int column = static_cast<int>(block.column) + c;
            const int row = static_cast<int>(block.row) + r;
            const auto eye = static_cast<double>(terrain.height_m.at(column, row));
            double best = 0;
            for (int half = 1; half <= 2 * near_steps; half += half == 1 ? 1 : 2) {
                const double step = half / 2.0;
                const double seen =
                    reference::surface_m(terrain.height_m, column + step * direction.column_step,
                                         row + step * direction.row_step);
                const double drop =
                    half == 1 ? 0 : curvature_drop_m(step * direction.step_m, sight);
                if (!std::isnan(seen)) best = std::max(best, (seen - eye - drop) / step);
            }
            worst = std::max(worst, std::abs(best - static_cast<double>(rise.at(c, r))));
        }
    // Heights near 700 m in single precision: 6e-5 m, twice rounded.
    CHECK(worst < 2e-4);
}

TEST_CASE("horizons: distance counts in metres on the ground, on any grid", "[physics][property]") {
    // A ridge running north-south, seen from its east on an upright and on a turned, stretched
    // grid.
    const PixelMatrix matrix = GENERATE(PixelMatrix{10, 0, 0, -10}, PixelMatrix{7, 7, 7, -7},
                                        PixelMatrix{20, 0, 0, -5}, PixelMatrix{10, 0, 0, 10});
    Terrain terrain{"ridge", Plane<float>(500, 500), matrix};
    const double middle_east_m = 250 * matrix.east_per_column + 250 * matrix.east_per_row;
    const auto east_m = [&](int c, int r) {
        return c * matrix.east_per_column + r * matrix.east_per_row - middle_east_m;
    };
    for (int r = 0; r < 500; ++r)
        for (int c = 0; c < 500; ++c)
            terrain.height_m.at(c, r) =
                static_cast<float>(std::max(0.0, 200.0 - std::abs(east_m(c, r) + 400.0)));
    // From the middle the top stands 400 m west and 200 m high.
    const auto horizon = look(terrain, 270.0);
    CHECK(static_cast<double>(horizon.at(250, 250)) == Approx(0.5).epsilon(0.03));
}

TEST_CASE("horizons: nothing is seen beyond the reach", "[physics][edge]") {
    auto terrain = level_ground(900, 8, 0.0F);
    for (int r = 0; r < 8; ++r)
        for (int c = 600; c < 610; ++c) terrain.height_m.at(c, r) = 500.0F;
    const Sight sight{3000, 6371008.8, 0.13};
    const auto horizon = look(terrain, 90.0, sight);
    CHECK(horizon.at(280, 4) == 0);
    CHECK(horizon.at(350, 4) > 0);
    CHECK(levels_for(10, sight) == 3);
    CHECK(levels_for(10, {640, 6371008.8, 0.13}) == 0);
}

}  // namespace sunbudget::test
