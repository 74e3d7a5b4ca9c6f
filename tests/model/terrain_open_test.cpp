#include <catch2/catch.hpp>

#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <iostream>

#include "support/vectors.hpp"
#include "terrain_run.hpp"

using namespace sunbudget;
using namespace sunbudget::test;

namespace {

std::string plan_of(const std::string& elevation, const Frame& frame, const std::string& time,
                    const std::string& diffuse) {
    const auto& t = frame.affine;
    return fmt::format(
        "grid: {{crs: \"{}\", bounds: [{}, {}, {}, {}], cell: {}}}\n"
        "surface: {{albedo: {{value: 0.25}}}}\nterrain: {{elevation: {}}}\nsky: {{diffuse: "
        "{}}}\ntime: {}\n"
        "outputs: {{layers: [insolation, direct, diffuse, net_shortwave], unit: W/m2}}\n",
        frame.crs, t[0], t[3] + t[5] * frame.height, t[0] + t[1] * frame.width, t[3], t[1],
        elevation, diffuse, time);
}

/// The greatest difference between two planes.
double difference(const Plane<float>& a, const Plane<float>& b) {
    double worst = 0;
    for (int r = 0; r < a.height(); ++r)
        for (int c = 0; c < a.width(); ++c)
            worst = std::max(
                worst, std::abs(static_cast<double>(a.at(c, r)) - static_cast<double>(b.at(c, r))));
    return worst;
}

/// The open light of a run with terrain, as its own field gives it at a height.
Plane<float> open_light(const Run& run, std::size_t band, LightField::Part part, float height_m) {
    LightField field(*run.times, run.sky, run.grid, 1, std::nullopt, true);
    const Plane<float> heights_m(run.grid.width, run.grid.height, height_m);
    Plane<float> out(run.grid.width, run.grid.height);
    const Window frame{0, 0, run.grid.width, run.grid.height};
    for (int column = 0; column < frame.width; column += block_px) {
        const Window window{column, 0, std::min(block_px, frame.width - column), frame.height};
        field.fill(field.prepare(window, frame, heights_m, 0), band, part, heights_m, out);
    }
    return out;
}

/// The same sums as the program's, in its order.
Plane<float> sum(const Plane<float>& a, const Plane<float>& b) {
    Plane<float> out(a.width(), a.height());
    for (int r = 0; r < a.height(); ++r)
        for (int c = 0; c < a.width(); ++c) out.at(c, r) = a.at(c, r) + b.at(c, r);
    return out;
}

}  // namespace

TEST_CASE("terrain: level open ground gets exactly what flat ground without a raster gets",
          "[model][property]") {
    const TemporaryFolder folder;
    const auto frame = frame_about("EPSG:32633", 50, 15, 30, 300, 40);
    write_heights(folder.path() / "level.tif", frame, Plane<float>(frame.width, frame.height, 250));
    double worst = 0;
    for (const auto* time :
         {"{at: 2025-04-02T08:00Z}", "{from: 2025-10-20, to: 2025-10-20, step: 10 min}",
          "{from: 2025-01-01, to: 2025-12-31, step: 30 min, totals: month, days: mid-month}"})
        for (const auto* diffuse : {"hay-davies1980", "liu-jordan1963", "perez1990"}) {
            CAPTURE(time, diffuse);
            const auto flat = computed(folder.path(), plan_of("250 m", frame, time, diffuse));
            const auto raster = computed(folder.path(), plan_of("level.tif", frame, time, diffuse));
            for (std::size_t band = 0; band < raster.run.times->bands(); band += 5) {
                const auto in = [band](const Computed& from,
                                       const char* layer) -> const Plane<float>& {
                    return from.layers.at(layer)[band];
                };
                const auto direct = open_light(raster.run, band, LightField::Part::beam_up, 250);
                const auto sky = open_light(raster.run, band, LightField::Part::diffuse, 250);
                CHECK(direct.at(5, 5) > 1);
                CHECK(difference(in(raster, "direct"), direct) == 0);
                CHECK(difference(in(raster, "diffuse"), sky) == 0);
                CHECK(difference(in(raster, "insolation"), sum(direct, sky)) == 0);
                for (const auto* layer : {"direct", "diffuse", "insolation", "net_shortwave"}) {
                    // Light is interpolated in height where there is a raster: each within 1/256 W m-2, twice in a sum.
                    CHECK(difference(in(raster, layer), in(flat, layer)) < 4.0 / 256);
                    worst = std::max(worst, difference(in(raster, layer), in(flat, layer)));
                }
            }
        }
    std::cout << fmt::format(
        "level ground with and without a raster: largest difference {:.5f} W m-2\n", worst);
}
