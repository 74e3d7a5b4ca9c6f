#include <catch2/catch.hpp>

#include <fmt/format.h>

#include <cmath>
#include <functional>
#include <iostream>
#include <numbers>

#include "sunbudget/base/units.hpp"
#include "sunbudget/model/light.hpp"
#include "support/vectors.hpp"
#include "terrain_run.hpp"

using namespace sunbudget;
using namespace sunbudget::test;

namespace {

constexpr int side = 401, middle = 200;
constexpr double quantum = 1.0 / 16;  // W m-2, of stored fluxes

/// Sky view of a made scene on 1 m cells: heights by the distance east and north of the middle pixel.
Plane<float> sky_view_of(const std::function<double(double east, double north)>& height_m) {
    const TemporaryFolder folder;
    const auto frame = frame_about("EPSG:32633", 50, 15, 1, side, side);
    Plane<float> heights_m(side, side);
    for (int r = 0; r < side; ++r)
        for (int c = 0; c < side; ++c)
            heights_m.at(c, r) = static_cast<float>(height_m(c - middle, middle - r));
    write_heights(folder.path() / "scene.tif", frame, heights_m);
    auto found =
        computed(folder.path(), "terrain: {elevation: scene.tif}\noutputs: {layers: [sky_view]}\n");
    return std::move(found.layers.at("sky_view").front());
}

/// A slope seen under one angle from a point: level up to a distance, then rising, then level again.
double seen_under(double angle_deg, double distance_m) {
    return distance_m < 30 ? 0 : std::tan(rad_from_deg(angle_deg)) * std::min(distance_m, 60.0);
}

}  // namespace

TEST_CASE("terrain: pits, walls, streets and valleys have the sky view that geometry says",
          "[model][vector]") {
    // terrain.csv 049 to 063 and 067. 64 directions and single precision: 1e-4. A round pit on square cells is
    // seen 1 / (8 * 30) too high between its pixels; a wall of 400 m at 30 m ends at 81 degrees off its
    // middle: 0.002.
    for (const double angle_deg : {10.0, 30.0, 45.0, 60.0}) {
        const double h = rad_from_deg(angle_deg);
        CAPTURE(angle_deg);
        const auto view = [](const Plane<float>& plane) {
            return static_cast<double>(plane.at(middle, middle));
        };
        const auto pit = sky_view_of(
            [&](double e, double n) { return seen_under(angle_deg, std::hypot(e, n)); });
        const auto wall = sky_view_of([&](double e, double) { return seen_under(angle_deg, e); });
        const auto street =
            sky_view_of([&](double, double n) { return seen_under(angle_deg, std::abs(n)); });
        CHECK(view(pit) == Approx(std::cos(h) * std::cos(h)).margin(0.002));
        CHECK(view(wall) == Approx((1 + std::cos(h)) / 2).margin(0.002));
        CHECK(view(street) == Approx(std::cos(h)).margin(0.004));
        const auto valley = sky_view_of(
            [&](double e, double) { return std::tan(h) * std::min(std::abs(e), 40.0); });
        double sum = 0;
        for (int c = middle - 39; c <= middle + 39; ++c)
            sum += static_cast<double>(valley.at(c, middle)) / 79;
        // The bottom pixel of 79 is level, and the valley ends after 200 m, 12 degrees off its axis: 0.005.
        CHECK(sum == Approx(std::cos(h)).margin(0.005));
    }
}

TEST_CASE("terrain: shadows of a wall are as long as the sun's height says", "[model][vector]") {
    const TemporaryFolder folder;
    const auto frame = frame_about("EPSG:32633", 50, 15, 0.5, 301, 601);
    Plane<float> heights_m(frame.width, frame.height);
    constexpr int wall_row = 500;
    for (int r = wall_row; r < wall_row + 20; ++r)
        for (int c = 0; c < frame.width; ++c) heights_m.at(c, r) = 10;
    write_heights(folder.path() / "wall.tif", frame, heights_m);
    std::cout << "shadow of a 10 m wall [m]: sun's height [deg], true, found\n";
    for (const auto* instant : {"2025-12-21T08:20Z", "2025-12-21T11:00Z", "2025-02-20T09:30Z",
                                "2025-03-21T11:00Z", "2025-06-21T11:00Z", "2025-06-21T08:00Z"}) {
        const auto found =
            computed(folder.path(), fmt::format("terrain: {{elevation: wall.tif}}\ntime: {{at: "
                                                "{}}}\noutputs: {{layers: [direct]}}\n",
                                                instant));
        const auto sun = suns_over(PointLight(*found.run.times, found.run.sky), 0,
                                   rad_from_deg(50.0), rad_from_deg(15.0), 0)
                             .beam.front();
        const double elevation = std::asin(sun.sine_high);
        // terrain.csv 074 to 078: height / tan(elevation) along the sun's azimuth, here across the wall.
        const double want_m = 10 / std::tan(elevation) * -std::cos(sun.azimuth_rad);
        int dark = 0;
        while (found["direct"].at(150, wall_row - 1 - dark) == 0) ++dark;
        std::cout << fmt::format("{:8.2f}{:8.2f}{:8.2f}\n", deg_from_rad(elevation), want_m,
                                 dark * 0.5);
        // The wall's face leans over one cell of 0.5 m, and the shadow ends somewhere in a cell.
        CHECK(dark * 0.5 == Approx(want_m).margin(0.75));
    }
}

TEST_CASE("terrain: a periodic ground without shadows catches what level ground does",
          "[model][property]") {
    const TemporaryFolder folder;
    constexpr int period = 64, size = 3 * period;
    const auto frame = frame_about("EPSG:32633", 50, 15, 1, size, size);
    Plane<float> heights_m(size, size);
    for (int r = 0; r < size; ++r)
        for (int c = 0; c < size; ++c) {
            const double x = 2 * std::numbers::pi * c / period,
                         y = 2 * std::numbers::pi * r / period;
            heights_m.at(c, r) = static_cast<float>(100 + 2 * std::sin(x + 1) +
                                                    1.5 * std::cos(2 * y) + std::sin(x + y));
        }
    write_heights(folder.path() / "waves.tif", frame, heights_m);
    write_heights(folder.path() / "level.tif", frame, Plane<float>(size, size, 100));
    const auto plan = [](const char* raster) {
        return fmt::format(
            "terrain: {{elevation: {}}}\ntime: {{at: 2025-06-21T10:00Z}}\noutputs: {{layers: "
            "[direct, slope]}}\n",
            raster);
    };
    const auto waves = computed(folder.path(), plan("waves.tif")),
               level = computed(folder.path(), plan("level.tif"));
    double caught = 0, open = 0;
    for (int r = period; r < 2 * period; ++r)
        for (int c = period; c < 2 * period; ++c) {
            REQUIRE(waves["direct"].at(c, r) > 0);
            caught += static_cast<double>(waves["direct"].at(c, r)) /
                      std::cos(rad_from_deg(static_cast<double>(waves["slope"].at(c, r))));
            open += static_cast<double>(level["direct"].at(c, r));
        }
    // terrain.csv 069. The air above a crest is thinner: 4 m of 8434 m change the beam by 2e-4 at most,
    // and as much less in the hollows.
    CHECK(caught / open == Approx(1).margin(2e-5));
}

TEST_CASE("terrain: no step at the borders of blocks and regions", "[model][property]") {
    const TemporaryFolder folder;
    // A big smooth hill and a ridge that shades in midwinter; 30 m cells: blocks of 256, regions of 512 pixels.
    const auto frame = frame_about("EPSG:32633", 50, 15, 30, 700, 700);
    const auto hill = [](double column, double row) {
        const auto bell = [](double d2, double width) {
            return std::exp(-d2 / (2 * width * width));
        };
        const double c = column - 380, r = row - 360;
        return static_cast<float>(200 + 1500 * bell(c * c + r * r, 110) +
                                  800 * bell((c - 90) * (c - 90) + (r + 200) * (r + 200) / 9, 40));
    };
    Plane<float> heights_m(frame.width, frame.height);
    for (int r = 0; r < frame.height; ++r)
        for (int c = 0; c < frame.width; ++c) heights_m.at(c, r) = hill(c, r);
    write_heights(folder.path() / "hill.tif", frame, heights_m);
    // The same ground with the lattice of blocks and regions elsewhere: 104 pixels off in both directions.
    constexpr int off = 104;
    auto moved = frame;
    moved.affine[0] += 30 * off;
    moved.affine[3] -= 30 * off;
    const auto plan = [&](const Frame& grid, const char* time) {
        const auto& t = grid.affine;
        return fmt::format(
            "grid: {{like: elevation, bounds: [{:.6f}, {:.6f}, {:.6f}, {:.6f}]}}\nterrain: "
            "{{elevation: hill.tif}}\ntime: {}\n"
            "outputs: {{layers: [direct, insolation, sky_view]}}\n",
            t[0], frame.affine[3] - 30 * frame.height, frame.affine[0] + 30 * frame.width, t[3],
            time);
    };
    std::cout << "steps at the borders of blocks and of regions, and the like elsewhere, 99.9 % [W "
                 "m-2]; 99.9 % of what moving the lattice changes\n";
    for (const auto* time :
         {"{from: 2025-12-21, to: 2025-12-21}", "{from: 2025-12-21, to: 2025-12-21, step: 1 h}",
          "{from: 2025-12-01, to: 2025-12-31}"}) {
        const auto found = computed(folder.path(), plan(frame, time)),
                   other = computed(folder.path(), plan(moved, time));
        for (const auto* layer : {"direct", "insolation"}) {
            const auto& light = found[layer];
            const auto at = [&](int c, int r) { return static_cast<double>(light.at(c, r)); };
            Errors blocks, regions, inside, change;
            for (int r = 2; r < frame.height - 2; ++r)
                for (int c = 2; c < frame.width - 2; ++c) {
                    // Third differences forget how smooth ground bends; a step of s makes one of 2 s.
                    const double across =
                        (at(c + 1, r) - at(c - 2, r) - 3 * (at(c, r) - at(c - 1, r))) / 2;
                    const double down =
                        (at(c, r + 1) - at(c, r - 2) - 3 * (at(c, r) - at(c, r - 1))) / 2;
                    (c % 512 == 0 ? regions : c % 256 == 0 ? blocks : inside).add(across);
                    (r % 512 == 0 ? regions : r % 256 == 0 ? blocks : inside).add(down);
                    if (c >= off && r >= off)
                        change.add(at(c, r) -
                                   static_cast<double>(other[layer].at(c - off, r - off)));
                }
            std::cout << fmt::format("{:8.4f}{:8.4f}{:8.4f}{:8.4f}  {} {}\n",
                                     blocks.percentile(0.999), regions.percentile(0.999),
                                     inside.percentile(0.999), change.percentile(0.999), layer,
                                     time);
            CAPTURE(layer, time);
            CHECK(blocks.percentile(0.999) < quantum);
            CHECK(regions.percentile(0.999) < quantum);
        }
    }
}
