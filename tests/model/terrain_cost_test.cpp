#include <catch2/catch.hpp>

#include <fmt/format.h>

#include <cmath>
#include <ctime>
#include <iostream>
#include <limits>

#include "support/vectors.hpp"
#include "terrain_run.hpp"

using namespace sunbudget;
using namespace sunbudget::test;

namespace {

double cpu_s() {
    timespec now{};
    clock_gettime(CLOCK_PROCESS_CPUTIME_ID, &now);
    return static_cast<double>(now.tv_sec) + 1e-9 * static_cast<double>(now.tv_nsec);
}

/// CPU time of a year's sums on a square of hills.
double year_s(int side, const char* step) {
    const TemporaryFolder folder;
    const auto frame = frame_about("EPSG:32633", 47, 13, 10, side, side);
    Plane<float> heights_m(side, side);
    for (int r = 0; r < side; ++r)
        for (int c = 0; c < side; ++c)
            heights_m.at(c, r) =
                static_cast<float>(1500 + 400 * std::sin(c / 61.0) * std::cos(r / 47.0) +
                                   60 * std::sin(c / 7.0 + r / 9.0));
    write_heights(folder.path() / "hills.tif", frame, heights_m);
    const double begin = cpu_s();
    const auto found =
        computed(folder.path(), fmt::format("terrain: {{elevation: hills.tif}}\ntime: {{from: "
                                            "2025-01-01, to: 2025-12-31, step: {}}}\n"
                                            "outputs: {{layers: [insolation, direct, diffuse]}}\n",
                                            step));
    return cpu_s() - begin;
}

}  // namespace

TEST_CASE("terrain: a pixel of a year costs the same at 10-minute and 2-minute steps",
          "[model][speed]") {
    // What is done once for the raster grows with the steps; two sizes tell it from what pixels cost.
    constexpr int small = 512, large = 1792;
    constexpr double pixels = double{large} * large - double{small} * small;
    const auto per_pixel_us = [&](const char* step) {
        return 1e6 * (year_s(large, step) - year_s(small, step)) / pixels;
    };
    // Another program on the same core disturbs a measurement: it may be made three times.
    constexpr double no_dearer = 1.25;
    double coarse = std::numeric_limits<double>::infinity(), fine = coarse;
    for (int round = 0; round < 3 && !(fine < no_dearer * coarse); ++round) {
        coarse = per_pixel_us("10 min");
        fine = per_pixel_us("2 min");
    }
    std::cout << fmt::format(
        "a year, core-microseconds a pixel: {:.2f} at 10 minutes, {:.2f} at 2 minutes\n", coarse,
        fine);
    CHECK(fine < no_dearer * coarse);
}
