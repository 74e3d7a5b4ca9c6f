#include <catch2/catch.hpp>

#include <algorithm>
#include <cmath>
#include <iomanip>
#include <iostream>
#include <numbers>
#include <random>

#include "reference/ray_cast.hpp"
#include "sunbudget/base/units.hpp"
#include "support/vectors.hpp"
#include "terrain_fixture.hpp"

namespace sunbudget::test {

namespace {

struct Raster {
    const char* name;
    int band;
    double p95_deg, p99_deg;  ///< allowed
};

/// What the horizons must keep to: 0.5 and 1.3 degrees on natural ground; 0.9 and 2.3 on the model
/// of a city, where half a pixel decides whether a roof is in the way.
constexpr Raster rasters[] = {
    {"dem/davosdorf_switzerland_10m.tif", 1, 0.5, 1.3},
    {"dem/vestfold_antarctica_32m.tif", 1, 0.5, 1.3},
    {"dem/ecuador_slope_elev_10m.tif", 2, 0.5, 1.3},
    {"zion_utah/srtm.tif", 1, 0.5, 1.3},
    {"olinda_brazil/olinda_dem_utm25s.tif", 1, 0.5, 1.3},
    {"costarica_landsat5_sr/ASTER_V002_EAST.tif", 1, 0.5, 1.3},
    {"costarica_landsat5_sr/ASTER_V002_WEST.tif", 1, 0.5, 1.3},
    {"alexandria_urban/dtm.tif", 1, 0.5, 1.3},
    {"alexandria_urban/dsm.tif", 1, 0.9, 2.3},
};

struct Errors {
    std::vector<double> size_deg;
    double sum_deg = 0;
    void add(double error_deg) {
        size_deg.push_back(std::abs(error_deg));
        sum_deg += error_deg;
    }
    [[nodiscard]] double percentile(double share) {
        const auto at = static_cast<std::ptrdiff_t>(share * static_cast<double>(size_deg.size()));
        std::nth_element(size_deg.begin(), size_deg.begin() + at, size_deg.end());
        return size_deg[static_cast<std::size_t>(at)];
    }
};

bool whole_window(const Plane<float>& height_m, int column, int row) {
    for (int r = row - 1; r <= row + 1; ++r)
        for (int c = column - 1; c <= column + 1; ++c)
            if (height_m.at(c, r) != height_m.at(c, r)) return false;
    return true;
}

Errors horizon_errors(const Terrain& terrain, int directions, int pixels) {
    const Sight sight;
    const auto levels = levels_of(terrain, sight);
    const auto slopes = slopes_of(terrain.height_m);
    std::mt19937 random(20240621);
    std::uniform_real_distribution<double> azimuth(0, 2 * std::numbers::pi);
    std::uniform_int_distribution<int> column(1, terrain.height_m.width() - 2);
    std::uniform_int_distribution<int> row(1, terrain.height_m.height() - 2);
    Errors errors;
    for (int d = 0; d < directions; ++d) {
        const auto direction = direction_towards(terrain.matrix, azimuth(random));
        const auto horizon = horizon_of(terrain, levels, slopes, direction, sight);
        for (int found = 0; found < pixels;) {
            const int c = column(random);
            const int r = row(random);
            if (!whole_window(terrain.height_m, c, r)) continue;
            ++found;
            const double plane =
                reference::own_plane_rise_m(terrain.height_m, c, r, direction) / direction.step_m;
            const double truth = std::max(
                {0.0, plane, reference::ray_tangent(terrain.height_m, c, r, direction, sight)});
            errors.add(
                deg_from_rad(std::atan(static_cast<double>(horizon.at(c, r))) - std::atan(truth)));
        }
    }
    return errors;
}

}  // namespace

TEST_CASE("horizons on real ground agree with a dense ray over the bilinear surface",
          "[physics][differential]") {
    SUNBUDGET_NEEDS_DATA();
    std::cout << "horizon error against a dense ray [deg]: mean, 95th, 99th percentile, largest\n";
    for (const auto& raster : rasters) {
        auto errors = horizon_errors(read_terrain(raster.name, raster.band), 24, 60);
        const double mean = errors.sum_deg / static_cast<double>(errors.size_deg.size());
        const double p95 = errors.percentile(0.95);
        const double p99 = errors.percentile(0.99);
        std::cout << std::fixed << std::setprecision(2) << std::setw(6) << mean << std::setw(6)
                  << p95 << std::setw(6) << p99 << std::setw(7) << errors.percentile(0.9999) << "  "
                  << raster.name << '\n';
        CAPTURE(raster.name);
        CHECK(p95 <= raster.p95_deg);
        CHECK(p99 <= raster.p99_deg);
    }
}

}  // namespace sunbudget::test
