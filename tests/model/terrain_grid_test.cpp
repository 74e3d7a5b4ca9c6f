#include <catch2/catch.hpp>

#include <fmt/format.h>
#include <gdal_utils.h>

#include <cmath>
#include <functional>
#include <iostream>
#include <numbers>
#include <optional>

#include "sunbudget/base/units.hpp"
#include "support/vectors.hpp"
#include "terrain_run.hpp"

using namespace sunbudget;
using namespace sunbudget::test;

namespace {

struct Map {
    const char* crs;
    double cell;
};
// About 30 m on the ground at 46.8 N 9.8 E, each.
constexpr Map maps[] = {{"EPSG:32632", 30}, {"EPSG:32634", 30}, {"EPSG:4326", 0.00030},
                        {"EPSG:3857", 43},  {"EPSG:3035", 30},  {"EPSG:3413", 30}};

/// The value at a place, bilinear between four pixels; NaN near the edge.
double value_at(const Plane<float>& plane, const PixelPlace& place) {
    const double c = place.column - 0.5, r = place.row - 0.5;
    const int left = static_cast<int>(std::floor(c)), top = static_cast<int>(std::floor(r));
    if (left < 0 || top < 0 || left + 1 >= plane.width() || top + 1 >= plane.height())
        return std::nan("");
    const double u = c - left, v = r - top;
    const auto at = [&](int x, int y) { return static_cast<double>(plane.at(left + x, top + y)); };
    return (1 - v) * ((1 - u) * at(0, 0) + u * at(1, 0)) + v * ((1 - u) * at(0, 1) + u * at(1, 1));
}

std::string day_plan(const char* raster) {
    return fmt::format(
        "terrain: {{elevation: {}}}\ntime: {{from: 2025-03-01, to: 2025-03-01}}\noutputs: "
        "{{layers: [insolation, slope]}}\n",
        raster);
}

}  // namespace

TEST_CASE("terrain: the same hills in six maps get the same light at the same places",
          "[model][property]") {
    // Hills that are a function of latitude and longitude, taken at each map's own pixels: no resampling.
    const TemporaryFolder folder;
    const auto hills = [](double latitude_deg, double longitude_deg) {
        const auto at = local_metres(latitude_deg, longitude_deg, 46.8, 9.8);
        const double x = at.east_m / 1000, y = at.north_m / 1000;
        // Level ground beyond 2.6 km, so that what a map leaves out hides nothing.
        const double part = std::max(0.0, 1 - (x * x + y * y) / (2.6 * 2.6));
        return 1500 + part * part *
                          (350 * std::sin(2.1 * x + 0.4) * std::cos(1.7 * y) +
                           150 * std::sin(2.6 * (x + y)));
    };
    std::cout << "hills in other maps than EPSG:32632: difference of a day's insolation [% of the "
                 "mean]: bias, median, 95 %, 99 %; slope [deg] 95 %\n";
    std::optional<Computed> first;
    std::optional<Frame> first_frame;
    for (const auto& map : maps) {
        const auto frame = frame_about(map.crs, 46.8, 9.8, map.cell, 260, 260);
        const Places places(frame);
        Plane<float> heights_m(frame.width, frame.height);
        for (int r = 0; r < frame.height; ++r)
            for (int c = 0; c < frame.width; ++c) {
                const auto [lat, lon] = places.at(c + 0.5, r + 0.5);
                heights_m.at(c, r) = static_cast<float>(hills(lat, lon));
            }
        write_heights(folder.path() / "hills.tif", frame, heights_m);
        auto found = computed(folder.path(), day_plan("hills.tif"));
        if (!first) {
            first = std::move(found);
            first_frame = frame;
            continue;
        }
        const Places first_places(*first_frame);
        Errors light, slope, all;
        for (int r = 50; r < 210; r += 3)
            for (int c = 50; c < 210; c += 3) {
                const auto [lat, lon] = first_places.at(c + 0.5, r + 0.5);
                const auto place = places.find(lat, lon);
                const double there = value_at(found["insolation"], place);
                REQUIRE(!std::isnan(there));
                light.add(there - static_cast<double>((*first)["insolation"].at(c, r)));
                slope.add(value_at(found["slope"], place) -
                          static_cast<double>((*first)["slope"].at(c, r)));
                all.add(static_cast<double>((*first)["insolation"].at(c, r)));
            }
        const auto percent = [&](double value) { return 100 * value / all.mean(); };
        std::cout << fmt::format("{:8.3f}{:8.3f}{:8.3f}{:8.3f}{:8.3f}  {}\n", percent(light.mean()),
                                 percent(light.percentile(0.5)), percent(light.percentile(0.95)),
                                 percent(light.percentile(0.99)), slope.percentile(0.95), map.crs);
        CAPTURE(map.crs);
        CHECK(std::abs(percent(light.mean())) < 0.1);
        CHECK(percent(light.percentile(0.5)) < 0.3);
        CHECK(percent(light.percentile(0.95)) < 1.5);
    }
}

TEST_CASE("terrain: a real raster warped to other maps gets the same light to the resampling error",
          "[model][property]") {
    SUNBUDGET_NEEDS_DATA();
    const TemporaryFolder folder;
    const auto file = *real_data("dem/davosdorf_switzerland_10m.tif");
    const auto ground = read_raster(file);
    const Places home_places(ground.frame);
    const auto home = computed(folder.path(), day_plan(file.c_str()));
    std::cout << "Davos warped (cubic): a day's insolation [% of the mean]: bias, median, 95 %; "
                 "slope [deg]: median, 95 %\n";
    for (const auto& map : maps) {
        const auto name = folder.path() / "warped.tif";
        std::string crs = map.crs, cell = std::to_string(map.cell / 3);
        if (crs == "EPSG:4326") cell = "0.0001";
        char t_srs[] = "-t_srs", tr[] = "-tr", r[] = "-r", cubic[] = "cubic",
             nodata[] = "-dstnodata", missing[] = "-9999";
        char* words[] = {t_srs, crs.data(), tr,     cell.data(), cell.data(),
                         r,     cubic,      nodata, missing,     nullptr};
        auto* options = GDALWarpAppOptionsNew(words, nullptr);
        auto* source = GDALOpen(file.c_str(), GA_ReadOnly);
        GDALClose(GDALWarp(name.c_str(), nullptr, 1, &source, options, nullptr));
        GDALClose(source);
        GDALWarpAppOptionsFree(options);
        const auto warped = read_raster(name);
        const Places places(warped.frame);
        const auto found = computed(folder.path(), day_plan("warped.tif"));
        Errors light, slope, all;
        for (int row = 40; row < ground.frame.height - 40; row += 9)
            for (int c = 40; c < ground.frame.width - 40; c += 9) {
                const auto [lat, lon] = home_places.at(c + 0.5, row + 0.5);
                const auto place = places.find(lat, lon);
                const double there = value_at(found["insolation"], place);
                if (std::isnan(there)) continue;
                light.add(there - static_cast<double>(home["insolation"].at(c, row)));
                slope.add(value_at(found["slope"], place) -
                          static_cast<double>(home["slope"].at(c, row)));
                all.add(static_cast<double>(home["insolation"].at(c, row)));
            }
        REQUIRE(light.values.size() > 1000);
        const auto percent = [&](double value) { return 100 * value / all.mean(); };
        std::cout << fmt::format("{:8.3f}{:8.3f}{:8.3f}{:9.3f}{:8.3f}  {}\n", percent(light.mean()),
                                 percent(light.percentile(0.5)), percent(light.percentile(0.95)),
                                 slope.percentile(0.5), slope.percentile(0.95), map.crs);
        CAPTURE(map.crs);
        CHECK(std::abs(percent(light.mean())) < 0.5);
        CHECK(percent(light.percentile(0.5)) < 2);
    }
}
