// Figures of zones: within a run, from its folder, from files.
#include <catch2/catch.hpp>

#include "desk.hpp"

using namespace sunbudget::test;
using Catch::Contains;

namespace {

/// Two parcels and a sliver on the desk's cover, in longitude and latitude.
void make_parcels(const Desk& desk) {
    const auto in_utm = [](const std::string& ring, const std::string& name) {
        return R"({"type":"Feature","properties":{"name":")" + name +
               R"("},"geometry":{"type":"Polygon","coordinates":[[)" + ring + "]]}}";
    };
    write(
        desk.path("utm.geojson"),
        R"({"type":"FeatureCollection","crs":{"type":"name","properties":{"name":"urn:ogc:def:crs:EPSG::32633"}},"features":[)" +
            in_utm("[500100,5499900],[500100,5499300],[500900,5499300],[500900,5499900],[500100,"
                   "5499900]",
                   "mill, old") +
            "," +
            in_utm("[501000,5499800],[501400,5498700],[502000,5499500],[501000,5499800]",
                   "school") +
            "," +
            in_utm("[502000.2,5499400],[502000.2,5499300],[502000.7,5499300],[502000.7,5499400],["
                   "502000.2,5499400]",
                   "sliver") +
            "]}");
    REQUIRE(shell("cd " + word(desk.path()) +
                  " && ogr2ogr -t_srs EPSG:4326 -nln parcels parcels.gpkg utm.geojson")
                .exit_code == 0);
}

const std::string zones_set =
    "zones={file: parcels.gpkg, id: name, layers: [albedo, net_shortwave], above: 500}";

}  // namespace

TEST_CASE("zones: a run and the command on its folder give the same bytes", "[cli][differential]") {
    const Desk desk;
    make_parcels(desk);
    const auto ran = desk.run({"run", "plan.yaml", "--set", zones_set});
    CAPTURE(ran.err);
    REQUIRE(ran.exit_code == 0);
    CHECK_THAT(ran.err, Contains("figures of 3 zones"));
    CHECK(names_in(desk.path("out")) == std::vector<std::string>{"SHA256SUMS", "albedo.tif",
                                                                 "net_shortwave.tif", "run.json",
                                                                 "zones.csv", "zones.gpkg"});
    CHECK(shell("cd " + word(desk.path("out")) + " && sha256sum -c --quiet SHA256SUMS").exit_code ==
          0);
    CHECK_THAT(content(desk.path("out/run.json")),
               Contains("\"zones.file\"") && Contains("\"count\": 3"));
    const auto table = content(desk.path("out/zones.csv"));
    CHECK_THAT(table, Contains("\"mill, old\",") && Contains("net_shortwave_above_share") &&
                          Contains("class_50_share"));

    const auto again =
        desk.run({"zones", "out", "--polygons", "parcels.gpkg", "--id", "name", "--layers",
                  "albedo,net_shortwave", "--above", "500", "--cover", "cover.tif", "--classes",
                  "worldcover", "-o", "again.csv", "--gpkg", "again.gpkg"});
    CAPTURE(again.err);
    REQUIRE(again.exit_code == 0);
    CHECK(content(desk.path("again.csv")) == table);
    CHECK(content(desk.path("again.gpkg")) == content(desk.path("out/zones.gpkg")));

    // Once more with one thread: the same bytes; and a complete folder stays as it is.
    CHECK(desk.run({"run", "plan.yaml", "--set", zones_set, "--threads", "1", "--out", "single"})
              .exit_code == 0);
    CHECK(content(desk.path("single/zones.csv")) == table);
    CHECK_THAT(desk.run({"run", "plan.yaml", "--set", zones_set}).err,
               Contains("complete already"));
}

TEST_CASE("zones: mean and area of a parcel as GDAL's own pixels give them",
          "[cli][differential]") {
    const Desk desk;
    make_parcels(desk);
    REQUIRE(desk.run({"run", "plan.yaml", "--set", zones_set}).exit_code == 0);
    // The first parcel spans columns 3 1/3 to 30 and rows 3 1/3 to 23 1/3 of the 80 x 60 cells.
    const auto albedo = pixels_of(desk.path("out/albedo.tif"));
    double sum = 0, weight = 0;
    for (int r = 3; r < 24; ++r)
        for (int c = 3; c < 30; ++c) {
            const double w = (c == 3 ? 2.0 / 3 : 1) * (r == 3 ? 2.0 / 3 : r == 23 ? 1.0 / 3 : 1);
            sum += w * albedo[static_cast<std::size_t>(r * 80 + c)];
            weight += w;
        }
    const auto table = content(desk.path("out/zones.csv"));
    const auto row = table.substr(table.find("\"mill, old\","));
    std::vector<double> cells;
    for (std::size_t at = row.find("\",") + 2; at < row.find('\n');) {
        const auto end = std::min(row.find(',', at), row.find('\n', at));
        cells.push_back(end > at ? std::stod(row.substr(at, end - at)) : 0);
        at = end + 1;
    }
    // Through longitude and latitude and back the corners keep a millimetre.
    CHECK(cells[4] == Approx(sum / weight).epsilon(1e-6));
    // A cell is 900 m2 of the map, at the central meridian 1 / 0.9996^2 of that on the ground.
    CHECK(cells[0] == Approx(weight * 900 / (0.9996 * 0.9996)).epsilon(1e-6));
}

TEST_CASE("zones: mistakes are said with what to do", "[cli][edge]") {
    const Desk desk;
    make_parcels(desk);
    const auto missing =
        desk.run({"run", "plan.yaml", "--set", "zones={file: parcels.gpkg, id: nmae}"});
    CHECK(missing.exit_code == 3);
    CHECK_THAT(missing.err, Contains("no field \"nmae\"") && Contains("did you mean \"name\"?"));
    const auto not_written = desk.run(
        {"check", "plan.yaml", "--set", "zones={file: parcels.gpkg, layers: [insolation]}"});
    CHECK(not_written.exit_code == 2);
    CHECK_THAT(not_written.err, Contains("the run does not write insolation"));
    const auto no_run = desk.run({"zones", ".", "--polygons", "parcels.gpkg", "-o", "x.csv"});
    CHECK(no_run.exit_code == 3);
    CHECK_THAT(no_run.err, Contains("no complete run"));
    CHECK(names_in(desk.path()) ==
          std::vector<std::string>{"cover.tif", "parcels.gpkg", "plan.yaml", "utm.geojson"});
}
