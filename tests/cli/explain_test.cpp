// The account of one pixel: its figures are the files' figures.
#include <fmt/format.h>
#include <gdal_priv.h>
#include <catch2/catch.hpp>
#include <nlohmann/json.hpp>

#include <cmath>
#include <map>

#include "desk.hpp"
#include "town.hpp"

using namespace sunbudget::test;
using Catch::Contains;
using Json = nlohmann::json;
namespace fs = std::filesystem;

namespace {

/// A file's pixels, and where they lie.
struct Raster {
    int width = 0, height = 0, bands = 0;
    double affine[6]{};
    std::vector<double> pixels;

    explicit Raster(const fs::path& file) : pixels(pixels_of(file)) {
        const std::unique_ptr<GDALDataset> opened(GDALDataset::Open(file.c_str(), GDAL_OF_RASTER));
        width = opened->GetRasterXSize();
        height = opened->GetRasterYSize();
        bands = opened->GetRasterCount();
        REQUIRE(opened->GetGeoTransform(affine) == CE_None);
    }
    [[nodiscard]] double at(int band, int column, int row) const {
        return pixels[static_cast<std::size_t>((band * height + row) * width + column)];
    }
    [[nodiscard]] std::string place(int column, int row) const {
        return fmt::format("{},{}", affine[0] + (column + 0.3) * affine[1],
                           affine[3] + (row + 0.6) * affine[5]);
    }
};

/// The numbers of an account that differ from those of a run's files.
int differences(const fs::path& folder, const Json& account, int column, int row) {
    int wrong = 0, compared = 0;
    for (const auto& [name, layer] : account.at("layers").items()) {
        const Raster raster(folder / (name + ".tif"));
        REQUIRE(static_cast<std::size_t>(raster.bands) == layer["bands"].size());
        for (int band = 0; band < raster.bands; ++band) {
            const auto& value = layer["bands"][static_cast<std::size_t>(band)]["value"];
            const double stored = raster.at(band, column, row);
            wrong += std::isnan(stored) ? !value.is_null() : value != stored;
            ++compared;
        }
    }
    CHECK(compared > 0);
    return wrong;
}

/// Runs the desk's plan, then asks for pixels given as shares of its sides.
void compare(const Desk& desk, const std::string& first_layer) {
    const auto run = desk.run({"run", "plan.yaml", "--quiet"});
    CAPTURE(run.err);
    REQUIRE(run.exit_code == 0);
    const Raster raster(desk.path("out") / (first_layer + ".tif"));
    for (const auto& [across, down] : {std::pair{0.31, 0.88}, {1.0, 1.0}}) {
        const int column = static_cast<int>(across * (raster.width - 1)),
                  row = static_cast<int>(down * (raster.height - 1));
        const auto asked = desk.run(
            {"explain", "plan.yaml", "--at", raster.place(column, row), "--json", "--quiet"});
        CAPTURE(column, row, asked.err);
        REQUIRE(asked.exit_code == 0);
        const auto account = Json::parse(asked.out);
        CHECK(account["pixel"]["column"] == column);
        CHECK(account["pixel"]["row"] == row);
        CHECK(differences(desk.path("out"), account, column, row) == 0);
    }
}

}  // namespace

TEST_CASE("explain: figures equal the demo town's files to the last bit, months and an instant",
          "[cli][differential]") {
    const auto town = demo_town();
    if (!town) {
        WARN("SKIPPED: the demo town's generator needs python3-numpy and python3-gdal");
        return;
    }
    const Desk desk;
    const auto [time, unit, hours] = GENERATE(table<std::string, std::string, std::string>({
        {"{from: 2025-05-30, to: 2025-06-02, step: 30 min, totals: month}", "kWh/m2",
         ", sunlit_hours"},
        {"{at: 2025-12-21T11:20Z}", "W/m2", ""},
    }));
    write(desk.path("plan.yaml"),
          "sunbudget: 1\n"
          "grid: {like: surface, bounds: [449100, 5304300, 449700, 5304900]}\n"
          "surface: {cover: {raster: " +
              (*town / "cover.tif").string() +
              ", classes: worldcover}}\n"
              "terrain: {elevation: " +
              (*town / "surface.tif").string() +
              ", slope_from: " + (*town / "ground.tif").string() +
              ", directions: 16}\n"
              "time: " +
              time +
              "\n"
              "weather: {air_temperature: 25 degC, relative_humidity: 0.5}\n"
              "surface_temperature: {air_plus: 5 K}\n"
              "outputs: {directory: out, unit: " +
              unit +
              ", layers: [albedo, insolation, direct, diffuse, reflected, net_shortwave, "
              "sky_view, slope, aspect, quality, albedo_uncertainty, net_shortwave_uncertainty, "
              "emissivity, longwave_down, longwave_up, net_radiation" +
              hours +
              "]}\n"
              "changes:\n"
              "  - {name: pale, where: {classes: [50]}, albedo: {aged: 0.6}, emissivity: 0.88, "
              "treatable: 0.5}\n"
              "  - {name: higher, where: {file: " +
              (*town / "roofs.gpkg").string() + "}, height: {add: 3 m}}\n");
    compare(desk, "albedo");
    CHECK(names_in(desk.path("out")).size() > 20);  // layers of both changes were compared too
}

TEST_CASE("explain: figures equal those of reprojected heights and of a satellite image's albedo",
          "[cli][differential]") {
    SUNBUDGET_NEEDS_DATA();
    const Desk desk;
    SECTION("land cover with heights from another grid") {
        write(desk.path("plan.yaml"),
              "sunbudget: 1\n"
              "grid: {like: surface, cell: 120}\n"
              "surface: {cover: {raster: " +
                  real_data("zion_utah/nlcd2011.tif")->string() +
                  ", classes: nlcd}}\n"
                  "terrain: {elevation: " +
                  real_data("zion_utah/srtm.tif")->string() +
                  ", directions: 16, reach: 5 km}\n"
                  "time: {from: 2025-03-20, to: 2025-03-20, step: 1 h, zone: solar-true}\n"
                  "outputs: {directory: out, layers: [net_shortwave, aspect, sunlit_hours, albedo, "
                  "quality]}\n");
        compare(desk, "albedo");
    }
    SECTION("an image, whose weighted bands add up to the albedo") {
        write(desk.path("plan.yaml"),
              "sunbudget: 1\n"
              "surface: {reflectance: {sensor: landsat-oli-c2, scene: " +
                  real_data("landsat_c2l2/LC08_L2SP_008059_20191201_20200825_02_T1")->string() +
                  "}}\n"
                  "outputs: {directory: out, layers: [albedo, quality]}\n");
        compare(desk, "albedo");
        const Raster albedo(desk.path("out/albedo.tif"));
        auto valid = albedo.pixels.begin() + static_cast<long>(albedo.pixels.size() / 2);
        while (std::isnan(*valid)) ++valid;
        const int index = static_cast<int>(valid - albedo.pixels.begin()),
                  column = index % albedo.width, row = index / albedo.width;
        const auto account = Json::parse(
            desk.run({"explain", "plan.yaml", "--at", albedo.place(column, row), "--json"}).out);
        double sum = account["albedo"]["constant"];
        for (const auto& band : account["albedo"]["bands"])
            sum += band["weight"].get<double>() * band["reflectance"].get<double>();
        CHECK(sum == Approx(albedo.at(0, column, row)).margin(1.0 / 8192));  // stored step
        int bands = 0;
        for (const auto& input : account["inputs"]) {
            if (!input.contains("value") || input["value"] == input["number_in_file"])
                continue;  // codes are not scaled
            // The scale of Collection 2: 0.0000275 and -0.2; the value is a float.
            CHECK(input["value"].get<double>() ==
                  Approx(input["number_in_file"].get<double>() * 2.75e-5 - 0.2).epsilon(1e-6));
            ++bands;
        }
        CHECK(bands == 5);
    }
}

TEST_CASE("explain: the same pixel whatever CRS its place is given in, and words for people",
          "[cli]") {
    const Desk desk;
    const auto json =
        Json::parse(desk.run({"explain", "plan.yaml", "--at", "500615,5499385", "--json"}).out);
    CHECK(json["pixel"]["column"] == 20);
    CHECK(json["pixel"]["row"] == 20);
    const auto place = fmt::format("{},{}", json["pixel"]["longitude_deg"].get<double>(),
                                   json["pixel"]["latitude_deg"].get<double>());
    const auto other = Json::parse(
        desk.run({"explain", "plan.yaml", "--at", place, "--crs", "EPSG:4326", "--json"}).out);
    CHECK(other["pixel"] == json["pixel"]);
    CHECK(json["inputs"][0]["number_in_file"] == patchy(20, 20));
    // Light on level open ground: what stays is what comes less what the albedo sends back.
    const auto& terms = json["periods"][0]["terms"];
    const double arrives = terms["direct_w_m2"].get<double>() + terms["diffuse_w_m2"].get<double>();
    const double albedo = json["terms"]["albedo"];
    CHECK(json["layers"]["net_shortwave"]["bands"][0]["value"].get<double>() ==
          Approx((1 - albedo) * arrives).margin(1.0 / 16));

    const auto text = desk.run({"explain", "plan.yaml", "--at", "500615,5499385"}).out;
    for (const auto* part : {"cover.tif", "Where the albedo came from", "class_table",
                             "net_shortwave_w_m2", "Rigollier", "@"})
        CHECK_THAT(text, Contains(part));
    CHECK(names_in(desk.path()) == std::vector<std::string>{"cover.tif", "plan.yaml"});
}

TEST_CASE("explain: a place that is none or outside is a mistake of the command line",
          "[cli][edge]") {
    const Desk desk;
    const auto [at, crs, says] = GENERATE(table<std::string, std::string, std::string>({
        {"1,2", "", "outside the run's grid"},
        {"500615", "", "is no place"},
        {"500615,abc", "", "is no place"},
        {"500615,5499385", "EPSG:999999", "--crs"},
        {"95,10", "EPSG:4326", "outside the run's grid"},
    }));
    std::vector<std::string> words{"explain", "plan.yaml", "--at", at};
    if (!crs.empty()) words.insert(words.end(), {"--crs", crs});
    const auto outcome = desk.run(words);
    CAPTURE(outcome.err);
    CHECK(outcome.exit_code == 2);
    CHECK(outcome.out.empty());
    CHECK_THAT(outcome.err, Contains(says));
}
