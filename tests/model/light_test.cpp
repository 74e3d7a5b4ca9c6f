#include "sunbudget/model/light.hpp"

#include <catch2/catch.hpp>
#include <cmath>

#include "sunbudget/base/units.hpp"
#include "sunbudget/raster/gdal_setup.hpp"
#include "sunbudget/raster/grid_build.hpp"
#include "sunbudget/raster/locator.hpp"

using namespace sunbudget;

namespace {

/// The greatest difference between the field and the light computed at each pixel's own centre, on
/// every 7th pixel, and the greatest step between neighbouring pixels beyond the true one.
double worst_difference(const Grid& grid, const TimePlan& times, const Plane<float>& heights_m,
                        bool constant, bool vectors = false) {
    gdal_setup(64u << 20);
    const Sky sky;
    const PointLight truth(times, sky);
    LightField field(times, sky, grid, 1, constant ? std::optional<double>(300.0) : std::nullopt,
                     vectors);
    const Locator locator(grid);
    const Window frame{0, 0, grid.width, grid.height};
    Plane<float> direct(grid.width, grid.height), diffuse(grid.width, grid.height);
    double worst = 0;
    for (int row = 0; row < grid.height; row += 256)
        for (int column = 0; column < grid.width; column += 256) {
            const Window window{column, row, std::min(256, grid.width - column),
                                std::min(256, grid.height - row)};
            const auto block = field.prepare(window, frame, heights_m, 0);
            for (std::size_t band = 0; band < truth.bands(); ++band) {
                field.fill(block, band,
                           vectors ? LightField::Part::beam_east : LightField::Part::beam_up,
                           heights_m, direct);
                field.fill(block, band, LightField::Part::diffuse, heights_m, diffuse);
                for (int r = row; r < row + window.height; r += 37)
                    for (int c = column; c < column + window.width; c += 37) {
                        const auto place = locator.at(c + 0.5, r + 0.5);
                        REQUIRE(place);
                        const double height_m =
                            constant ? 300.0 : static_cast<double>(heights_m.at(c, r));
                        const auto light =
                            truth.at(band, place->latitude_rad, place->longitude_rad, height_m);
                        worst = std::max(
                            {worst,
                             std::abs(light.beam_w_m2[vectors ? 0 : 2] -
                                      static_cast<double>(direct.at(c, r))),
                             std::abs(light.diffuse_w_m2 - static_cast<double>(diffuse.at(c, r)))});
                    }
            }
        }
    return worst;
}

TimePlan one_day(CivilDate date, const char* zone = "solar-mean") {
    TimePlan times;
    times.zone = Zone::parse(zone);
    times.periods = periods_of(date, date, Totals::whole, {}, times.zone);
    return times;
}

TimePlan instant(const char* text) {
    TimePlan times;
    times.instant = resolve(parse_instant(text), Zone(), 0);
    return times;
}

/// Half the quantum of stored fluxes: a greater difference could change a stored value by a step.
constexpr double half_quantum = 1.0 / 32;

}  // namespace

TEST_CASE("LightField: meets the light at each pixel on a 30 m grid with mountains",
          "[model][differential]") {
    const auto grid = grid_from(crs_wkt_of("EPSG:32633"),
                                {300000, 5500000, 300000 + 900 * 30, 5500000 + 600 * 30}, 30);
    Plane<float> heights(grid.width, grid.height);
    for (int r = 0; r < grid.height; ++r)
        for (int c = 0; c < grid.width; ++c)
            heights.at(c, r) =
                static_cast<float>(1800 + 2100 * std::sin(c * 0.02) * std::cos(r * 0.03));
    CHECK(worst_difference(grid, one_day({2025, 12, 21}), heights, false) < half_quantum);
    CHECK(worst_difference(grid, instant("2025-06-21T10:00Z"), heights, false) < half_quantum);
    CHECK(worst_difference(grid, instant("2025-06-21T10:00Z"), heights, false, true) <
          half_quantum);
}

TEST_CASE("LightField: meets the light on the whole globe, through polar night and the terminator",
          "[model][differential]") {
    const auto grid = grid_from(crs_wkt_of("EPSG:4326"), {-180, -90, 180, 90}, 1.0);
    const Plane<float> heights(grid.width, grid.height, 300.0f);
    CHECK(worst_difference(grid, one_day({2025, 3, 20}), heights, true) < half_quantum);
    CHECK(worst_difference(grid, one_day({2025, 6, 21}, "UTC"), heights, true) < half_quantum);
    CHECK(worst_difference(grid, instant("2025-11-03T17:00Z"), heights, true) < half_quantum);
}

TEST_CASE("LightField: grids about a pole and far from their zone are met too",
          "[model][differential]") {
    const auto polar = grid_from(crs_wkt_of("EPSG:3031"), {-600000, -600000, 600000, 600000}, 4000);
    const Plane<float> heights(polar.width, polar.height, 300.0f);
    CHECK(worst_difference(polar, one_day({2025, 10, 10}), heights, true) < half_quantum);
    const auto far =
        grid_from(crs_wkt_of("EPSG:32633"), {-1500000, 6000000, -1000000, 6500000}, 1000);
    const Plane<float> flat(far.width, far.height, 300.0f);
    CHECK(worst_difference(far, one_day({2025, 6, 21}, "Europe/Lisbon"), flat, true) <
          half_quantum);
}
