// A station's record from the plan to the rasters.
#include <fmt/format.h>

#include <catch2/catch.hpp>
#include <cmath>
#include <nlohmann/json.hpp>
#include <numbers>
#include <sstream>

#include "desk.hpp"

using namespace sunbudget::test;
using Catch::Contains;

namespace {

constexpr double flux_quantum = 1.0 / 16;

/// Two by two pixels about the station at Bondville, level ground at its height.
std::string plan_for(const std::string& table, const std::string& day) {
    return "sunbudget: 1\n"
           "grid: {crs: EPSG:4326, bounds: [-88.38, 40.04, -88.36, 40.06], cell: 0.01}\n"
           "terrain: {elevation: 213 m}\n"
           "weather:\n"
           "  table: " +
           table +
           "\n"
           "  header: none\n"
           "  skip: 2\n"
           "  columns: {year: 1, month: 3, day: 4, hour: 5, minute: 6, global: 9, beam: 13, "
           "diffuse: 15}\n"
           "  units: {global: W/m2, beam: W/m2, diffuse: W/m2}\n"
           "  flags: {global: 10, beam: 14, diffuse: 16}\n"
           "  missing: -9999.9\n"
           "  stamp: end\n"
           "  station: [40.05, -88.37]\n"
           "time: {from: " +
           day + ", to: " + day +
           ", zone: solar-mean}\n"
           "outputs: {layers: [direct, diffuse, insolation], directory: out}\n";
}

}  // namespace

TEST_CASE("weather: at the station the rasters hold the day that was measured there",
          "[cli][weather]") {
    SUNBUDGET_NEEDS_DATA();
    const auto [name, day] = GENERATE(
        table<const char*, const char*>({{"bon06197", "2006-07-16"}, {"bon06107", "2006-04-17"}}));
    const auto file = real_data(fmt::format("ground/surfrad/{}.dat", name))->string();
    const Desk desk;
    write(desk.path("plan.yaml"), plan_for(file, day));
    const auto outcome = desk.run({"run", "plan.yaml"});
    REQUIRE(outcome.exit_code == 0);
    // The station's own sums: zenith, direct normal and diffuse as its file gives them.
    std::istringstream rows(content(file));
    std::string line;
    std::getline(rows, line);
    std::getline(rows, line);
    double direct = 0, diffuse = 0, count = 0;
    while (std::getline(rows, line)) {
        std::istringstream cells(line);
        std::vector<double> row;
        for (double cell = 0; cells >> cell;) row.push_back(cell);
        if (row.size() < 16) continue;
        count += 1;
        if (row[7] >= 90) continue;
        direct += std::max(0.0, row[12]) * std::cos(row[7] * std::numbers::pi / 180);
        diffuse += std::max(0.0, row[14]);
    }
    CAPTURE(name, direct / count, diffuse / count);
    // The file's day is UTC's, the run's the station's own: they differ by a sunny quarter of an hour
    // of one evening against that of another, and rows of three minutes. 1 %.
    CHECK(mean_of(pixels_of(desk.path("out/direct.tif"))) == Approx(direct / count).epsilon(0.01));
    CHECK(mean_of(pixels_of(desk.path("out/diffuse.tif"))) ==
          Approx(diffuse / count).epsilon(0.01).margin(flux_quantum));
    const auto run = nlohmann::json::parse(content(desk.path("out/run.json")));
    CHECK(run["real_sky"]["from"] == "global, beam, diffuse");
    CHECK(run["sky"]["uncertainty"] == 0.05);
    CHECK(run["real_sky"]["closure"]["intervals"].get<int>() > 100);
    CHECK(run["inputs"][0]["role"] == "weather.table");
    CHECK(run["inputs"][0]["digest"].get<std::string>().starts_with("sha256:"));
    // Its own turbidity, a July day's.
    const auto fit = desk.run(
        {"sun", "--at", "40.05,-88.37", "--height", "213", "--fit", "plan.yaml", "--json"});
    REQUIRE(fit.exit_code == 0);
    const auto months = nlohmann::json::parse(fit.out);
    REQUIRE(months.size() == 1);
    CHECK(months[0]["turbidity"].get<double>() == Approx(3).margin(0.5));
    CHECK(months[0]["clear_hours"].get<int>() >= 4);
    CHECK(months[0]["low"].get<double>() <= months[0]["high"].get<double>());
}

TEST_CASE("weather: thin days have no data and the run says so", "[cli][weather]") {
    const Desk desk;
    std::string table = "time,global [W/m2]\n";
    for (int hour = 0; hour < 24; ++hour) table += fmt::format("2025-06-02T{:02}:00,300\n", hour);
    write(desk.path("station.csv"), table);
    const std::string plan =
        "sunbudget: 1\n"
        "grid: {crs: EPSG:32633, bounds: [500000, 5500000, 500060, 5500060], cell: 30}\n"
        "weather: {table: station.csv, zone: \"+01:00\"}\n"
        "time: {from: 2025-06-01, to: 2025-06-02, totals: day, zone: \"+01:00\"}\n"
        "outputs: {layers: [insolation], directory: out}\n";
    write(desk.path("plan.yaml"), plan);
    const auto outcome = desk.run({"run", "plan.yaml"});
    REQUIRE(outcome.exit_code == 0);
    CHECK_THAT(outcome.err, Contains("too few days for 2025-06-01") &&
                                Contains("insolation 2025-06-01: no pixel has a value"));
    const auto pixels = pixels_of(desk.path("out/insolation.tif"));
    REQUIRE(pixels.size() == 8);
    CHECK(std::isnan(pixels[0]));
    CHECK(pixels[4] > 100);
    const auto stopped = desk.run({"check", "plan.yaml", "--set", "weather.gaps=stop"});
    CHECK(stopped.exit_code == 3);
    CHECK_THAT(stopped.err, Contains("no light was measured from 2025-06-01") &&
                                Contains("plan.yaml:3: weather.table"));
    const auto both = desk.run({"check", "plan.yaml", "--set", "sky.cloud=0.3"});
    CHECK(both.exit_code == 2);
    CHECK_THAT(both.err, Contains("has the light of the run already"));
    write(desk.path("station.csv"),
          "time,relative_humidity [1]\n2025-06-02T10:00,1.4\n2025-06-02T11:00,0.4\n");
    const auto nonsense = desk.run({"check", "plan.yaml"});
    CHECK(nonsense.exit_code == 3);
    CHECK_THAT(nonsense.err, Contains("station.csv:2: relative_humidity") && Contains("1.4"));
}

TEST_CASE("weather: clouds and sunshine of a plan dim the sky as their rules say",
          "[cli][weather]") {
    const Desk desk;
    write(desk.path("plan.yaml"),
          "sunbudget: 1\n"
          "grid: {crs: EPSG:32633, bounds: [500000, 5500000, 500060, 5500060], cell: 30}\n"
          "time: {from: 2025-06-01, to: 2025-06-30}\n"
          "outputs: {layers: [insolation], directory: out}\n");
    const auto mean = [&](const std::vector<std::string>& set) {
        std::vector<std::string> arguments{"run", "plan.yaml", "--fresh", "--quiet"};
        for (const auto& one : set) arguments.insert(arguments.end(), {"--set", one});
        const auto outcome = desk.run(arguments);
        CAPTURE(outcome.err);
        REQUIRE(outcome.exit_code == 0);
        return mean_of(pixels_of(desk.path("out/insolation.tif")));
    };
    const double clear = mean({});
    CHECK(mean({"sky.cloud=0.4"}) == Approx(clear * 0.7).margin(flux_quantum));
    CHECK(mean({"sky.cloud=0.4", "sky.overcast=0.4"}) ==
          Approx(clear * (1 - 0.6 * 0.4)).margin(flux_quantum));
    // June at 49.6 N: 41.7 MJ/m2 a day outside the air (FAO-56 Table 2.6 has 41.7 at 50 N), 8 of 16.2 hours.
    const double sunny = mean({"sky.sunshine=[2, 3, 4, 5, 6, 8, 8, 7, 5, 4, 2, 2]"});
    CHECK(sunny == Approx((0.25 + 0.5 * 8 / 16.2) * 41.7e6 / 86400).epsilon(0.01));
    CHECK(desk.run({"check", "plan.yaml", "--set",
                    "sky.sunshine=[2, 3, 4, 5, 6, 20, 8, 7, 5, 4, 2, 2]"})
              .exit_code == 2);
}

TEST_CASE("weather: an index raster dims pixel by pixel; what is no index has no light",
          "[cli][weather]") {
    const Desk desk;
    make_cover(desk.path("index.tif"), 2, 2,
               [](int column, int) { return column == 0 ? 1.0 : 9.0; });
    write(desk.path("plan.yaml"),
          "sunbudget: 1\n"
          "grid: {like: index.tif}\n"
          "time: {from: 2025-06-01, to: 2025-07-31, totals: month}\n"
          "outputs: {layers: [insolation], directory: out}\n");
    const auto pixels = [&](const std::vector<std::string>& set) {
        std::vector<std::string> arguments{"run", "plan.yaml", "--fresh", "--quiet"};
        arguments.insert(arguments.end(), set.begin(), set.end());
        REQUIRE(desk.run(arguments).exit_code == 0);
        return pixels_of(desk.path("out/insolation.tif"));
    };
    const auto clear = pixels({});
    const auto dimmed = pixels({"--set", "sky.index=index.tif"});
    REQUIRE(dimmed.size() == 8);
    CHECK(dimmed[0] == clear[0]);
    CHECK(std::isnan(dimmed[1]));
    // A closed cover everywhere, by raster and by number.
    const auto covered = pixels({"--set", "sky.cloud=index.tif", "--set", "sky.overcast=0.4"});
    CHECK(covered[0] == Approx(clear[0] * 0.4).margin(flux_quantum));
    CHECK(std::isnan(covered[1]));
    const auto wrong =
        desk.run({"check", "plan.yaml", "--set", "sky.index=[index.tif, index.tif, index.tif]"});
    CHECK(wrong.exit_code == 2);
    CHECK_THAT(wrong.err, Contains("3 rasters for 2 periods"));
}
