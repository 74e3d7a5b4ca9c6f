#include <catch2/catch.hpp>

#include <fmt/format.h>

#include <cmath>
#include <iostream>
#include <limits>

#include "sunbudget/tables/quality.hpp"
#include "support/vectors.hpp"
#include "terrain_run.hpp"

using namespace sunbudget;
using namespace sunbudget::test;

namespace {

constexpr float missing = std::numeric_limits<float>::quiet_NaN();

/// A plane with two waves on it, in metres by pixel.
float ground_m(double column, double row) {
    return static_cast<float>(400 + 1.5 * column + 0.5 * row +
                              8 * std::sin(column / 9) * std::cos(row / 7));
}

Plane<float> ground(const Frame& frame, double per_pixel = 1, double offset = 0) {
    Plane<float> heights_m(frame.width, frame.height);
    for (int r = 0; r < frame.height; ++r)
        for (int c = 0; c < frame.width; ++c)
            heights_m.at(c, r) = ground_m(per_pixel * c + offset, per_pixel * r + offset);
    return heights_m;
}

Frame frame(int width = 120, int height = 100) {
    return frame_about("EPSG:32633", 47, 13, 10, width, height);
}

const std::string day = "time: {from: 2025-03-01, to: 2025-03-01}\n";
const std::string outputs =
    "outputs: {layers: [insolation, direct, sky_view, slope, aspect, quality]}\n";

/// The greatest difference of two planes, without `margin` pixels at the edge; NaN on one side alone counts as infinite.
double difference(const Plane<float>& a, const Plane<float>& b, int margin = 0) {
    double worst = 0;
    for (int r = margin; r < a.height() - margin; ++r)
        for (int c = margin; c < a.width() - margin; ++c) {
            if (std::isnan(a.at(c, r)) && std::isnan(b.at(c, r))) continue;
            const double d =
                std::abs(static_cast<double>(a.at(c, r)) - static_cast<double>(b.at(c, r)));
            worst = std::max(worst, std::isnan(d) ? std::numeric_limits<double>::infinity() : d);
        }
    return worst;
}

}  // namespace

TEST_CASE("terrain: small holes are bridged, large ones stay and are counted", "[model][edge]") {
    const TemporaryFolder folder;
    auto heights_m = ground(frame());
    write_heights(folder.path() / "whole.tif", frame(), heights_m);
    for (int r = 20; r < 23; ++r)
        for (int c = 30; c < 33; ++c) heights_m.at(c, r) = missing;  // 3 x 3: bridged
    for (int r = 60; r < 70; ++r)
        for (int c = 50; c < 70; ++c) heights_m.at(c, r) = missing;  // 20 x 10: too large
    write_heights(folder.path() / "holes.tif", frame(), heights_m);
    const auto whole = computed(folder.path(), "terrain: {elevation: whole.tif}\n" + day + outputs);
    const auto holes = computed(folder.path(), "terrain: {elevation: holes.tif}\n" + day + outputs);
    CHECK(whole.flags.size() == 1);
    int dark = 0;
    for (int r = 0; r < 100; ++r)
        for (int c = 0; c < 120; ++c) {
            CAPTURE(c, r);
            const bool in_hole = r >= 60 && r < 70 && c >= 50 && c < 70;
            const bool near = r >= 17 && r < 26 && c >= 27 && c < 36;
            const bool edge = r >= 55 && r < 75 && c >= 45 && c < 75;
            dark += std::isnan(holes["insolation"].at(c, r));
            if (in_hole && r >= 62 && r < 68 && c >= 52 && c < 68) {
                for (const auto* layer : {"insolation", "direct", "sky_view", "slope"})
                    REQUIRE(std::isnan(holes[layer].at(c, r)));
                REQUIRE((static_cast<int>(holes["quality"].at(c, r)) & quality::no_elevation) != 0);
            }
            if (in_hole) continue;
            REQUIRE(!std::isnan(holes["insolation"].at(c, r)));
            // A bridge of straight lines over the waves misses them by up to half a metre, a slope by 3 degrees.
            if (near)
                REQUIRE(std::abs(holes["slope"].at(c, r) - whole["slope"].at(c, r)) < 3);
            else if (!edge)
                REQUIRE(holes["slope"].at(c, r) == whole["slope"].at(c, r));
        }
    std::uint64_t counted = 0;
    for (const auto& [flag, count] : holes.flags)
        if ((flag & quality::no_elevation) != 0) counted += count;
    CHECK(counted == static_cast<std::uint64_t>(dark));
    CHECK(dark >= 16 * 6);
    CHECK(dark <= 20 * 10);
}

TEST_CASE("terrain: feet, whole numbers and several files give the same ground", "[model][edge]") {
    const TemporaryFolder folder;
    const auto metres = ground(frame());
    write_heights(folder.path() / "m.tif", frame(), metres);
    const auto want = computed(folder.path(), "terrain: {elevation: m.tif}\n" + day + outputs);

    auto feet = ground(frame());
    for (int r = 0; r < 100; ++r)
        for (auto& h : feet.row(r)) h = static_cast<float>(static_cast<double>(h) / 0.3048);
    write_heights(folder.path() / "ft.tif", frame(), feet, {"Float32", "ft", -9999});
    write_heights(folder.path() / "silent.tif", frame(), feet);
    const auto said = computed(folder.path(), "terrain: {elevation: ft.tif}\n" + day + outputs);
    const auto told =
        computed(folder.path(), "terrain: {elevation: silent.tif, unit: ft}\n" + day + outputs);
    for (const auto* layer : {"insolation", "slope"}) {
        // Heights in single precision differ by 2^-14 m: 0.0002 degrees of slope, 1e-5 of the light.
        CHECK(difference(said[layer], want[layer]) < 0.01);
        CHECK(difference(told[layer], said[layer]) == 0);
    }

    auto whole = ground(frame());
    for (int r = 0; r < 100; ++r)
        for (auto& h : whole.row(r)) h = std::round(h);
    write_heights(folder.path() / "float.tif", frame(), whole);
    write_heights(folder.path() / "int.tif", frame(), whole, {"Int16", "", -32768});
    const auto as_float =
        computed(folder.path(), "terrain: {elevation: float.tif}\n" + day + outputs);
    const auto as_int = computed(folder.path(), "terrain: {elevation: int.tif}\n" + day + outputs);
    for (const auto* layer : {"insolation", "sky_view", "slope", "aspect"})
        CHECK(difference(as_float[layer], as_int[layer]) == 0);

    // Two pieces that overlap by a column, cut from the same ground.
    auto west = frame(), east = frame();
    west.width = 61;
    east.affine[0] += 600;
    east.width = 60;
    Plane<float> left(61, 100), right(60, 100);
    for (int r = 0; r < 100; ++r) {
        std::copy_n(metres.row(r).begin(), 61, left.row(r).begin());
        std::copy_n(metres.row(r).begin() + 60, 60, right.row(r).begin());
    }
    write_heights(folder.path() / "west.tif", west, left);
    write_heights(folder.path() / "east.tif", east, right);
    const auto pieces = computed(
        folder.path(),
        "grid: {like: m.tif}\nterrain: {elevation: [west.tif, east.tif]}\n" + day + outputs);
    for (const auto* layer : {"insolation", "sky_view", "slope", "aspect"})
        CHECK(difference(pieces[layer], want[layer]) == 0);
}

TEST_CASE("terrain: elevation coarser and finer than the grid", "[model][edge]") {
    const TemporaryFolder folder;
    write_heights(folder.path() / "same.tif", frame(), ground(frame()));
    auto coarse = frame(), fine = frame();
    coarse.affine[1] = 30, coarse.affine[5] = -30, coarse.width = 40, coarse.height = 33;
    fine.affine[1] = 5, fine.affine[5] = -5, fine.width = 240, fine.height = 200;
    write_heights(folder.path() / "coarse.tif", coarse,
                  ground(coarse, 3, 1));  // a cell's middle is 1 pixel on
    write_heights(folder.path() / "fine.tif", fine, ground(fine, 0.5, -0.25));
    const auto want = computed(
        folder.path(), "grid: {like: same.tif}\nterrain: {elevation: same.tif}\n" + day + outputs);
    for (const auto& [name, most_deg] : {std::pair{"coarse.tif", 1.0}, {"fine.tif", 0.05}}) {
        const auto found =
            computed(folder.path(),
                     fmt::format("grid: {{like: same.tif}}\nterrain: {{elevation: {}}}\n", name) +
                         day + outputs);
        CAPTURE(name);
        const double slope = difference(found["slope"], want["slope"], 8);
        std::cout << fmt::format("slope from {}: largest difference {:.3f} deg\n", name, slope);
        // Waves of 9 and 7 pixels a radian: Horn's window on bilinear heights from cells of three pixels flattens
        // them by about 1 / 10, of 6 degrees; means of 2 x 2 cells by 1 / 500.
        CHECK(slope < most_deg);
    }
}

TEST_CASE(
    "terrain: planes of the surface come from the elevation, from nowhere, or from other ground",
    "[model][property]") {
    const TemporaryFolder folder;
    auto surface = ground(frame());
    for (int r = 40; r < 50; ++r)
        for (int c = 50; c < 60; ++c) surface.at(c, r) += 40;  // a tall house
    write_heights(folder.path() / "surface.tif", frame(), surface);
    write_heights(folder.path() / "ground.tif", frame(), ground(frame()));
    const auto run = [&](const std::string& from) {
        return computed(folder.path(),
                        "terrain: {elevation: surface.tif" + from + "}\n" + day + outputs);
    };
    const auto elevation = run(""), same = run(", slope_from: elevation"),
               flat = run(", slope_from: flat"), bare = run(", slope_from: ground.tif");
    const auto bare_ground =
        computed(folder.path(), "terrain: {elevation: ground.tif}\n" + day + outputs);
    CHECK(difference(elevation["insolation"], same["insolation"]) == 0);
    CHECK(elevation["slope"].at(50, 45) > 30);  // the wall, smeared
    for (int r = 0; r < 100; ++r)
        for (int c = 0; c < 120; ++c) REQUIRE(flat["slope"].at(c, r) == 0);
    CHECK(std::isnan(flat["aspect"].at(10, 10)));
    CHECK(difference(bare["slope"], bare_ground["slope"]) == 0);
    // The house shades the ground north of it whatever the planes are.
    for (const auto* found : {&elevation, &flat, &bare}) {
        CHECK((*found)["direct"].at(55, 37) < 0.8F * (*found)["direct"].at(75, 37));
        CHECK((*found)["sky_view"].at(55, 38) < 0.9F);
    }
}

TEST_CASE("terrain: two overlapping real pieces of elevation serve an image's grid",
          "[model][edge]") {
    SUNBUDGET_NEEDS_DATA();
    const TemporaryFolder folder;
    const auto file = [](const char* name) {
        return real_data(std::string("costarica_landsat5_sr/") + name)->string();
    };
    const auto found = computed(
        folder.path(), fmt::format("grid: {{like: {}}}\nterrain: {{elevation: [{}, {}]}}\n",
                                   file("L5TSR_2001.tif"), file("ASTER_V002_EAST.tif"),
                                   file("ASTER_V002_WEST.tif")) +
                           day + outputs);
    const auto west =
        computed(folder.path(), fmt::format("grid: {{like: {}}}\nterrain: {{elevation: {}}}\n",
                                            file("L5TSR_2001.tif"), file("ASTER_V002_WEST.tif")) +
                                    day + outputs);
    const auto valid = [](const Computed& run) {
        int count = 0;
        for (int r = 0; r < run["slope"].height(); ++r)
            for (int c = 0; c < run["slope"].width(); ++c)
                count += !std::isnan(run["slope"].at(c, r));
        return count;
    };
    const int both = valid(found), all = found["slope"].width() * found["slope"].height();
    std::cout << fmt::format("two pieces of elevation cover {:.1f} % of the image, one {:.1f} %\n",
                             100.0 * both / all, 100.0 * valid(west) / all);
    CHECK(both > valid(west));
    // The pieces meet: no gap between them.
    int gaps = 0;
    for (int r = 0; r < found["slope"].height(); ++r) {
        int first = -1, last = -1, count = 0;
        for (int c = 0; c < found["slope"].width(); ++c)
            if (!std::isnan(found["slope"].at(c, r)))
                first = first < 0 ? c : first, last = c, ++count;
        gaps += count > 0 ? last - first + 1 - count : 0;
    }
    CHECK(gaps == 0);
}
