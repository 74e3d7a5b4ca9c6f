// The same bits for any number of threads, memory, locale and time zone; the same pixels for any tile.
#include <catch2/catch.hpp>
#include <nlohmann/json.hpp>

#include <cmath>

#include "desk.hpp"
#include "raster/input_support.hpp"

using namespace sunbudget::test;
namespace fs = std::filesystem;

namespace {
/// Cover and heights in UTM, to be warped onto a grid in another CRS.
void make_inputs(const Desk& desk, const std::string& cell, const std::string& last_day) {
    make_cover(desk.path("cover.tif"), 1000, 800,
               [](int c, int r) { return (c * r) % 97 == 0 ? 0 : patchy(c, r); });
    MadeRaster heights;
    heights.grid = square_grid(400, 330, 499000, 5501000, 80);
    heights.nodata = -9999;
    heights.bands = {[](int c, int r) {
        return c > 300 && r > 250 ? -9999 : 500 + 400 * std::sin(c / 23.0) * std::cos(r / 31.0);
    }};
    make_raster(desk.path("dem.tif"), heights);
    write(desk.path("plan.yaml"),
          "sunbudget: 1\n"
          "grid: {crs: EPSG:3035, bounds: [4683000, 2939000, 4710000, 2960000], cell: " +
              cell +
              "}\n"
              "surface: {cover: {raster: cover.tif, classes: worldcover}}\n"
              "terrain: {elevation: dem.tif, directions: 16, reach: 5 km}\n"
              "sky: {turbidity: [2.6, 2.8, 3.1, 3.4, 3.6, 3.7, 3.7, 3.6, 3.3, 3.0, 2.7, 2.6]}\n"
              "time: {from: 2025-01-01, to: " +
              last_day +
              ", step: 30 min, days: mid-month, zone: "
              "solar-mean, totals: month}\n"
              "outputs: {directory: out, layers: [albedo, insolation, net_shortwave, quality]}\n");
}

const std::vector<std::string> files{"albedo.tif", "insolation.tif", "net_shortwave.tif",
                                     "quality.tif"};

std::string made(const Desk& desk, const std::string& folder, int tile, int threads,
                 const char* memory, const std::vector<std::string>& environment = {}) {
    const auto outcome = desk.run({"run", "plan.yaml", "--quiet", "--out", folder, "--set",
                                   "engine.tile=" + std::to_string(tile), "--threads",
                                   std::to_string(threads), "--memory", memory},
                                  environment);
    CAPTURE(outcome.err);
    REQUIRE(outcome.exit_code == 0);
    return content(desk.path(folder) / "SHA256SUMS");
}

nlohmann::json statistics(const fs::path& folder) {
    const auto json = nlohmann::json::parse(content(folder / "run.json"));
    return {json.at("layers"), json.at("quality_pixels")};
}
}  // namespace

TEST_CASE("run: the same bits for any threads and memory, the same pixels for any tile",
          "[cli][differential]") {
    const Desk desk;
    make_inputs(desk, "40", "2025-12-31");
    std::vector<std::vector<double>> expected;
    nlohmann::json numbers;
    for (const int tile : {128, 256, 512}) {
        const auto sums = made(desk, "a" + std::to_string(tile), tile, tile == 512 ? 2 : 1, "2G");
        CAPTURE(tile);
        CHECK(made(desk, "b", tile, 5, "128M") == sums);
        if (tile == 256) CHECK(made(desk, "c", tile, 2, "128M") == sums);
        const auto folder = desk.path("a" + std::to_string(tile));
        for (std::size_t i = 0; i < files.size(); ++i) {
            CAPTURE(files[i]);
            auto pixels = pixels_of(folder / files[i]);
            if (tile == 128)
                expected.push_back(std::move(pixels));
            else
                CHECK(same_pixels(pixels, expected[i]));
        }
        if (tile == 128) numbers = statistics(folder);
        CHECK(statistics(folder) == numbers);
        for (const auto* name : {"b", "c"}) fs::remove_all(desk.path(name));
    }
    // The test would prove little on empty rasters.
    CHECK(expected[1].size() == 12U * 675 * 525);
    CHECK(mean_of(expected[1]) > 50);
}

TEST_CASE("run: the same bits in any locale and time zone", "[cli][differential]") {
    const Desk desk;
    make_inputs(desk, "120", "2025-02-28");
    const std::vector<std::string> locales{"de_DE", "tr_TR"};
    for (const auto& name : locales)
        if (shell("localedef -i " + name + " -f UTF-8 " + word(desk.path(name + ".UTF-8")))
                .exit_code > 1) {
            WARN("SKIPPED: no locale " << name << " can be made here");
            return;
        }
    const auto sums = made(desk, "plain", 512, 2, "1G", {"LC_ALL=C", "TZ=UTC"});
    const auto locpath = "LOCPATH=" + desk.path().string();
    CHECK(made(desk, "de", 512, 2, "1G", {locpath, "LC_ALL=de_DE.UTF-8", "TZ=Asia/Kathmandu"}) ==
          sums);
    CHECK(made(desk, "tr", 512, 2, "1G", {locpath, "LC_ALL=tr_TR.UTF-8", "TZ=America/St_Johns"}) ==
          sums);
    const auto plain = desk.run({"check", "plan.yaml"}, {"LC_ALL=C"}).out;
    const auto turkish = desk.run({"check", "plan.yaml"}, {locpath, "LC_ALL=tr_TR.UTF-8"}).out;
    CHECK(plain.substr(0, plain.find("Estimate")) == turkish.substr(0, turkish.find("Estimate")));
}
