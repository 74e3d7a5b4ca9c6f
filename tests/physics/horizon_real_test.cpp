#include <catch2/catch.hpp>

#include <algorithm>
#include <array>
#include <cmath>
#include <iomanip>
#include <iostream>
#include <numbers>
#include <random>
#include <utility>
#include <vector>

#include "reference/beam.hpp"
#include "reference/ray_cast.hpp"
#include "reference/sky_view.hpp"
#include "sunbudget/base/units.hpp"
#include "sunbudget/physics/beam_table.hpp"
#include "sunbudget/physics/gradient.hpp"
#include "sunbudget/physics/sky_view.hpp"
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
    std::vector<double> sizes;
    double sum = 0;
    void add(double error) {
        sizes.push_back(std::abs(error));
        sum += error;
    }
    [[nodiscard]] double percentile(double share) {
        const auto at = static_cast<std::ptrdiff_t>(share * static_cast<double>(sizes.size()));
        std::nth_element(sizes.begin(), sizes.begin() + at, sizes.end());
        return sizes[static_cast<std::size_t>(at)];
    }
};

bool whole_window(const Plane<float>& height_m, int column, int row) {
    for (int r = row - 1; r <= row + 1; ++r)
        for (int c = column - 1; c <= column + 1; ++c)
            if (height_m.at(c, r) != height_m.at(c, r)) return false;
    return true;
}

/// Tangent of what stands in the way, by the slow way.
double true_tangent(const Terrain& terrain, int column, int row, const Direction& direction,
                    const Sight& sight) {
    const auto& height_m = terrain.height_m;
    const double plane =
        reference::own_plane_rise_m(height_m, column, row, direction) / direction.step_m;
    return std::max({0.0, plane, reference::ray_tangent(height_m, column, row, direction, sight)});
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
            const double truth = true_tangent(terrain, c, r, direction, sight);
            errors.add(
                deg_from_rad(std::atan(static_cast<double>(horizon.at(c, r))) - std::atan(truth)));
        }
    }
    return errors;
}

/// Suns of a day in ten-minute steps at a latitude and declination, from the turning sky alone;
/// strength as through a clear sky: 1000 exp(-0.12 / sine) W m-2, any smooth law would do.
std::vector<SunStep> suns_of_a_day(double latitude_rad, double declination_rad) {
    const double up = std::sin(latitude_rad) * std::sin(declination_rad);
    const double across = std::cos(latitude_rad) * std::cos(declination_rad);
    const auto sine = [&](double step) {
        return up + across * std::cos(2 * std::numbers::pi * (step - 72) / 144);
    };
    std::vector<SunStep> suns;
    for (int step = 0; step < 144; ++step) {
        const double low = std::min(sine(step), sine(step + 1));
        const double high = std::max(sine(step), sine(step + 1));
        const double middle = sine(step + 0.5);
        if (middle <= 0) continue;
        const double angle = 2 * std::numbers::pi * (step + 0.5 - 72) / 144;
        const double east = -std::cos(declination_rad) * std::sin(angle);
        const double north = std::cos(latitude_rad) * std::sin(declination_rad) -
                             std::sin(latitude_rad) * std::cos(declination_rad) * std::cos(angle);
        const double beam = 1000 * std::exp(-0.12 / middle);
        const double azimuth = std::atan2(east, north);
        suns.push_back({azimuth < 0 ? azimuth + 2 * std::numbers::pi : azimuth,
                        low,
                        high,
                        {beam * east, beam * north, beam * middle},
                        1.0 / 6});
    }
    return suns;
}

constexpr int directions = 64;

/// Tables of the sectors between neighbouring directions, for one period.
std::vector<BeamTable> sector_tables(const std::vector<SunStep>& suns) {
    std::vector<BeamTable> tables(directions);
    for (const auto& sun : suns) {
        const double place = sun.azimuth_rad / (2 * std::numbers::pi) * directions;
        const auto sector = std::min(static_cast<int>(place), directions - 1);
        tables[static_cast<std::size_t>(sector)].add(sun, place - sector);
    }
    for (auto& table : tables) table.finish();
    return tables;
}

/// Sky view and the day's beam of a block, by the kernels.
struct BlockLight {
    Plane<float> east, north, up, sky_view, beam, hours;
};

BlockLight block_light(const Terrain& terrain, const BlockTerrain& block, const Slopes& slopes,
                       const std::vector<BeamTable>& tables, const Sight& sight) {
    const Window w = block.block;
    const auto plane = [&] { return Plane<float>(w.width, w.height); };
    BlockLight light{plane(), plane(), plane(), plane(), plane(), plane()};
    const auto back = inverse(terrain.matrix);
    for (int r = 0; r < w.height; ++r) {
        const auto part = [&](const Plane<float>& from) {
            return from.row(static_cast<int>(w.row) + r)
                .subspan(static_cast<std::size_t>(w.column), static_cast<std::size_t>(w.width));
        };
        surface_normals(part(slopes.per_column), part(slopes.per_row), back, back,
                        light.east.row(r), light.north.row(r), light.up.row(r));
    }
    auto before = plane();
    for (int d = 0; d <= directions; ++d) {
        const double azimuth = 2 * std::numbers::pi * (d % directions) / directions;
        const auto tangent =
            block_horizon(block, slopes, direction_towards(terrain.matrix, azimuth), sight);
        auto after = plane();
        for (int r = 0; r < w.height; ++r) {
            const NormalRow normal{light.east.row(r), light.north.row(r), light.up.row(r)};
            horizon_sines(tangent.row(r), after.row(r));
            if (d < directions)
                add_sky_view(tangent.row(r), normal, azimuth, light.sky_view.row(r));
            const BeamSums sums{light.beam.row(r), light.hours.row(r)};
            if (d > 0)
                add_beams({&tables[static_cast<std::size_t>(d - 1)], 1},
                          {before.row(r), after.row(r)}, normal, {&sums, 1});
        }
        before = std::move(after);
    }
    for (int r = 0; r < w.height; ++r) finish_sky_view(light.sky_view.row(r), directions);
    return light;
}

double true_beam(const Terrain& terrain, int column, int row, const std::vector<SunStep>& suns,
                 const std::array<double, 3>& normal, const Sight& sight) {
    double sum = 0;
    for (const auto& sun : suns) {
        const auto direction = direction_towards(terrain.matrix, sun.azimuth_rad);
        const double tangent = true_tangent(terrain, column, row, direction, sight);
        sum += reference::lit_by(sun, std::sin(std::atan(tangent)), normal[0], normal[1], normal[2])
                   .beam;
    }
    return sum;
}

struct LightErrors {
    Errors sky_view, day_share;
};

/// What an open sky gives a level pixel in the day: a fifth of the beam, as on a clear day.
double clear_sky_sum(const std::vector<SunStep>& suns) {
    double sum = 0;
    for (const auto& sun : suns) sum += 0.2 * sun.beam[2];
    return sum;
}

LightErrors light_errors(const Terrain& terrain, const std::vector<SunStep>& suns) {
    const Sight sight;
    constexpr int side = 40;
    const auto levels = levels_of(terrain, sight);
    const auto slopes = slopes_of(terrain.height_m);
    const auto tables = sector_tables(suns);
    const double sky = clear_sky_sum(suns);
    std::mt19937 random(99);
    const auto place = [&random](int size) {
        return std::uniform_int_distribution<int>(1, size - side - 2)(random);
    };
    LightErrors errors;
    for (int found = 0; found < 36;) {
        const Window window{place(terrain.height_m.width()), place(terrain.height_m.height()), side,
                            side};
        const auto light =
            block_light(terrain, block_terrain(terrain, levels, window), slopes, tables, sight);
        for (int c = 3; c < side; c += 9) {
            const int r = (7 * c) % side;
            const int column = static_cast<int>(window.column) + c;
            const int row = static_cast<int>(window.row) + r;
            if (!whole_window(terrain.height_m, column, row)) continue;
            ++found;
            const std::array<double, 3> normal{static_cast<double>(light.east.at(c, r)),
                                               static_cast<double>(light.north.at(c, r)),
                                               static_cast<double>(light.up.at(c, r))};
            const auto horizon = [&](double azimuth) {
                const auto direction = direction_towards(terrain.matrix, azimuth);
                return std::atan(true_tangent(terrain, column, row, direction, sight));
            };
            const double true_view = reference::sky_view(horizon, std::acos(normal[2]),
                                                         std::atan2(normal[0], normal[1]), 120);
            const auto view = static_cast<double>(light.sky_view.at(c, r));
            errors.sky_view.add(view - true_view);
            const double want = true_beam(terrain, column, row, suns, normal, sight);
            const double total =
                std::max(0.0, static_cast<double>(light.beam.at(c, r))) + sky * view;
            errors.day_share.add(100 * (total / (want + sky * true_view) - 1));
        }
    }
    return errors;
}

/// Share of random pixels whose shadow is right at one instant: by a horizon cast along the sun's own
/// azimuth, and by horizons of 64 directions.
struct ShadowScore {
    int pixels = 0, own = 0, between = 0;
};

ShadowScore shadow_score(const Terrain& terrain, const std::vector<Level>& levels,
                         const Slopes& slopes, double azimuth, double elevation) {
    const Sight sight;
    const auto cast = [&](double at) {
        return horizon_of(terrain, levels, slopes, direction_towards(terrain.matrix, at), sight);
    };
    const double place = azimuth / (2 * std::numbers::pi) * directions;
    const auto own = cast(azimuth);
    const auto before = cast(2 * std::numbers::pi * std::floor(place) / directions);
    const auto after = cast(2 * std::numbers::pi * (std::floor(place) + 1) / directions);
    const auto direction = direction_towards(terrain.matrix, azimuth);
    const double sun = std::tan(elevation);
    std::mt19937 random(5);
    std::uniform_int_distribution<int> column(1, terrain.height_m.width() - 2);
    std::uniform_int_distribution<int> row(1, terrain.height_m.height() - 2);
    ShadowScore score;
    while (score.pixels < 400) {
        const int c = column(random);
        const int r = row(random);
        if (!whole_window(terrain.height_m, c, r)) continue;
        ++score.pixels;
        const bool lit = sun > true_tangent(terrain, c, r, direction, sight);
        const double share = place - std::floor(place);
        const auto b = static_cast<double>(before.at(c, r));
        const double mixed = b + share * (static_cast<double>(after.at(c, r)) - b);
        score.own += (sun > static_cast<double>(own.at(c, r))) == lit ? 1 : 0;
        score.between += (sun > mixed) == lit ? 1 : 0;
    }
    return score;
}

}  // namespace

TEST_CASE("horizons on real ground agree with a dense ray over the bilinear surface",
          "[physics][differential]") {
    SUNBUDGET_NEEDS_DATA();
    std::cout << "horizon error against a dense ray [deg]: mean, 95th, 99th percentile, largest\n";
    for (const auto& raster : rasters) {
        auto errors = horizon_errors(read_terrain(raster.name, raster.band), 24, 60);
        const double mean = errors.sum / static_cast<double>(errors.sizes.size());
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

TEST_CASE("shadows on real ground fall where a dense ray says", "[physics][differential]") {
    SUNBUDGET_NEEDS_DATA();
    std::cout << "shadows right [% of pixels]: cast along the sun's azimuth, from 64 directions\n";
    for (const auto& raster : rasters) {
        const auto terrain = read_terrain(raster.name, raster.band);
        const auto levels = levels_of(terrain, {});
        const auto slopes = slopes_of(terrain.height_m);
        ShadowScore all;
        for (const auto& [azimuth_deg, elevation_deg] :
             {std::pair{98.0, 9.0}, std::pair{140.3, 22.0}, std::pair{251.0, 35.0}}) {
            const auto score = shadow_score(terrain, levels, slopes, rad_from_deg(azimuth_deg),
                                            rad_from_deg(elevation_deg));
            all.pixels += score.pixels;
            all.own += score.own;
            all.between += score.between;
        }
        std::cout << std::fixed << std::setprecision(2) << std::setw(7)
                  << 100.0 * all.own / all.pixels << std::setw(7)
                  << 100.0 * all.between / all.pixels << "  " << raster.name << '\n';
        CAPTURE(raster.name);
        CHECK(all.own >= 0.985 * all.pixels);
        CHECK(all.between >= 0.985 * all.pixels);
    }
}

TEST_CASE("sky view and a day's light on real ground agree with dense rays",
          "[physics][differential]") {
    SUNBUDGET_NEEDS_DATA();
    const auto suns = suns_of_a_day(rad_from_deg(45.0), rad_from_deg(-5.0));
    std::cout << "sky view error: 95th percentile; error of a day's beam and sky light [%]: "
                 "median, 99th\n";
    Errors days;
    for (const auto& raster : rasters) {
        auto errors = light_errors(read_terrain(raster.name, raster.band), suns);
        const double sky = errors.sky_view.percentile(0.95);
        const double median = errors.day_share.percentile(0.5);
        std::cout << std::fixed << std::setprecision(4) << std::setw(9) << sky
                  << std::setprecision(2) << std::setw(7) << median << std::setw(7)
                  << errors.day_share.percentile(0.99) << "  " << raster.name << '\n';
        CAPTURE(raster.name);
        CHECK(sky <= 0.01);
        CHECK(median <= 0.5);
        for (const double error : errors.day_share.sizes) days.add(error);
    }
    CHECK(days.percentile(0.99) <= 3);
}

}  // namespace sunbudget::test
