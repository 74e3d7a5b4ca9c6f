// The one-line jobs against the plans they stand for.
#include <catch2/catch.hpp>

#include "desk.hpp"
#include "raster/input_support.hpp"

using namespace sunbudget::test;

namespace {
void make_heights(const std::filesystem::path& file) {
    MadeRaster raster;
    raster.grid = square_grid(80, 60, 500000, 5500000, 30);
    raster.bands = {[](int c, int r) { return 300.0 + 10 * c + 5 * r; }};
    make_raster(file, raster);
}

std::string plan(const std::string& layer, const std::string& unit) {
    // The job has no cover, so that the ground in view reflects the usual share.
    const std::string surface =
        layer == "insolation" ? "" : "surface: {cover: {raster: cover.tif, classes: worldcover}}\n";
    return "sunbudget: 1\n" + surface +
           "terrain: {elevation: dem.tif}\n"
           "sky: {turbidity: 4}\n"
           "time: {from: 2025-06-01, to: 2025-07-10, step: 20 min, hours: 10-16, zone: \"+02:00\", "
           "totals: month}\n"
           "outputs: {directory: out, layers: [" +
           layer + "], unit: " + unit + "}\n";
}
const std::vector<std::string> light_flags{"--elevation", "dem.tif",    "--turbidity", "4",
                                           "--from",      "2025-06-01", "--to",        "2025-07-10",
                                           "--step",      "20 min",     "--hours",     "10-16",
                                           "--zone",      "+02:00",     "--totals",    "month"};
}  // namespace

TEST_CASE("albedo, insolation and net: the same pixels as the plan, in one file",
          "[cli][differential]") {
    const Desk desk;
    make_heights(desk.path("dem.tif"));
    const std::vector<std::string> cover{"--cover", "cover.tif", "--classes", "worldcover"};
    for (const auto& [command, layer, unit] : {std::tuple{"albedo", "albedo", "W/m2"},
                                               {"insolation", "insolation", "kWh/m2"},
                                               {"net", "net_shortwave", "MJ/m2"}}) {
        CAPTURE(command);
        write(desk.path("plan.yaml"), plan(layer, unit));
        const auto folder = "out-" + std::string(command),
                   file = "one-" + std::string(command) + ".tif";
        REQUIRE(desk.run({"run", "plan.yaml", "--out", folder}).exit_code == 0);
        std::vector<std::string> job{command, "-o", file};
        if (command != std::string("insolation")) job.insert(job.end(), cover.begin(), cover.end());
        if (command != std::string("albedo")) {
            job.insert(job.end(), light_flags.begin(), light_flags.end());
            job.insert(job.end(), {"--unit", unit});
        }
        const auto before = names_in(desk.path());
        const auto outcome = desk.run(job);
        CAPTURE(outcome.err);
        REQUIRE(outcome.exit_code == 0);
        CHECK(outcome.out.empty());
        CHECK(names_in(desk.path()).size() == before.size() + 1);
        CHECK(same_pixels(pixels_of(desk.path(file)),
                          pixels_of(desk.path(folder) / (std::string(layer) + ".tif"))));
    }
}

TEST_CASE("albedo: replaces an older output file and makes the folder it is asked for", "[cli]") {
    const Desk desk;
    write(desk.path("a.tif"), "old");
    for (const auto* out : {"a.tif", "deep/er/a.tif"}) {
        CHECK(desk.run({"albedo", "--cover", "cover.tif", "--classes", "worldcover", "-o", out})
                  .exit_code == 0);
        CHECK(pixels_of(desk.path(out)).size() == 80 * 60);
    }
}

TEST_CASE("net: an albedo given as a number or a raster stands in for the cover", "[cli]") {
    const Desk desk;
    REQUIRE(desk.run({"albedo", "--cover", "cover.tif", "--classes", "worldcover", "-o", "a.tif"})
                .exit_code == 0);
    REQUIRE(desk.run({"net", "--albedo", "a.tif", "--at", "2025-06-21T12:00Z", "-o", "net.tif"})
                .exit_code == 0);
    REQUIRE(desk.run({"run", "plan.yaml"}).exit_code == 0);
    // The stored albedo is rounded to 2^-13, which is at most 0.1 W m-2 of 900: two quanta of 1/16.
    const auto given = pixels_of(desk.path("net.tif")),
               classed = pixels_of(desk.path("out/net_shortwave.tif"));
    REQUIRE(given.size() == classed.size());
    for (std::size_t i = 0; i < given.size(); ++i)
        if (!(std::abs(given[i] - classed[i]) <= 0.125))
            FAIL("pixel " << i << ": " << given[i] << " and " << classed[i]);
    REQUIRE(desk.run({"net", "--albedo", "0.25", "--like", "cover.tif", "--at", "2025-06-21T12:00Z",
                      "-o", "n.tif"})
                .exit_code == 0);
    REQUIRE(
        desk.run({"insolation", "--like", "cover.tif", "--at", "2025-06-21T12:00Z", "-o", "i.tif"})
            .exit_code == 0);
    CHECK(mean_of(pixels_of(desk.path("n.tif"))) ==
          Approx(0.75 * mean_of(pixels_of(desk.path("i.tif")))).margin(1.0 / 16));
}
