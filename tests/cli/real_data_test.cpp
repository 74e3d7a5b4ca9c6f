// Real rasters, and values worked out apart from the program.
#include <fmt/format.h>
#include <gdal_priv.h>
#include <ogr_spatialref.h>
#include <catch2/catch.hpp>
#include <nlohmann/json.hpp>

#include <cmath>
#include <map>

#include "desk.hpp"

using namespace sunbudget::test;
using Catch::Contains;
namespace fs = std::filesystem;

namespace {
// Stored steps: albedo 2^-13, fluxes 1/16 W m-2.
constexpr double albedo_quantum = 1.0 / 8192, flux_quantum = 1.0 / 16;

std::string data(const std::string& name) {
    return real_data(name)->string();
}

/// Albedo by code, from what `sunbudget tables NAME --json` prints; no entry for codes without one.
std::map<int, double> albedo_by_code(const std::string& table) {
    std::map<int, double> albedo;
    const auto printed =
        nlohmann::json::parse(sunbudget::test::sunbudget({"tables", table, "--json"}).out);
    const auto& rows = printed.is_array() ? printed : printed.at("rows");
    for (const auto& row : rows)
        if (row.contains("albedo") && row["albedo"].is_number())
            albedo[row["code"].get<int>()] = row["albedo"].get<double>();
    REQUIRE(albedo.size() > 5);
    return albedo;
}

/// The largest departure of an albedo raster from its classes' albedos; a value where there should be none counts as 1.
double worst_albedo_error(const std::vector<double>& codes, const std::vector<double>& albedo,
                          const std::map<int, double>& table) {
    REQUIRE(codes.size() == albedo.size());
    double worst = 0;
    for (std::size_t i = 0; i < codes.size(); ++i) {
        const auto found =
            std::isnan(codes[i]) ? table.end() : table.find(static_cast<int>(codes[i]));
        const bool expected = found != table.end();
        if (expected == std::isnan(albedo[i])) return 1;
        if (expected) worst = std::max(worst, std::abs(albedo[i] - found->second));
    }
    return worst;
}

/// Longitude and latitude of a pixel's centre.
std::pair<double, double> place_of(const fs::path& raster, int column, int row) {
    const std::unique_ptr<GDALDataset> opened(GDALDataset::Open(raster.c_str(), GDAL_OF_RASTER));
    double affine[6];
    REQUIRE(opened->GetGeoTransform(affine) == CE_None);
    OGRSpatialReference geographic;
    geographic.importFromEPSG(4326);
    geographic.SetAxisMappingStrategy(OAMS_TRADITIONAL_GIS_ORDER);
    const std::unique_ptr<OGRCoordinateTransformation> to(
        OGRCreateCoordinateTransformation(opened->GetSpatialRef(), &geographic));
    double x = affine[0] + affine[1] * (column + 0.5), y = affine[3] + affine[5] * (row + 0.5);
    REQUIRE(to->Transform(1, &x, &y));
    return {x, y};
}

/// Mean W m-2 of a day's clear-sky light as `sunbudget sun` sums it.
double mean_by_sun_command(std::pair<double, double> place, double height_m,
                           const std::string& day) {
    const auto outcome = sunbudget::test::sunbudget(
        {"sun", fmt::format("--at={:.7f},{:.7f}", place.second, place.first),
         fmt::format("--height={:.3f}", height_m), "--from", day, "--json"});
    REQUIRE(outcome.exit_code == 0);
    return nlohmann::json::parse(outcome.out)[0]["global_mj_m2"].get<double>() * 1e6 / 86400;
}

int width_of(const fs::path& raster) {
    return std::unique_ptr<GDALDataset>(GDALDataset::Open(raster.c_str(), GDAL_OF_RASTER))
        ->GetRasterXSize();
}
}  // namespace

TEST_CASE("run: Zion's slopes on a July day agree with the class table and plain arithmetic",
          "[cli][real]") {
    SUNBUDGET_NEEDS_DATA();
    const Desk desk;
    const auto cover = data("zion_utah/nlcd2011.tif"), heights = data("zion_utah/srtm.tif");
    write(desk.path("plan.yaml"),
          "sunbudget: 1\nsurface: {cover: {raster: " + cover +
              ", classes: nlcd}}\nterrain: {elevation: " + heights +
              "}\ntime: {from: 2025-07-15, to: 2025-07-15, step: 10 min, zone: UTC}\n"
              "outputs: {directory: out, layers: [albedo, insolation, direct, diffuse, "
              "reflected, net_shortwave]}\n");
    const auto outcome = desk.run({"run", "plan.yaml"});
    CAPTURE(outcome.err);
    REQUIRE(outcome.exit_code == 0);
    const auto layer = [&](const char* name) {
        return pixels_of(desk.path("out") / (std::string(name) + ".tif"));
    };
    const auto albedo = layer("albedo"), insolation = layer("insolation"),
               net = layer("net_shortwave");
    CHECK(worst_albedo_error(pixels_of(cover), albedo, albedo_by_code("nlcd")) <=
          albedo_quantum / 2 + 1e-7);

    const auto direct = layer("direct"), diffuse = layer("diffuse"), reflected = layer("reflected");
    double worst_net = 0, worst_sum = 0;
    std::size_t valid = 0;
    for (std::size_t i = 0; i < net.size(); ++i) {
        REQUIRE(std::isnan(net[i]) == (std::isnan(albedo[i]) || std::isnan(insolation[i])));
        if (std::isnan(net[i])) continue;
        ++valid;
        // (1 - a) I from the stored figures: the albedo's half step is 0.02 W m-2 of 330, the light's half a step.
        worst_net = std::max(worst_net, std::abs(net[i] - (1 - albedo[i]) * insolation[i]));
        worst_sum =
            std::max(worst_sum, std::abs(insolation[i] - direct[i] - diffuse[i] - reflected[i]));
    }
    CHECK(valid > net.size() / 2);
    CHECK(worst_net <= 2 * flux_quantum);
    CHECK(worst_sum <= 2 * flux_quantum);  // four roundings of half a step
}

TEST_CASE("insolation: level ground over Zion gets what the sun command sums at each place",
          "[cli][real]") {
    SUNBUDGET_NEEDS_DATA();
    const Desk desk;
    const auto cover = data("zion_utah/nlcd2011.tif");
    const auto outcome =
        desk.run({"insolation", "--like", cover, "--elevation", "1500 m", "--from", "2025-07-15",
                  "--to", "2025-07-15", "--zone", "UTC", "-o", "i.tif"});
    CAPTURE(outcome.err);
    REQUIRE(outcome.exit_code == 0);
    const auto insolation = pixels_of(desk.path("i.tif"));
    for (const auto& [column, row] : {std::pair{0, 0}, {536, 680}, {1072, 1358}, {411, 77}}) {
        const auto i = static_cast<std::size_t>(row * width_of(cover) + column);
        CAPTURE(column, row);
        CHECK(insolation[i] ==
              Approx(mean_by_sun_command(place_of(cover, column, row), 1500, "2025-07-15"))
                  .margin(flux_quantum)
                  .epsilon(0));
    }
}

TEST_CASE("albedo: Puerto Rico with its code 0 named, class by class", "[cli][real]") {
    SUNBUDGET_NEEDS_DATA();
    const Desk desk;
    const auto cover = data("landcover/nlcd_puertorico_3km.tif");
    const auto outcome =
        desk.run({"net", "--cover", cover, "--classes", "nlcd", "--default-class", "11", "--from",
                  "2025-07-15", "--to", "2025-07-15", "--zone", "UTC", "-o", "net.tif"});
    CAPTURE(outcome.err);
    REQUIRE(outcome.exit_code == 0);
    REQUIRE(desk.run({"albedo", "--cover", cover, "--classes", "nlcd", "--default-class", "11",
                      "-o", "albedo.tif"})
                .exit_code == 0);
    auto table = albedo_by_code("nlcd");
    table[0] = table.at(11);
    CHECK(worst_albedo_error(pixels_of(cover), pixels_of(desk.path("albedo.tif")), table) <=
          albedo_quantum / 2 + 1e-7);
    const double expected = (1 - pixels_of(desk.path("albedo.tif"))[0]) *
                            mean_by_sun_command(place_of(cover, 0, 0), 0, "2025-07-15");
    CHECK(pixels_of(desk.path("net.tif"))[0] ==
          Approx(expected).margin(2 * flux_quantum).epsilon(0));
}

TEST_CASE("albedo: the same land cover in another CRS and in feet has the same mean",
          "[cli][real]") {
    SUNBUDGET_NEEDS_DATA();
    const Desk desk;
    // The pieces cover the ground of zion_b4_reference.tif, each on its own grid; onto one grid they must agree.
    const auto grid = data("awkward/made/zion_b4_reference.tif");
    std::map<std::string, double> mean;
    for (const auto* name : {"zion_utah/nlcd2011.tif", "awkward/made/nlcd_same_place_epsg5070.tif",
                             "awkward/made/nlcd_same_place_us_feet_epsg3566.tif"}) {
        const auto outcome = desk.run(
            {"albedo", "--cover", data(name), "--classes", "nlcd", "--like", grid, "-o", "a.tif"});
        CAPTURE(name, outcome.err);
        REQUIRE(outcome.exit_code == 0);
        mean[name] = mean_of(pixels_of(desk.path("a.tif")));
    }
    const double reference = mean["zion_utah/nlcd2011.tif"];
    // Nearest-neighbour codes move by up to half a cell twice over: a few cells in a hundred change class at patch edges, by
    // about 0.05 of albedo either way, so the mean of 20,000 cells holds to a few times 1e-4.
    for (const auto& [name, value] : mean) {
        CAPTURE(name);
        CHECK(value == Approx(reference).margin(1e-3).epsilon(0));
    }
}

TEST_CASE("albedo: a window of a 36000 x 36000 tile, class by class and at once", "[cli][real]") {
    SUNBUDGET_NEEDS_DATA();
    const Desk desk;
    const auto cover = data("landcover/ESA_WorldCover_10m_2021_v200_N00E006_Map.tif");
    write(desk.path("plan.yaml"),
          "sunbudget: 1\ngrid: {like: surface, bounds: [6.6, 0.1, 6.75, 0.25]}\nsurface: {cover: "
          "{raster: " +
              cover + ", classes: worldcover}}\noutputs: {directory: out, layers: [albedo]}\n");
    const auto outcome = desk.run({"run", "plan.yaml"});
    CAPTURE(outcome.err);
    REQUIRE(outcome.exit_code == 0);
    REQUIRE(shell("gdal_translate -q -ovr NONE -projwin 6.6 0.25 6.75 0.1 " + word(cover) + " " +
                  word(desk.path("window.tif")))
                .exit_code == 0);
    const auto codes = pixels_of(desk.path("window.tif")),
               albedo = pixels_of(desk.path("out/albedo.tif"));
    CHECK(codes.size() == 1800 * 1800);
    CHECK(worst_albedo_error(codes, albedo, albedo_by_code("worldcover")) <=
          albedo_quantum / 2 + 1e-7);
}
