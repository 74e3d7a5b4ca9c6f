#include <gdal_priv.h>

#include <catch2/catch.hpp>
#include <cmath>
#include <functional>

#include "sunbudget/base/error.hpp"
#include "sunbudget/base/units.hpp"
#include "sunbudget/physics/fao56.hpp"
#include "sunbudget/physics/sun.hpp"
#include "sunbudget/raster/gdal_setup.hpp"
#include "sunbudget/tables/quality.hpp"
#include "support/vectors.hpp"
#include "terrain_run.hpp"

using namespace sunbudget;
using namespace sunbudget::test;

namespace {

/// Half the quantum of stored fluxes: a greater difference could change a stored value by a step.
constexpr double half_quantum_w_m2 = 1.0 / 32;

const std::string grid =
    "grid: {crs: EPSG:32633, bounds: [400000, 5200000, 403000, 5203000], cell: 30}\n";

Frame frame() {
    return {"EPSG:32633", {400000, 30, 0, 5203000, 0, -30}, 100, 100};
}

/// A raster of the frame, one band for each function of (column, row).
void write(const std::filesystem::path& file,
           const std::vector<std::function<double(int, int)>>& bands) {
    write_heights(file, frame(), Plane<float>(100, 100, 0.0F));  // for its CRS and place
    const auto made = file.parent_path() / "made.tif";
    std::filesystem::rename(file, made);
    auto* driver = GetGDALDriverManager()->GetDriverByName("GTiff");
    auto* from = GDALDataset::Open(made.c_str());
    auto* to = driver->Create(file.c_str(), 100, 100, static_cast<int>(bands.size()), GDT_Float32,
                              nullptr);
    double affine[6];
    REQUIRE((from->GetGeoTransform(affine) == CE_None && to->SetGeoTransform(affine) == CE_None &&
             to->SetProjection(from->GetProjectionRef()) == CE_None));
    for (std::size_t b = 0; b < bands.size(); ++b) {
        std::vector<float> values;
        for (int r = 0; r < 100; ++r)
            for (int c = 0; c < 100; ++c) values.push_back(static_cast<float>(bands[b](c, r)));
        auto* band = to->GetRasterBand(static_cast<int>(b) + 1);
        REQUIRE((band->SetNoDataValue(-9999) == CE_None &&
                 band->RasterIO(GF_Write, 0, 0, 100, 100, values.data(), 100, 100, GDT_Float32, 0,
                                0) == CE_None));
    }
    GDALClose(from);
    GDALClose(to);
}

/// Light of the run's first band at a pixel on level ground, straight from the sky.
OpenLight truth(const Computed& run, const Sky& sky, int column, int row, double height_m) {
    const Locator locator(run.run.grid);
    const auto place = locator.at(column + 0.5, row + 0.5);
    return PointLight(*run.run.times, sky)
        .at(0, place->latitude_rad, place->longitude_rad, height_m);
}

double turbidity_at(int column, int row) {
    return 1.6 + 0.03 * column + 0.02 * row;
}

}  // namespace

TEST_CASE("A turbidity raster gives each pixel the light of its own turbidity",
          "[model][differential]") {
    gdal_setup(64u << 20);
    const TemporaryFolder folder;
    write(folder.path() / "haze.tif", {turbidity_at});
    const std::string time =
        GENERATE(as<std::string>{}, "time: {from: 2025-02-10, to: 2025-02-11}\n",
                 "time: {at: 2025-06-21T06:00Z}\n");
    const std::string model = GENERATE(as<std::string>{}, "esra2000", "ineichen-perez2002");
    const auto run =
        computed(folder.path(), grid + time + "sky: {turbidity: haze.tif, model: " + model +
                                    "}\noutputs: {layers: [direct, diffuse, quality]}\n");
    for (const auto& [column, row] :
         {std::pair{0, 0}, {50, 50}, {99, 99}, {3, 80}, {77, 12}, {13, 1}}) {
        Sky sky(clear_model_named(model));
        sky[SkyParameter::turbidity].fill(
            static_cast<double>(static_cast<float>(turbidity_at(column, row))));
        const auto expected = truth(run, sky, column, row, 0);
        CAPTURE(model, column, row, turbidity_at(column, row));
        CHECK(run["direct"].at(column, row) ==
              Approx(expected.direct_w_m2()).margin(half_quantum_w_m2).epsilon(0));
        CHECK(run["diffuse"].at(column, row) ==
              Approx(expected.diffuse_w_m2).margin(half_quantum_w_m2).epsilon(0));
        CHECK(run["quality"].at(column, row) == 0);
    }
}

TEST_CASE("A turbidity raster of twelve bands gives each month its own", "[model][differential]") {
    gdal_setup(64u << 20);
    const TemporaryFolder folder;
    std::vector<std::function<double(int, int)>> months;
    for (int month = 1; month <= 12; ++month)
        months.emplace_back(
            [month](int c, int r) { return turbidity_at(c, r) / 2 + 0.25 * month; });
    write(folder.path() / "haze.tif", months);
    const auto run = computed(
        folder.path(), grid +
                           "time: {from: 2025-03-30, to: 2025-04-02}\nsky: {turbidity: haze.tif}\n"
                           "outputs: {layers: [direct, diffuse]}\n");
    for (const auto& [column, row] : {std::pair{5, 5}, {60, 30}, {98, 97}}) {
        Sky sky;
        for (int month = 1; month <= 12; ++month)
            sky[SkyParameter::turbidity][static_cast<std::size_t>(month - 1)] =
                turbidity_at(column, row) / 2 + 0.25 * month;
        const auto expected = truth(run, sky, column, row, 0);
        CHECK(run["direct"].at(column, row) ==
              Approx(expected.direct_w_m2()).margin(half_quantum_w_m2).epsilon(0));
        CHECK(run["diffuse"].at(column, row) ==
              Approx(expected.diffuse_w_m2).margin(half_quantum_w_m2).epsilon(0));
    }
}

TEST_CASE(
    "A turbidity raster on terrain: level ground at a height gets the open light of its own "
    "turbidity",
    "[model][differential]") {
    gdal_setup(64u << 20);
    const TemporaryFolder folder;
    write(folder.path() / "haze.tif", {turbidity_at});
    write_heights(folder.path() / "dem.tif", frame(), Plane<float>(100, 100, 1450.0F));
    const auto run =
        computed(folder.path(),
                 "time: {at: 2025-05-05T09:00Z}\nsky: {turbidity: haze.tif, diffuse: perez1990}\n"
                 "terrain: {elevation: dem.tif}\noutputs: {layers: [insolation, direct]}\n");
    for (const auto& [column, row] : {std::pair{10, 20}, {50, 50}, {90, 70}}) {
        Sky sky;
        sky.diffuse = DiffuseModel::perez1990;
        sky[SkyParameter::turbidity].fill(turbidity_at(column, row));
        const auto expected = truth(run, sky, column, row, 1450);
        CHECK(run["direct"].at(column, row) ==
              Approx(expected.direct_w_m2()).margin(half_quantum_w_m2).epsilon(0));
        CHECK(run["insolation"].at(column, row) ==
              Approx(expected.direct_w_m2() + expected.diffuse_w_m2)
                  .margin(2 * half_quantum_w_m2)
                  .epsilon(0));
    }
}

TEST_CASE("A pixel without a usable turbidity has no light, and the quality layer says why",
          "[model][edge]") {
    gdal_setup(64u << 20);
    const TemporaryFolder folder;
    // 33, 42 and 34, 42 are not among the places looked at before the run.
    write(folder.path() / "haze.tif", {[](int c, int r) {
              return r == 42 && c == 33 ? -9999.0 : r == 42 && c == 34 ? 12.0 : 3.0;
          }});
    const auto run =
        computed(folder.path(), grid +
                                    "time: {at: 2025-06-21T10:00Z}\nsky: {turbidity: haze.tif}\n"
                                    "outputs: {layers: [insolation, quality]}\n");
    for (const int column : {33, 34}) {
        CHECK(std::isnan(run["insolation"].at(column, 42)));
        CHECK(run["quality"].at(column, 42) == quality::no_sky);
    }
    CHECK(run["insolation"].at(35, 42) > 700);
    CHECK(run["quality"].at(35, 42) == 0);
}

TEST_CASE("A sky's raster that cannot be right stops the run", "[model][edge]") {
    gdal_setup(64u << 20);
    const TemporaryFolder folder;
    write(folder.path() / "hot.tif", {[](int, int) { return 20.0; }});
    write(folder.path() / "empty.tif", {[](int, int) { return -9999.0; }});
    write(folder.path() / "two.tif", {turbidity_at, turbidity_at});
    const auto refused = [&](const std::string& raster) {
        try {
            (void)computed(folder.path(),
                           grid + "time: {at: 2025-06-21T10:00Z}\nsky: {turbidity: " + raster +
                               "}\noutputs: {layers: [insolation]}\n");
        } catch (const Error& error) {
            return error.problems().front().what + " | " + error.problems().front().todo;
        }
        return std::string("nothing");
    };
    using Catch::Matchers::Contains;
    CHECK_THAT(refused("hot.tif"), Contains("turbidity 20, expected a number above 0 and up to 9"));
    CHECK_THAT(refused("empty.tif"), Contains("no value in any of 256 places"));
    CHECK_THAT(refused("two.tif"), Contains("2 bands") && Contains("PATH:N"));
}

TEST_CASE("bird-hulstrom1981: the run's own albedo lights the sky as the same number given does",
          "[model][differential]") {
    const TemporaryFolder folder;
    const std::string albedo = GENERATE(as<std::string>{}, "0", "0.2", "0.85");
    const std::string time =
        GENERATE(as<std::string>{}, "time: {from: 2025-06-21, to: 2025-06-21}\n",
                 "time: {at: 2025-06-21T05:00Z}\n");
    const auto diffuse = [&](const std::string& sky) {
        const auto run =
            computed(folder.path(), grid + time + "surface: {albedo: {value: " + albedo +
                                        "}}\nsky: {model: bird-hulstrom1981" + sky +
                                        "}\noutputs: {layers: [diffuse]}\n");
        return static_cast<double>(run["diffuse"].at(50, 50));
    };
    CAPTURE(albedo, time);
    CHECK(diffuse("") ==
          Approx(diffuse(", ground_albedo: " + albedo)).margin(half_quantum_w_m2).epsilon(0));
    // Snow brightens the sky: by about 85 % of a tenth of the global.
    if (albedo == "0.85") CHECK(diffuse("") > diffuse(", ground_albedo: 0") * 1.3);
}

TEST_CASE(
    "bird-hulstrom1981: level terrain gets what level ground does, light from the ground included",
    "[model][differential]") {
    gdal_setup(64u << 20);
    const TemporaryFolder folder;
    write_heights(folder.path() / "dem.tif", frame(), Plane<float>(100, 100, 250.0F));
    const std::string rest =
        "surface: {albedo: {value: 0.4}}\nsky: {model: bird-hulstrom1981}\ntime: {from: "
        "2025-09-01, to: 2025-09-01}\n"
        "outputs: {layers: [diffuse, insolation]}\n";
    const auto flat = computed(folder.path(), grid + "terrain: {elevation: 250 m}\n" + rest);
    const auto terrain = computed(folder.path(), "terrain: {elevation: dem.tif}\n" + rest);
    CHECK(terrain["diffuse"].at(50, 50) ==
          Approx(flat["diffuse"].at(50, 50)).margin(half_quantum_w_m2).epsilon(0));
    CHECK(terrain["insolation"].at(50, 50) ==
          Approx(flat["insolation"].at(50, 50)).margin(2 * half_quantum_w_m2).epsilon(0));
}

TEST_CASE("fao56: a day's sum is its share of the light outside the air, by the paper's constant",
          "[model][property]") {
    const TemporaryFolder folder;
    const auto run =
        computed(folder.path(),
                 grid +
                     "terrain: {elevation: 1000 m}\ntime: {from: 2025-06-21, to: 2025-06-21}\n"
                     "sky: {model: fao56}\noutputs: {layers: [insolation], unit: MJ/m2}\n");
    const Locator locator(run.run.grid);
    const auto place = locator.at(50.5, 50.5);
    const auto day = 172;
    // The paper's own Ra for that day and latitude; its declination and distance are within 0.3 % here.
    const double ra_mj_m2 = fao56_extraterrestrial_mj_m2_day(day, place->latitude_rad);
    CHECK(run["insolation"].at(50, 50) == Approx(0.77 * ra_mj_m2).epsilon(0.003));
}

TEST_CASE("sky_moment: every model closes, and its parts add up on level ground",
          "[model][property]") {
    for (const auto model :
         {ClearModel::esra2000, ClearModel::bird_hulstrom1981, ClearModel::ineichen_perez2002,
          ClearModel::asce2005, ClearModel::fao56})
        for (const auto diffuse :
             {DiffuseModel::liu_jordan1963, DiffuseModel::hay_davies1980, DiffuseModel::perez1990})
            for (double elevation_deg = 6; elevation_deg < 90; elevation_deg += 7) {
                Sky sky(model);
                sky.diffuse = diffuse;
                if (waits_for_ground(sky)) sky[SkyParameter::ground_albedo].fill(0.3);
                const double h = rad_from_deg(elevation_deg);
                const auto light = sky_moment(sky, {0, 6, 1361, h, 300, 0.965});
                CAPTURE(name_of(model), elevation_deg);
                CHECK(light.parts.circumsolar_normal_w_m2 * std::sin(h) +
                          light.parts.isotropic_w_m2 ==
                      Approx(light.diffuse_w_m2).epsilon(1e-12));
                CHECK(light.beam_normal_w_m2 * std::sin(h) + light.diffuse_w_m2 <
                      1367 * std::sin(h));
                CHECK(light.beam_normal_w_m2 > 0);
                CHECK(light.thrown_back_w_m2 == 0);
            }
}
