// The layers of uncertainty: plain arithmetic on the run's own files, and the columns of zones.
#include <array>
#include <catch2/catch.hpp>
#include <cmath>
#include <map>
#include <sstream>

#include "desk.hpp"
#include "raster/input_support.hpp"
#include "reference/shortwave.hpp"

using namespace sunbudget::test;
using Catch::Contains;

namespace {

const std::string layers =
    "outputs.layers=[albedo, albedo_uncertainty, insolation, net_shortwave, "
    "net_shortwave_uncertainty]";

/// Lows and highs of the shipped WorldCover table, as "sunbudget tables worldcover" prints them.
double class_uncertainty(double code) {
    static const std::map<double, std::pair<double, double>> ranges{
        {10, {0.05, 0.20}}, {20, {0.15, 0.30}}, {30, {0.16, 0.26}}, {40, {0.18, 0.25}},
        {50, {0.10, 0.27}}, {60, {0.15, 0.40}}, {80, {0.03, 0.10}}, {90, {0.10, 0.20}}};
    const auto [low, high] = ranges.at(code);
    return (high - low) / 2 / std::sqrt(3.0);
}

void done(const Desk& desk, const std::vector<std::string>& sets) {
    std::vector<std::string> arguments{"run", "plan.yaml", "--quiet", "--fresh"};
    for (const auto& set : sets) arguments.insert(arguments.end(), {"--set", set});
    const auto outcome = desk.run(arguments);
    CAPTURE(outcome.err);
    REQUIRE(outcome.exit_code == 0);
}

/// How far the stored uncertainty of net shortwave lies from that of the stored albedo, its stored uncertainty and
/// the stored light, at worst.
double worst_of_net(const Desk& desk, double light_uncertainty) {
    const auto albedo = pixels_of(desk.path("out/albedo.tif")),
               own = pixels_of(desk.path("out/albedo_uncertainty.tif"));
    const auto light = pixels_of(desk.path("out/insolation.tif")),
               net = pixels_of(desk.path("out/net_shortwave_uncertainty.tif"));
    REQUIRE(light.size() == net.size());
    double worst = 0;
    for (std::size_t i = 0; i < net.size(); ++i)
        worst =
            std::max(worst, std::abs(net[i] - absorbed_uncertainty_reference(
                                                  albedo[i % albedo.size()], own[i % albedo.size()],
                                                  light[i], light_uncertainty)));
    return worst;
}

std::string square(double left, double top, double side, const std::string& name) {
    const auto corner = [](double x, double y) {
        return "[" + std::to_string(x) + "," + std::to_string(y) + "]";
    };
    return R"({"type":"Feature","properties":{"name":")" + name +
           R"("},"geometry":{"type":"Polygon","coordinates":[[)" + corner(left, top) + "," +
           corner(left, top - side) + "," + corner(left + side, top - side) + "," +
           corner(left + side, top) + "," + corner(left, top) + "]]}}";
}

}  // namespace

TEST_CASE(
    "uncertainty: of classes half their range over the root of 3, of net shortwave both parts, in "
    "any unit",
    "[cli][vector]") {
    const Desk desk;
    done(desk, {layers});
    const auto own = pixels_of(desk.path("out/albedo_uncertainty.tif"));
    double worst = 0;
    for (int r = 0; r < 60; ++r)
        for (int c = 0; c < 80; ++c)
            worst = std::max(worst, std::abs(own[static_cast<std::size_t>(r * 80 + c)] -
                                             class_uncertainty(patchy(c, r))));
    CHECK(worst <= 0.5 / 8192 + 1e-7);
    // At most 1000 W/m2: half a step of the albedo and of its uncertainty are 0.06 each, of the light and of the
    // result 0.03 each.
    CHECK(worst_of_net(desk, 0.07) < 0.2);
    // A month's sum: relative uncertainty does not shrink in time. Half steps of 1/16 MJ/m2 in the light and the
    // result, and of albedo and uncertainty 700 MJ/m2 * 6e-5 each.
    done(desk,
         {layers,
          "time={from: 2025-06-01, to: 2025-07-31, step: 1 h, days: mid-month, totals: month}",
          "outputs.unit=MJ/m2", "sky.uncertainty=0.04"});
    CHECK(worst_of_net(desk, 0.04) < 0.2);
    CHECK(mean_of(pixels_of(desk.path("out/net_shortwave_uncertainty.tif"))) > 20);
    // A coarser grid: classes that are averaged err alike.
    done(desk, {layers, "grid.cell=90"});
    const auto coarse = pixels_of(desk.path("out/albedo_uncertainty.tif"));
    for (const auto& [column, row] : {std::pair{2, 2}, {2, 8}, {13, 11}}) {
        double sum = 0;
        for (int n = 0; n < 9; ++n)
            sum += class_uncertainty(patchy(3 * column + n % 3, 3 * row + n / 3));
        CHECK(coarse[static_cast<std::size_t>(row * 27 + column)] ==
              Approx(sum / 9).margin(0.5 / 8192 + 1e-6));
    }
}

TEST_CASE("uncertainty: of a given albedo as the plan says, and asked for where it does not",
          "[cli][edge]") {
    const Desk desk;
    const auto refused =
        desk.run({"check", "plan.yaml", "--set", layers, "--set", "surface={albedo: {value: 0.2}}",
                  "--set", "grid={like: cover.tif}"});
    CHECK(refused.exit_code == 2);
    CHECK_THAT(refused.err, Contains("nothing tells that of a given albedo") &&
                                Contains("add surface.albedo.uncertainty"));
    done(desk,
         {layers, "surface={albedo: {value: 0.2, uncertainty: 0.03}}", "grid={like: cover.tif}"});
    for (const double value : pixels_of(desk.path("out/albedo_uncertainty.tif")))
        if (value != std::round(0.03 * 8192) / 8192) FAIL(value);
    CHECK(worst_of_net(desk, 0.07) < 0.2);
    CHECK_THAT(shell("gdalinfo " + word(desk.path("out/net_shortwave.tif"))).out,
               Contains("albedo_uncertainty=0.03, as the plan says"));
    // A table of one's own without ranges says nothing either.
    write(desk.path("own.csv"),
          "code,name,albedo,albedo_low,albedo_high\n10,trees,0.14,0.1,0.2\n20,shrubs,0.2,,\n30,"
          "grass,0.2,0.1,0.3\n"
          "40,fields,0.2,0.1,0.3\n50,houses,0.15,,\n60,bare,0.25,0.2,0.3\n80,water,0.06,0.05,0."
          "1\n90,reeds,0.14,0.1,0.2\n");
    const auto ranges =
        desk.run({"check", "plan.yaml", "--set", layers, "--set", "surface.cover.classes=own.csv"});
    CHECK(ranges.exit_code == 2);
    CHECK_THAT(ranges.err, Contains("no range of albedo for 20 \"shrubs\", 50 \"houses\"") &&
                               Contains("albedo_low"));
}

TEST_CASE(
    "uncertainty: where an image is used its fit's error, where the land cover fills the class's",
    "[cli][edge]") {
    const Desk desk;
    for (const auto* band : {"red.tif", "nir.tif"}) {
        MadeRaster raster;
        raster.grid = square_grid(80, 60, 500000, 5500000, 30);
        raster.bands = {[](int c, int r) { return c < 40 ? 0.1 + 0.001 * r : -1; }};
        raster.nodata = -1;
        make_raster(desk.path(band), raster);
    }
    done(desk, {layers,
                "surface.reflectance={sensor: generic, scale: 1, bands: {red: red.tif, nir: "
                "nir.tif}, weights: {red: 0.5, nir: 0.5}, "
                "product: surface-reflectance, fill: cover, implausible: allow}"});
    const auto own = pixels_of(desk.path("out/albedo_uncertainty.tif"));
    double worst = 0;
    for (int r = 0; r < 60; ++r)
        for (int c = 0; c < 80; ++c)
            // 0.03 is what the table of methods says of weights of one's own.
            worst = std::max(worst, std::abs(own[static_cast<std::size_t>(r * 80 + c)] -
                                             (c < 40 ? 0.03 : class_uncertainty(patchy(c, r)))));
    CHECK(worst <= 0.5 / 8192 + 1e-7);
    CHECK(worst_of_net(desk, 0.07) < 0.2);
}

TEST_CASE(
    "uncertainty: zones have a column of it beside their layer's, in a run and from its folder, "
    "and explain its term",
    "[cli][differential]") {
    const Desk desk;
    write(
        desk.path("parcels.geojson"),
        R"({"type":"FeatureCollection","crs":{"type":"name","properties":{"name":"urn:ogc:def:crs:EPSG::32633"}},"features":[)" +
            square(500300, 5499700, 600, "north") + "," + square(501200, 5499400, 900, "south") +
            "]}");
    done(desk, {layers, "zones={file: parcels.geojson, id: name}"});
    const auto table = content(desk.path("out/zones.csv"));
    CHECK(desk.run({"zones", "out", "--polygons", "parcels.geojson", "--id", "name", "--cover",
                    "cover.tif", "-o", "again.csv"})
              .exit_code == 0);
    CHECK(content(desk.path("again.csv")) == table);
    std::istringstream lines(table);
    std::vector<std::vector<std::string>> rows;
    for (std::string line; std::getline(lines, line);) {
        auto& row = rows.emplace_back();
        std::istringstream cells(line);
        for (std::string cell; std::getline(cells, cell, ',');) row.push_back(cell);
    }
    REQUIRE(rows.size() == 3);
    const auto cell = [&](std::size_t row, const std::string& name) {
        const auto at = std::find(rows[0].begin(), rows[0].end(), name);
        REQUIRE(at != rows[0].end());
        return rows[row][static_cast<std::size_t>(at - rows[0].begin())];
    };
    CHECK(std::count(rows[0].begin(), rows[0].end(), "net_shortwave_uncertainty_mean") == 0);
    CHECK(cell(1, "insolation_uncertainty").empty());
    // Whole pixels: columns 10 to 29 and rows 10 to 29; areas differ by less than 1e-6 of each other.
    for (const std::string name : {"albedo", "net_shortwave"}) {
        const auto own = pixels_of(desk.path("out/" + name + "_uncertainty.tif"));
        double sum = 0;
        for (int r = 10; r < 30; ++r)
            for (int c = 10; c < 30; ++c) sum += own[static_cast<std::size_t>(r * 80 + c)];
        CHECK(std::stod(cell(1, name + "_uncertainty")) == Approx(sum / 400).epsilon(1e-6));
    }
    const auto own_columns =
        desk.run({"check", "plan.yaml", "--set", layers, "--set",
                  "zones={file: parcels.geojson, layers: [albedo_uncertainty]}"});
    CHECK(own_columns.exit_code == 2);
    CHECK_THAT(own_columns.err, Contains("stands beside its layer's"));
    const auto explained =
        desk.run({"explain", "plan.yaml", "--set", layers, "--at", "500105,5499895"});
    CHECK(explained.exit_code == 0);
    CHECK_THAT(explained.out, Contains("its standard uncertainty") &&
                                  Contains("net_shortwave_uncertainty_w_m2") &&
                                  Contains("range 0.05 to 0.2"));
}
