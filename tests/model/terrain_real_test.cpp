#include <catch2/catch.hpp>

#include <fmt/format.h>
#include <gdal_utils.h>

#include <array>
#include <cmath>
#include <iostream>
#include <numbers>
#include <random>

#include "reference/beam.hpp"
#include "reference/ray_cast.hpp"
#include "reference/sky_view.hpp"
#include "sunbudget/base/units.hpp"
#include "sunbudget/model/light.hpp"
#include "support/vectors.hpp"
#include "terrain_run.hpp"

using namespace sunbudget;
using namespace sunbudget::test;

namespace {

struct Ground {
    const char* name;
    const char* date;                     ///< of the day that is summed
    std::array<const char*, 4> instants;  ///< sun low and high, all round
    int band = 1;
};
constexpr Ground grounds[] = {
    {"dem/davosdorf_switzerland_10m.tif",
     "2025-03-01",
     {"2025-03-01T08:00Z", "2025-12-21T10:00Z", "2025-06-21T06:00Z", "2025-10-15T14:30Z"}},
    {"dem/vestfold_antarctica_32m.tif",
     "2025-12-21",
     {"2025-12-21T19:00Z", "2025-12-21T23:30Z", "2025-12-21T03:00Z", "2025-10-10T09:00Z"}},
    {"alexandria_urban/dsm.tif",
     "2025-03-21",
     {"2025-03-21T13:00Z", "2025-12-21T16:00Z", "2025-06-21T21:00Z", "2025-09-21T19:00Z"}},
    {"zion_utah/srtm.tif",
     "2025-03-01",
     {"2025-03-01T15:30Z", "2025-12-21T18:00Z", "2025-06-21T15:00Z", "2025-10-15T23:00Z"}},
    {"dem/ecuador_slope_elev_10m.tif",
     "2025-06-21",
     {"2025-03-21T12:30Z", "2025-06-21T21:30Z", "2025-12-21T14:00Z", "2025-09-21T19:00Z"},
     2},
    {"olinda_brazil/olinda_dem_utm25s.tif",
     "2025-06-21",
     {"2025-06-21T09:30Z", "2025-12-21T19:00Z", "2025-03-21T12:00Z", "2025-09-21T16:00Z"}},
    {"costarica_landsat5_sr/ASTER_V002_EAST.tif",
     "2025-12-21",
     {"2025-12-21T13:30Z", "2025-06-21T22:30Z", "2025-03-21T15:00Z", "2025-10-15T20:00Z"}},
};

bool whole_window(const Plane<float>& height_m, int column, int row) {
    for (int r = row - 1; r <= row + 1; ++r)
        for (int c = column - 1; c <= column + 1; ++c)
            if (std::isnan(height_m.at(c, r))) return false;
    return true;
}

/// One pixel seen by rays.
struct Pixel {
    int column, row;
    PixelMatrix matrix;
    std::array<double, 3> normal{};
    double latitude_rad, longitude_rad, height_m;

    Pixel(const RealRaster& ground, const Places& places, int c, int r)
        : column(c), row(r), matrix(places.matrix(c + 0.5, r + 0.5)) {
        const auto back = inverse(matrix);
        const auto plane = [&](double column_step, double row_step) {
            return reference::own_plane_rise_m(ground.values, c, r, {column_step, row_step, 1});
        };
        const double east = plane(back.column_per_east, back.row_per_east),
                     north = plane(back.column_per_north, back.row_per_north);
        const double length = std::sqrt(1 + east * east + north * north);
        normal = {-east / length, -north / length, 1 / length};
        const auto [lat, lon] = places.at(c + 0.5, r + 0.5);
        latitude_rad = rad_from_deg(lat);
        longitude_rad = rad_from_deg(lon);
        height_m = static_cast<double>(ground.values.at(c, r));
    }
    [[nodiscard]] double horizon_rad(const RealRaster& ground, double azimuth_rad) const {
        const auto direction = direction_towards(matrix, azimuth_rad);
        const double plane =
            reference::own_plane_rise_m(ground.values, column, row, direction) / direction.step_m;
        return std::atan(std::max(
            {0.0, plane, reference::ray_tangent(ground.values, column, row, direction, {})}));
    }
    [[nodiscard]] double beam(const RealRaster& ground, const std::vector<SunStep>& suns) const {
        double sum = 0;
        for (const auto& sun : suns)
            sum += reference::lit_by(sun, std::sin(horizon_rad(ground, sun.azimuth_rad)), normal[0],
                                     normal[1], normal[2])
                       .beam;
        return sum;
    }
};

std::vector<Pixel> random_pixels(const RealRaster& ground, const Places& places, int count) {
    std::mt19937 random(2025);
    std::uniform_int_distribution<int> column(1, ground.frame.width - 2),
        row(1, ground.frame.height - 2);
    std::vector<Pixel> pixels;
    while (static_cast<int>(pixels.size()) < count) {
        const int c = column(random), r = row(random);
        if (whole_window(ground.values, c, r)) pixels.emplace_back(ground, places, c, r);
    }
    return pixels;
}

Computed run_on(const TemporaryFolder& folder, const std::filesystem::path& raster, int band,
                const std::string& rest) {
    return computed(folder.path(), fmt::format("terrain: {{elevation: '{}:{}'}}\n{}",
                                               raster.string(), band, rest));
}

}  // namespace

TEST_CASE(
    "terrain: shadows, sky view and a day's light on real ground agree with rays cast one by one",
    "[model][differential]") {
    SUNBUDGET_NEEDS_DATA();
    std::cout << "shadows right [%]; sky view: 95 % within; day's direct and insolation: median, "
                 "99 % within [% of the mean]\n";
    for (const auto& place : grounds) {
        CAPTURE(place.name);
        const TemporaryFolder folder;
        const auto file = *real_data(place.name);
        const auto ground = read_raster(file, place.band);
        const Places places(ground.frame);
        int right = 0, all = 0;
        const auto pixels = random_pixels(ground, places, 1000);
        for (const auto* instant : place.instants) {
            const auto found =
                run_on(folder, file, place.band,
                       fmt::format("time: {{at: {}}}\noutputs: {{layers: [direct]}}\n", instant));
            const PointLight point(*found.run.times, found.run.sky);
            REQUIRE(!suns_over(point, 0, pixels[0].latitude_rad, pixels[0].longitude_rad, 0)
                         .beam.empty());
            for (const auto& pixel : pixels) {
                const auto suns =
                    suns_over(point, 0, pixel.latitude_rad, pixel.longitude_rad, pixel.height_m)
                        .beam;
                right += (pixel.beam(ground, suns) > 0) ==
                         (found["direct"].at(pixel.column, pixel.row) > 0);
                ++all;
            }
        }
        const auto day = run_on(folder, file, place.band,
                                fmt::format("time: {{from: {0}, to: {0}}}\noutputs: {{layers: "
                                            "[direct, insolation, sky_view]}}\n",
                                            place.date));
        const PointLight point(*day.run.times, day.run.sky);
        Errors views, directs, insolations, direct, insolation;
        for (std::size_t i = 0; i < 250; ++i) {
            const auto& p = pixels[i];
            const double view = reference::sky_view(
                [&](double azimuth) { return p.horizon_rad(ground, azimuth); },
                std::acos(p.normal[2]), std::atan2(p.normal[0], p.normal[1]), 120);
            const auto path = suns_over(point, 0, p.latitude_rad, p.longitude_rad, p.height_m);
            const auto open = point.at(0, p.latitude_rad, p.longitude_rad, p.height_m);
            const double beam = p.beam(ground, path.beam);
            const double rest = p.beam(ground, path.around) +
                                view * (open.diffuse_w_m2 - open.circumsolar_w_m2[2]) +
                                (1 - view) * 0.2 * (open.beam_w_m2[2] + open.diffuse_w_m2);
            views.add(view - static_cast<double>(day["sky_view"].at(p.column, p.row)));
            direct.add(beam);
            insolation.add(beam + rest);
            directs.add(beam - static_cast<double>(day["direct"].at(p.column, p.row)));
            insolations.add(beam + rest -
                            static_cast<double>(day["insolation"].at(p.column, p.row)));
        }
        const double share = static_cast<double>(right) / all;
        const auto percent = [](const Errors& of, const Errors& whole, double part) {
            return 100 * of.percentile(part) / whole.mean();
        };
        std::cout << fmt::format("{:7.2f}{:9.4f}{:8.2f}{:7.2f}{:8.2f}{:7.2f}  {}\n", 100 * share,
                                 views.percentile(0.95), percent(directs, direct, 0.5),
                                 percent(directs, direct, 0.99),
                                 percent(insolations, insolation, 0.5),
                                 percent(insolations, insolation, 0.99), place.name);
        CHECK(share >= 0.985);
        CHECK(views.percentile(0.95) <= 0.01);
        CHECK(percent(insolations, insolation, 0.5) <= 0.5);
        CHECK(percent(insolations, insolation, 0.99) <= 3);
    }
}

TEST_CASE("terrain: slope and aspect meet those of gdaldem on a real raster",
          "[model][differential]") {
    SUNBUDGET_NEEDS_DATA();
    std::cout << "slope and aspect against gdaldem, largest difference [deg]; grid north against "
                 "true north [deg]\n";
    for (const auto& [name, band] : {std::pair{"dem/davosdorf_switzerland_10m.tif", 1},
                                     {"dem/ecuador_slope_elev_10m.tif", 2}}) {
        const TemporaryFolder folder;
        const auto file = *real_data(name);
        const auto ground = read_raster(file, band);
        const Places places(ground.frame);
        const auto found = run_on(folder, file, band, "outputs: {layers: [slope, aspect]}\n");
        const auto by_gdal = [&](const char* kind) {
            char b[] = "-b";
            std::string number = std::to_string(band);
            char* words[] = {b, number.data(), nullptr};
            auto* options = GDALDEMProcessingOptionsNew(words, nullptr);
            auto* source = GDALOpen(file.c_str(), GA_ReadOnly);
            const auto out = folder.path() / kind;
            GDALClose(GDALDEMProcessing(out.c_str(), source, kind, nullptr, options, nullptr));
            GDALClose(source);
            GDALDEMProcessingOptionsFree(options);
            return read_raster(out).values;
        };
        const auto slope = by_gdal("slope"), aspect = by_gdal("aspect");
        double worst_slope = 0, worst_aspect = 0, turn_deg = 0;
        for (int r = 1; r < ground.frame.height - 1; r += 3)
            for (int c = 1; c < ground.frame.width - 1; c += 7) {
                if (!whole_window(ground.values, c, r)) continue;
                const auto matrix = places.matrix(c + 0.5, r + 0.5);
                // Both rasters' maps keep angles: one scale factor, one convergence.
                const double scale = ground.frame.affine[1] / length_of_m(matrix, 1, 0);
                turn_deg = std::remainder(deg_from_rad(azimuth_of_rad(matrix, 0, -1)), 360.0);
                const double want = deg_from_rad(
                    std::atan(scale * std::tan(rad_from_deg(static_cast<double>(slope.at(c, r))))));
                worst_slope = std::max(
                    worst_slope, std::abs(want - static_cast<double>(found["slope"].at(c, r))));
                if (want < 1) continue;  // aspect is doubtful on nearly level ground
                const double off = static_cast<double>(aspect.at(c, r)) + turn_deg -
                                   static_cast<double>(found["aspect"].at(c, r));
                worst_aspect = std::max(worst_aspect, std::abs(std::remainder(off, 360.0)));
            }
        std::cout << fmt::format("{:9.5f}{:9.5f}{:9.3f}  {}\n", worst_slope, worst_aspect, turn_deg,
                                 name);
        CAPTURE(name);
        // gdaldem adds four heights in single precision, which rounds to 2^-10 m near 3000 m, twice for each
        // difference over 80 m: 0.0014 degrees, and in the aspect of 1 degree of slope 57 times as much.
        CHECK(worst_slope < 0.002);
        CHECK(worst_aspect < 0.1);
    }
}
