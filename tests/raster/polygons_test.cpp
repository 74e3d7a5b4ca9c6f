#include "sunbudget/raster/polygons.hpp"

#include <catch2/catch.hpp>

#include <cstdlib>
#include <fstream>

#include "input_support.hpp"
#include "sunbudget/base/digest.hpp"
#include "sunbudget/base/error.hpp"
#include "sunbudget/raster/gdal_setup.hpp"
#include "sunbudget/raster/grid_build.hpp"
#include "sunbudget/raster/locator.hpp"
#include "support/vectors.hpp"

namespace sunbudget::test {

namespace fs = std::filesystem;
using Catch::Matchers::Contains;

namespace {

struct Folder {
    TemporaryFolder folder;
    Folder() { gdal_setup(std::uint64_t{64} << 20); }
    [[nodiscard]] fs::path file(const std::string& name) const { return folder.path() / name; }
    fs::path write(const std::string& name, const std::string& text) const {
        std::ofstream(file(name)) << text;
        return file(name);
    }
};

/// GeoJSON in the CRS of square_grid (UTM 33N), from coordinates.
std::string geojson(const std::string& features) {
    return R"({"type":"FeatureCollection","crs":{"type":"name","properties":{"name":"urn:ogc:def:crs:EPSG::32633"}},"features":[)" +
           features + "]}";
}
std::string feature(const std::string& geometry, const std::string& properties = "{}") {
    return R"({"type":"Feature","properties":)" + properties + R"(,"geometry":)" + geometry + "}";
}
std::string polygon(const std::string& rings) {
    return R"({"type":"Polygon","coordinates":)" + rings + "}";
}

/// 100 x 100 cells of 10 m; the upper left corner at (500000, 5000000).
const Grid grid = square_grid(100, 100, 500000, 5000000, 10);

const std::string square = polygon(
    "[[[500100,4999900],[500100,4999800],[500300,4999800],[500300,4999900],[500100,4999900]]]");

}  // namespace

TEST_CASE(
    "polygons: rings come in pixels, holes against the outer ring, whatever way they were drawn",
    "[raster][property]") {
    const Folder here;
    const auto hole =
        "[[500150,4999880],[500200,4999880],[500200,4999850],[500150,4999850],[500150,4999880]]";
    const auto outer =
        "[[500100,4999900],[500300,4999900],[500300,4999800],[500100,4999800],[500100,4999900]]";
    const auto file = here.write(
        "a.geojson", geojson(feature(polygon("[" + std::string(outer) + "," + hole + "]"),
                                     R"({"name":"Mill","share":0.5})")));
    const auto found = read_polygons({file, {}, {}}, grid, {"name", {"share"}});
    REQUIRE(found.all.size() == 1);
    const auto& one = found.all[0];
    CHECK(one.id == "Mill");
    CHECK(one.numbers == std::vector<double>{0.5});
    REQUIRE(one.rings.size() == 2);
    CHECK(signed_area(one.rings[0]) == Approx(200));
    CHECK(signed_area(one.rings[1]) == Approx(-15));
    CHECK(one.area_px == Approx(185));
    CHECK(one.left == Approx(10));
    CHECK(one.bottom == Approx(20));
    CHECK(found.notes.empty());
}

TEST_CASE("polygons: invalid ones are repaired and named, those without an area left out",
          "[raster][edge]") {
    const Folder here;
    // A bow tie, a line folded onto itself, a point.
    const auto tie = polygon(
        "[[[500100,4999900],[500200,4999800],[500200,4999900],[500100,4999800],[500100,4999900]]]");
    const auto flat =
        polygon("[[[500100,4999900],[500200,4999900],[500100,4999900],[500100,4999900]]]");
    const auto file = here.write("a.geojson", geojson(feature(tie, R"({"id_":"tie"})") + "," +
                                                      feature(flat, R"({"id_":"flat"})") + "," +
                                                      feature(square, R"({"id_":"good"})")));
    const auto found = read_polygons({file, {}, {}}, grid, {"id_", {}});
    REQUIRE(found.all.size() == 2);
    CHECK(found.all[0].id == "tie");
    CHECK(found.all[0].area_px == Approx(50));  // two triangles of 10 x 5 pixels
    CHECK(found.all[1].id == "good");
    REQUIRE(found.notes.size() == 2);
    CHECK_THAT(found.notes[0], Contains("repaired") && Contains("tie"));
    CHECK_THAT(found.notes[1], Contains("without an area") && Contains("flat"));
}

TEST_CASE("polygons: edges straight in their own CRS are bent in the grid's",
          "[raster][property]") {
    const Folder here;
    // 20 degrees of a parallel: in the polar grid it is an arc, 3 degrees of sagitta from its chord.
    const Grid polar{1000, 1000, {-3e6, 6000, 0, 3e6, 0, -6000}, crs_wkt_of("EPSG:3031")};
    const auto band = feature(polygon("[[[10,-80],[30,-80],[30,-75],[10,-75],[10,-80]]]"));
    const auto file =
        here.write("a.geojson", R"({"type":"FeatureCollection","features":[)" + band + "]}");
    const auto found = read_polygons({file, {}, {}}, polar, {});
    REQUIRE(found.all.size() == 1);
    // A sector of a ring: area in the polar plane = angle / 2 * (r1^2 - r2^2), r from PROJ at its two edges.
    const auto radius_px = [&](double latitude) {
        const auto place = place_in(polar, 0, latitude, crs_wkt_of("OGC:CRS84"));
        return std::hypot(place->column - 500, place->row - 500);
    };
    const double expected = 20 * 3.14159265358979 / 180 / 2 *
                            (std::pow(radius_px(-75), 2) - std::pow(radius_px(-80), 2));
    // Edges within 0.01 pixel over an outline of 430 pixels: 4.3 of 9,000 pixels at the very most.
    CHECK(found.all[0].area_px == Approx(expected).epsilon(5e-4));
}

TEST_CASE("polygons: what is wrong with a file is said with what to do", "[raster][edge]") {
    const Folder here;
    const auto good =
        here.write("good.geojson", geojson(feature(square, R"({"kind":"flat","area":3.5})")));
    const auto points = here.write(
        "points.geojson", geojson(feature(R"({"type":"Point","coordinates":[500100,4999900]})")));
    const auto text = here.write("text.geojson", "hello");
    const auto wrong = [&](const PolygonName& name, const PolygonsWanted& wanted = {}) {
        return error_text([&] { (void)read_polygons(name, grid, wanted); });
    };
    CHECK_THAT(wrong({here.file("none.gpkg"), {}, {}}), Contains("no such file"));
    CHECK_THAT(wrong({text, {}, {}}), Contains("cannot be read") && Contains("ogr2ogr"));
    CHECK_THAT(wrong({points, {}, {}}), Contains("holds no polygons but Point"));
    CHECK_THAT(wrong({good, "other", {}}), Contains("no layer \"other\""));
    CHECK_THAT(wrong({good, {}, "kind = "}), Contains("query"));
    CHECK_THAT(wrong({good, {}, {}}, {"knid", {}}),
               Contains("no field \"knid\"") && Contains("kind"));
    CHECK_THAT(wrong({good, {}, {}}, {"", {"kind"}}), Contains("holds no numbers"));
    CHECK(read_polygons({good, {}, "kind = 'flat' AND area > 3"}, grid, {}).all.size() == 1);
    CHECK(read_polygons({good, {}, "kind = 'steep'"}, grid, {}).all.empty());
}

TEST_CASE(
    "polygons: every format gives the same shapes, and a table goes out as a GeoPackage of the "
    "same bytes",
    "[raster][differential]") {
    const Folder here;
    const auto json = here.write("a.geojson", geojson(feature(square, R"({"name":"one"})") + "," +
                                                      feature(square, R"({"name":"two"})")));
    for (const auto* name : {"a.gpkg", "a.shp", "a.fgb"})
        REQUIRE(std::system(("ogr2ogr -nln a " + here.file(name).string() + " " + json.string() +
                             " 2>/dev/null")
                                .c_str()) == 0);
    for (const auto* name : {"a.geojson", "a.gpkg", "a.shp", "a.fgb"}) {
        CAPTURE(name);
        const auto found = read_polygons({here.file(name), {}, {}}, grid, {"name", {}});
        REQUIRE(found.all.size() == 2);
        for (const auto& one : found.all) CHECK(one.area_px == Approx(200).epsilon(1e-9));
    }
    const std::vector<FeatureColumn> columns{{"name", true}, {"mean", false}};
    const auto row = [](std::size_t i) {
        return FeatureRow{i == 0 ? 1 : 2,
                          {i == 0 ? "one" : "two"},
                          {i == 0 ? 2.5 : std::numeric_limits<double>::quiet_NaN()}};
    };
    for (const auto* name : {"x.gpkg", "y.gpkg"})
        write_features(here.file(name), {here.file("a.gpkg"), {}, {}}, "zones", columns, 2, row);
    CHECK(sha256_of_file(here.file("x.gpkg")) == sha256_of_file(here.file("y.gpkg")));
    const auto back = read_polygons({here.file("x.gpkg"), "zones", {}}, grid, {"name", {"mean"}});
    REQUIRE(back.all.size() == 2);
    CHECK(back.all[0].numbers[0] == 2.5);
    CHECK(std::isnan(back.all[1].numbers[0]));
    CHECK(back.all[1].area_px == Approx(200));
}

}  // namespace sunbudget::test
