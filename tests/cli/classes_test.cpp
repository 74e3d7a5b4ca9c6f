// Classes in a raster that the table does not have.
#include <gdal_priv.h>
#include <catch2/catch.hpp>

#include "desk.hpp"

using namespace sunbudget::test;
using Catch::Contains;

namespace {
/// 7 once in the first row, 33 in the last two rows, both strange to WorldCover.
double with_strangers(int column, int row) {
    if (row == 0 && column == 11) return 7;
    return row >= 58 ? 33 : patchy(column, row);
}

void name_classes(const std::filesystem::path& file) {
    const std::unique_ptr<GDALDataset> cover(
        GDALDataset::Open(file.c_str(), GDAL_OF_RASTER | GDAL_OF_UPDATE));
    std::vector<std::string> names(34);
    names[33] = "Salt pans";
    std::vector<char*> list;
    for (auto& name : names) list.push_back(name.data());
    list.push_back(nullptr);
    REQUIRE(cover->GetRasterBand(1)->SetCategoryNames(list.data()) == CE_None);
}
}  // namespace

TEST_CASE("sunbudget: all unknown classes are told at once, before anything is written",
          "[cli][edge]") {
    const Desk desk;
    make_cover(desk.path("cover.tif"), 80, 60, with_strangers);
    name_classes(desk.path("cover.tif"));
    const auto outcome = desk.run({"run", "plan.yaml"});
    CAPTURE(outcome.err);
    CHECK(outcome.exit_code == 3);
    CHECK_THAT(outcome.err, Contains("2 classes of cover.tif") && Contains("7 (1 pixel)") &&
                                Contains("33 \"Salt pans\" (160 pixels)") &&
                                Contains("(plan.yaml:3: surface.cover.raster)") &&
                                Contains("default_class"));
    CHECK_FALSE(std::filesystem::exists(desk.path("out")));
    const auto check = desk.run({"check", "plan.yaml", "--full"});
    CHECK(check.exit_code == 3);
    CHECK_THAT(check.err, Contains("33 \"Salt pans\" (160 pixels)"));
}

TEST_CASE("default_class: stands in for every class without a row", "[cli]") {
    const Desk desk;
    make_cover(desk.path("cover.tif"), 80, 60, with_strangers);
    REQUIRE(desk.run({"run", "plan.yaml", "--set", "surface.cover.default_class=60"}).exit_code ==
            0);
    const auto albedo = pixels_of(desk.path("out/albedo.tif"));
    make_cover(desk.path("cover.tif"), 80, 60, [](int column, int row) {
        const double code = with_strangers(column, row);
        return code == 7 || code == 33 ? 60 : code;
    });
    REQUIRE(desk.run({"run", "plan.yaml", "--out", "known"}).exit_code == 0);
    CHECK(same_pixels(albedo, pixels_of(desk.path("known/albedo.tif"))));
    const auto unfit = desk.run({"run", "plan.yaml", "--set", "surface.cover.default_class=61"});
    CHECK(unfit.exit_code == 2);
    CHECK_THAT(unfit.err, Contains("61") && Contains("default_class"));
}

TEST_CASE("sunbudget: unknown classes of real rasters are listed with their pixels",
          "[cli][edge]") {
    SUNBUDGET_NEEDS_DATA();
    const TemporaryFolder folder;
    const auto out = (folder.path() / "a.tif").string();
    const auto island = sunbudget::test::sunbudget(
        {"albedo", "--cover", real_data("landcover/nlcd_puertorico_3km.tif")->string(), "--classes",
         "nlcd", "-o", out});
    CHECK(island.exit_code == 3);
    CHECK_THAT(island.err,
               Contains("one class of nlcd_puertorico_3km.tif") && Contains(": 0 (2615 pixels)"));
    const auto foreign = sunbudget::test::sunbudget(
        {"albedo", "--cover", real_data("landcover/nlcd_puertorico_3km.tif")->string(), "--classes",
         "corine", "-o", out});
    CHECK(foreign.exit_code == 3);
    CHECK_THAT(foreign.err, Contains("\"Open Water\""));  // named by the file's attribute table
    const auto lossy = sunbudget::test::sunbudget(
        {"albedo", "--cover", real_data("awkward/made/nlcd_jpeg_lossy.tif")->string(), "--classes",
         "nlcd", "-o", out});
    CHECK(lossy.exit_code == 3);
    CHECK_THAT(lossy.err,
               Contains("49 classes of nlcd_jpeg_lossy.tif") && Contains("92 (1 pixel)"));
    CHECK(names_in(folder.path()).empty());
}
