#include "sunbudget/decide/zone_table.hpp"

#include <catch2/catch.hpp>

#include <cmath>
#include <cstdlib>
#include <fstream>
#include <numbers>
#include <sstream>

#include "../raster/input_support.hpp"
#include "sunbudget/base/units.hpp"
#include "sunbudget/raster/gdal_setup.hpp"
#include "sunbudget/raster/locator.hpp"

namespace sunbudget::test {

namespace fs = std::filesystem;
using Catch::Matchers::Contains;

namespace {

constexpr double pi = std::numbers::pi;

Polygon polygon_of(Rings rings, std::int64_t fid = 1) {
    Polygon polygon;
    polygon.fid = fid;
    polygon.id = std::to_string(fid);
    polygon.rings = std::move(rings);
    measure(polygon);
    return polygon;
}

Rings circle(double column, double row, double radius, int corners = 3600) {
    Ring ring;
    for (int i = 0; i < corners; ++i)
        ring.push_back({column + radius * std::cos(-2 * pi * i / corners),
                        row + radius * std::sin(-2 * pi * i / corners)});
    return {ring};
}

/// Rasters of a question, written and opened.
struct Ground {
    TemporaryFolder folder;
    Grid grid;
    explicit Ground(const Grid& g) : grid(g) { gdal_setup(std::uint64_t{64} << 20); }

    fs::path raster(const std::string& name, const std::function<double(int, int)>& value,
                    const std::string& type = "Float32") const {
        MadeRaster made{grid, type};
        made.bands = {value};
        made.options = {"TILED=YES"};
        return make_raster(folder.path() / (name + ".tif"), made);
    }
    [[nodiscard]] Source open(const fs::path& file, DataKind kind = DataKind::continuous) const {
        auto spec = spec_of(file, kind);
        return Source::open(spec, grid);
    }
    [[nodiscard]] ZoneQuestion asking(const std::function<double(int, int)>& value) const {
        ZoneQuestion question;
        question.grid = grid;
        ZoneLayer layer{"net_shortwave", true, 1.0, "W", {}, {}};
        layer.bands.push_back(open(raster("net_shortwave", value)));
        question.layers.push_back(std::move(layer));
        return question;
    }
};

/// 700 x 600 cells of 10 m at the middle of a UTM zone, where a metre is 1 / 0.9996 on the map.
const Grid town = square_grid(700, 600, 500000, 5400000, 10);

/// Ground area of a pixel there: 100 m2 of the map over the scale factor twice. It changes by 1e-7 over the grid's
/// 7 km from the central meridian ((x / R)^2 / 2 = 6e-7 at the far end).
constexpr double pixel_m2 = 100 / (0.9996 * 0.9996);

}  // namespace

TEST_CASE(
    "zones: a circle and a triangle on a constant and on a linear field give the closed forms",
    "[decide][property]") {
    const Ground ground(town);
    // Closed forms in pixels; pixel centres carry the linear field exactly, and weights are exact, but a pixel that is cut
    // counts with its middle's value: the border's pixels err by at most half a pixel's rise, mostly out.
    const auto zones =
        std::vector{polygon_of(circle(350.4, 290.3, 170.7), 1),
                    polygon_of({{{100.5, 80.25}, {180.25, 500.75}, {640.125, 333.5}}}, 2)};
    const double circle_px = pi * 170.7 * 170.7, triangle_px = zones[1].area_px;
    SECTION("constant") {
        const auto answers = zone_answers(ground.asking([](int, int) { return 612.5; }), zones, {});
        CHECK(answers[0].map_area_m2 ==
              Approx(circle_px * pixel_m2).epsilon(2e-6));  // 3,600 corners lack 5e-7
        CHECK(answers[1].map_area_m2 == Approx(triangle_px * pixel_m2).epsilon(1e-6));
        for (const auto& answer : answers) {
            const auto& f = answer.figures[0][0];
            CHECK(f.mean == Approx(612.5).epsilon(1e-12));  // rounding of a sum of 90,000 terms
            CHECK(f.std == Approx(0).margin(1e-6));
            CHECK(f.min == 612.5);
            CHECK(f.p90 == 612.5);
            CHECK(answer.nodata_share == 0);
            CHECK(f.weight == Approx(answer.surface_area_m2).epsilon(1e-12));
        }
    }
    SECTION("linear") {
        const auto answers = zone_answers(
            ground.asking([](int c, int r) { return 0.5 * (c + 0.5) + 0.25 * (r + 0.5); }), zones,
            {});
        // The mean of a linear field is its value at the centroid; a circle's spread is slope * radius / 2.
        const double at_circle = 0.5 * 350.4 + 0.25 * 290.3;
        const double at_triangle =
            0.5 * (100.5 + 180.25 + 640.125) / 3 + 0.25 * (80.25 + 500.75 + 333.5) / 3;
        const double rise = std::hypot(0.5, 0.25);
        // A thousand border pixels of ninety thousand, each off by a quarter of the rise and of either sign.
        CHECK(answers[0].figures[0][0].mean == Approx(at_circle).epsilon(1e-5));
        CHECK(answers[1].figures[0][0].mean == Approx(at_triangle).epsilon(1e-5));
        CHECK(answers[0].figures[0][0].std == Approx(rise * 170.7 / 2).epsilon(1e-4));
        CHECK(answers[0].figures[0][0].p50 == Approx(at_circle).margin(rise));
        // Below the tenth percentile lies the cap of a circle that holds a tenth of it: cut at 0.6870 of the radius
        // (solution of acos(t) - t sqrt(1 - t^2) = pi / 10).
        CHECK(answers[0].figures[0][0].p10 ==
              Approx(at_circle - 0.6870 * 170.7 * rise).margin(rise));
    }
}

TEST_CASE("zones: those that tile the raster add up to the raster's total", "[decide][property]") {
    const Ground ground(town);
    const auto value = [](int c, int r) { return (c * 7 + r * 13) % 1000 / 16.0; };
    // A fan of triangles around a middle that is on no pixel's border, over all of the grid.
    const std::vector<PixelPlace> rim{{0, 0},     {0, 211.3},  {0, 600}, {333.1, 600},
                                      {700, 600}, {700, 77.7}, {700, 0}, {411.9, 0}};
    std::vector<Polygon> zones;
    for (std::size_t i = 0; i < rim.size(); ++i)
        zones.push_back(polygon_of({{{301.37, 255.91}, rim[i], rim[(i + 1) % rim.size()]}},
                                   static_cast<std::int64_t>(i)));
    for (const auto& zone : zones) REQUIRE(zone.area_px > 0);
    auto question = ground.asking(value);
    const auto whole =
        zone_answers(question, {polygon_of({{{0, 0}, {0, 600}, {700, 600}, {700, 0}}})}, {});
    const auto parts = zone_answers(question, zones, {});
    double area = 0, total = 0;
    for (const auto& part : parts) {
        area += part.map_area_m2;
        total += part.figures[0][0].mean * part.figures[0][0].weight;
    }
    CHECK(area == Approx(whole[0].map_area_m2).epsilon(1e-11));
    CHECK(total ==
          Approx(whole[0].figures[0][0].mean * whole[0].figures[0][0].weight).epsilon(1e-11));
    // And that is the plain sum over the raster: pixel areas differ by 1.2e-6 at most here.
    double plain = 0;
    for (int r = 0; r < 600; ++r)
        for (int c = 0; c < 700; ++c) plain += value(c, r) * pixel_m2;
    CHECK(total == Approx(plain).epsilon(2e-6));
}

TEST_CASE("zones: the same bits whatever the threads", "[decide][differential]") {
    const Ground ground(town);
    auto question = ground.asking([](int c, int r) { return (c * c + r * 31) % 997 / 16.0; });
    std::vector<Polygon> zones;
    for (int i = 0; i < 60; ++i)
        zones.push_back(polygon_of(circle(20 + i * 11, 20 + i * 9, 3 + i * 2, 40), i));
    const auto one = zone_answers(question, zones, {1, {}}),
               four = zone_answers(question, zones, {4, {}});
    for (std::size_t i = 0; i < zones.size(); ++i) {
        CHECK(one[i].figures == four[i].figures);
        CHECK(one[i].map_area_m2 == four[i].map_area_m2);
    }
}

TEST_CASE("zones: on slopes sums use the surface, and both areas are there", "[decide][property]") {
    const Ground ground(town);
    auto question = ground.asking([](int, int) { return 500.0; });
    question.slope_deg = ground.open(ground.raster("slope", [](int, int) { return 60.0; }));
    const auto answers = zone_answers(question, {polygon_of(circle(300, 300, 50))}, {});
    CHECK(answers[0].surface_area_m2 ==
          Approx(2 * answers[0].map_area_m2).epsilon(1e-6));  // 1 / cos 60
    CHECK(answers[0].figures[0][0].weight == Approx(answers[0].surface_area_m2).epsilon(1e-12));
}

TEST_CASE("zones: nodata, the grid's edge, a zone beyond it and one smaller than a pixel",
          "[decide][edge]") {
    const Ground ground(town);
    const double nan = std::numeric_limits<double>::quiet_NaN();
    const auto question = ground.asking([&](int c, int) { return c < 100 ? nan : 400.0; });
    const auto square = [](double left, double top, double side) {
        return polygon_of(
            {{{left, top}, {left, top + side}, {left + side, top + side}, {left + side, top}}});
    };
    const auto answers =
        zone_answers(question,
                     {square(90, 50, 40), square(-30, 50, 40), square(-500, -500, 40),
                      square(200.4, 100.4, 0.1), square(20, 20, 10)},
                     {});
    CHECK(answers[0].nodata_share == Approx(0.25));
    CHECK(answers[0].map_area_m2 == Approx(1600 * pixel_m2).epsilon(1e-6));
    CHECK(answers[0].figures[0][0].weight == Approx(1200 * pixel_m2).epsilon(1e-6));
    CHECK(answers[1].nodata_share == 1);  // ten columns on the grid, all without a value
    CHECK(answers[2].nodata_share == 1);
    CHECK(answers[2].map_area_m2 == 0);
    CHECK(answers[3].map_area_m2 == Approx(0.01 * pixel_m2).epsilon(1e-6));
    CHECK(answers[3].figures[0][0].mean == 400);
    CHECK(answers[4].figures[0][0].weight == 0);
}

TEST_CASE("zones: shares of classes, and a note where zones differ by light alone",
          "[decide][property]") {
    const Ground ground(town);
    auto question = ground.asking([](int, int) { return 400.0; });
    question.classes =
        ground.open(ground.raster(
                        "cover", [](int c, int) { return c < 350 ? 50 : 10; }, "Byte"),
                    DataKind::code);
    question.class_names = {{50, "Built-up"}};
    const auto answers =
        zone_answers(question,
                     {polygon_of(circle(100, 100, 30)), polygon_of(circle(200, 100, 30)),
                      polygon_of(circle(350, 100, 30))},
                     {});
    CHECK(answers[0].commonest_class().share == Approx(1));
    CHECK(answers[2].class_shares.at(10) == Approx(0.5));
    const auto notes = zone_notes(question, answers);
    REQUIRE(notes.size() == 1);
    CHECK_THAT(notes[0],
               Contains("2 zones") && Contains("50 (Built-up)") && Contains("one albedo"));
}

TEST_CASE("zones: pixel areas of a geographic grid follow the ellipsoid", "[decide][property]") {
    const Grid degrees{360, 180, {-180, 1, 0, 90, 0, -1}, "OGC:CRS84"};
    Grid grid = degrees;
    grid.crs_wkt = square_grid(1, 1, 0, 0, 1, "EPSG:4326").crs_wkt;
    const Ground ground(grid);
    const auto answers = zone_answers(ground.asking([](int, int) { return 1.0; }),
                                      {polygon_of({{{0, 0}, {0, 180}, {360, 180}, {360, 0}}})}, {});
    // The WGS84 ellipsoid's area (from its axes, closed form). A pixel is taken as flat: 1 degree errs by up to
    // (pi / 180)^2 / 24 each way, 2.5e-5; a 30 m pixel by 1e-12.
    CHECK(answers[0].map_area_m2 == Approx(5.10065621724e14).epsilon(3e-5));
}

TEST_CASE("zones: the table has a row a zone and period, in every cell what the answers say",
          "[decide][property]") {
    const Ground ground(town);
    auto question = ground.asking([](int c, int) { return c < 350 ? 300.0 : 600.0; });
    question.layers[0].bands.push_back(
        ground.open(ground.raster("second", [](int, int) { return 100.0; })));
    question.periods = {"June", "July"};
    question.above = 450;
    std::vector<Polygon> zones{polygon_of(circle(100, 100, 30), 7),
                               polygon_of(circle(500, 100, 20), 9)};
    zones[0].id = "north, \"old\"";
    const auto answers = zone_answers(question, zones, {});
    const ZoneTable table(question, zones, answers, "parcel");
    REQUIRE(table.rows() == 4);
    table.write_csv(ground.folder.path() / "zones.csv");
    std::ifstream in(ground.folder.path() / "zones.csv");
    std::string header, first;
    std::getline(in, header);
    std::getline(in, first);
    CHECK(header ==
          "parcel,period,map_area_m2,surface_area_m2,nodata_share,one_class_share,net_shortwave_"
          "mean,net_shortwave_sum,"
          "net_shortwave_min,net_shortwave_max,net_shortwave_std,net_shortwave_p10,net_shortwave_"
          "p50,net_shortwave_p90,"
          "net_shortwave_uncertainty,net_shortwave_above_share,net_shortwave_rank_mean,net_"
          "shortwave_rank_sum");
    CHECK(first.starts_with("\"north, \"\"old\"\"\",June,"));
    const auto row = table.row(2);  // the second zone in June
    CHECK(row.fid == 9);
    CHECK(row.numbers[4] == Approx(600));
    CHECK(row.numbers[5] == Approx(600 * pi * 400 * pixel_m2).epsilon(1e-5));
    CHECK(row.numbers[13] == Approx(1));                        // above 450 throughout
    CHECK(row.numbers[14] == 1);                                // first by mean,
    CHECK(row.numbers[15] == 2 - (600.0 * 400 > 300.0 * 900));  // second by sum
    CHECK(table.row(3).numbers[4] == Approx(100));
}

TEST_CASE("zones: real parcels against the same sums by many samples a pixel",
          "[decide][differential]") {
    SUNBUDGET_NEEDS_DATA();
    gdal_setup(std::uint64_t{64} << 20);
    struct Case {
        const char *raster, *polygons;
        std::size_t every;
    };
    for (const auto& [raster, file, every] :
         {Case{"zion_utah/srtm.tif", "zion_utah/zion.gpkg", 1},
          Case{"alexandria_urban/dsm.tif", "alexandria_urban/buildings.geojson", 40},
          Case{"olinda_brazil/olinda_dem_utm25s.tif", "olinda_brazil/olinda1.shp", 3}}) {
        CAPTURE(raster);
        ZoneRasters asked;
        asked.files = {*real_data(raster)};
        const auto question = question_about(asked);
        const auto polygons = read_polygons({*real_data(file), {}, {}}, question.grid, {});
        REQUIRE(!polygons.all.empty());
        const auto answers = zone_answers(question, polygons.all, {2, {}});
        const auto heights = read_all(spec_of(*real_data(raster)));
        for (std::size_t z = 0; z < polygons.all.size(); z += every) {
            const auto& zone = polygons.all[z];
            CAPTURE(zone.id);
            // Points n x n a pixel, fewer for large zones: enough for some ten thousand in a zone.
            const double outline = (zone.right - zone.left) * (zone.bottom - zone.top);
            const int n = std::clamp(static_cast<int>(200 / std::sqrt(outline)), 1, 40);
            double points = 0, sum = 0, sum_of_squares = 0;
            for (int r = std::max(0, static_cast<int>(zone.top));
                 r < std::min<double>(heights.height(), zone.bottom); ++r)
                for (int k = 0; k < n; ++k) {
                    // Where a line of points crosses the outline: inside between the first and second, and so on.
                    const double y = r + (k + 0.5) / n;
                    std::vector<double> crossings;
                    for (const auto& ring : zone.rings)
                        for (std::size_t j = 0; j < ring.size(); ++j) {
                            const auto &a = ring[j], &b = ring[(j + 1) % ring.size()];
                            if ((a.row > y) != (b.row > y))
                                crossings.push_back(a.column + (y - a.row) / (b.row - a.row) *
                                                                   (b.column - a.column));
                        }
                    std::sort(crossings.begin(), crossings.end());
                    for (std::size_t j = 0; j + 1 < crossings.size(); j += 2)
                        for (double i = std::ceil(crossings[j] * n - 0.5);
                             i < crossings[j + 1] * n - 0.5; ++i) {
                            const long column = static_cast<long>(std::floor((i + 0.5) / n));
                            if (column < 0 || column >= heights.width()) continue;
                            const double value =
                                static_cast<double>(heights.at(static_cast<int>(column), r));
                            if (std::isnan(value)) continue;
                            ++points;
                            sum += value;
                            sum_of_squares += value * value;
                        }
                }
            const auto& figures = answers[z].figures[0][0];
            if (points < 100) continue;
            const double mean = sum / points,
                         spread = std::sqrt(std::max(0.0, sum_of_squares / points - mean * mean));
            // Points on an outline of L pixels err by about sqrt(L n) of them, each by the spread; pixel areas, which the
            // samples leave out, change by 1 % over the largest grid here (Zion, in degrees): 1 % of the spread.
            const double line = 2 * (zone.right - zone.left + zone.bottom - zone.top) * n;
            CHECK(figures.mean ==
                  Approx(mean).margin(spread * (3 * std::sqrt(line) / points + 0.01) + 1e-4));
        }
    }
}

}  // namespace sunbudget::test
