#include <array>
#include <catch2/catch.hpp>
#include <cmath>
#include <cstdio>
#include <fstream>
#include <sstream>

#include "input_support.hpp"
#include "sunbudget/base/units.hpp"
#include "sunbudget/raster/grid_build.hpp"
#include "sunbudget/raster/locator.hpp"

using namespace sunbudget;
using namespace sunbudget::test;
using Catch::Matchers::Contains;

namespace {

/// Longitude and latitude in degrees as PROJ's own program answers, one point a line.
std::vector<std::array<double, 2>> cs2cs(const std::string& crs,
                                         const std::vector<std::array<double, 2>>& points) {
    const TemporaryFolder folder;
    const auto in = folder.path() / "in.txt", out = folder.path() / "out.txt";
    {
        std::ofstream file(in);
        file.precision(17);
        for (const auto& point : points) file << point[0] << ' ' << point[1] << '\n';
    }
    const auto command =
        "cs2cs -f %.12f " + crs + " +to OGC:CRS84 " + in.string() + " > " + out.string();
    REQUIRE(std::system(command.c_str()) == 0);
    std::vector<std::array<double, 2>> answers;
    std::ifstream file(out);
    for (std::string line; std::getline(file, line);) {
        std::istringstream words(line);
        std::string x, y;
        words >> x >> y;
        answers.push_back({std::strtod(x.c_str(), nullptr), std::strtod(y.c_str(), nullptr)});
    }
    return answers;
}

}  // namespace

TEST_CASE("Locator: places agree with PROJ's own program", "[raster][differential]") {
    const std::string crs = GENERATE("EPSG:32612", "EPSG:3566", "EPSG:3031", "EPSG:4326",
                                     "EPSG:3857", "EPSG:5070", "EPSG:21781");
    CAPTURE(crs);
    // A square in the middle of where the CRS is used.
    const auto grid = crs == "EPSG:4326"    ? square_grid(40, 40, 175.0, 80.0, 0.1, crs)
                      : crs == "EPSG:3566"  ? square_grid(40, 40, 1174576.0, 6208778.0, 3000, crs)
                      : crs == "EPSG:3031"  ? square_grid(40, 40, 2301440.0, 495688.0, 3000, crs)
                      : crs == "EPSG:5070"  ? square_grid(40, 40, -1493067.0, 1724974.0, 3000, crs)
                      : crs == "EPSG:21781" ? square_grid(40, 40, 779503.0, 190480.0, 100, crs)
                                            : square_grid(40, 40, 313905.0, 4136085.0, 3000, crs);
    std::vector<double> columns, rows;
    std::vector<std::array<double, 2>> points;
    for (int i = 0; i < 40; ++i) {
        columns.push_back(i + 0.25);
        rows.push_back(39.5 - i * 0.7);
        points.push_back({grid.easting(columns.back(), rows.back()),
                          grid.northing(columns.back(), rows.back())});
    }
    // The program takes EPSG:4326 latitude first; CRS84 is the same with longitude first.
    const auto expected = cs2cs(crs == "EPSG:4326" ? "OGC:CRS84" : crs, points);
    REQUIRE(expected.size() == points.size());
    std::vector<double> latitude_rad(40), longitude_rad(40);
    const Locator locator(grid);
    locator.locate(columns, rows, latitude_rad, longitude_rad);
    for (std::size_t i = 0; i < points.size(); ++i) {
        // Twelve decimals are printed; 1e-11 degrees are a micrometre.
        CHECK(deg_from_rad(longitude_rad[i]) == Approx(expected[i][0]).margin(1e-11));
        CHECK(deg_from_rad(latitude_rad[i]) == Approx(expected[i][1]).margin(1e-11));
        const auto alone = locator.clone().at(columns[i], rows[i]);
        REQUIRE(alone);
        CHECK(alone->latitude_rad == latitude_rad[i]);
        CHECK(alone->longitude_rad == longitude_rad[i]);
    }
}

TEST_CASE("Locator: pixels off the globe have no place, the others have", "[raster][edge]") {
    SUNBUDGET_NEEDS_DATA();
    const auto grid = inspect(raster_name(awkward("real/goes.tif"))).grid;
    const Locator locator(grid);
    CHECK_FALSE(locator.at(0.5, 0.5));
    const auto middle = locator.at(0.5 * grid.width, 0.5 * grid.height);
    REQUIRE(middle);
    // The satellite stands over 75 W on the equator; the middle is within a pixel (20 km) of it.
    CHECK(deg_from_rad(middle->longitude_rad) == Approx(-75).margin(0.2));
    CHECK(deg_from_rad(middle->latitude_rad) == Approx(0).margin(0.2));
}

TEST_CASE("Locator: longitudes come back within half a turn", "[raster][edge]") {
    const Locator locator(square_grid(20, 10, 350, 5, 1, "EPSG:4326"));
    const auto place = locator.at(0, 0);
    REQUIRE(place);
    CHECK(deg_from_rad(place->longitude_rad) == Approx(-10).margin(1e-12));
}

TEST_CASE("place_in: a point of another CRS falls where PROJ puts it", "[raster][differential]") {
    const auto grid = square_grid(100, 100, 313905, 4136085, 30, "EPSG:32612");
    const auto where = Locator(grid).at(12.25, 70.5);
    REQUIRE(where);
    const auto place = place_in(grid, deg_from_rad(where->longitude_rad),
                                deg_from_rad(where->latitude_rad), crs_wkt_of("EPSG:4326"));
    REQUIRE(place);
    // There and back through two projections: a micrometre.
    CHECK(place->column == Approx(12.25).margin(1e-7));
    CHECK(place->row == Approx(70.5).margin(1e-7));
    const auto own = place_in(grid, 313935, 4136085 - 45, grid.crs_wkt);
    REQUIRE(own);
    CHECK(own->column == 1);
    CHECK(own->row == 1.5);
}

TEST_CASE("crs_wkt_of: knows codes, WKT and PROJ strings, and says what it does not",
          "[raster][edge]") {
    const auto utm = crs_wkt_of("EPSG:32633");
    CHECK(same_crs(utm, crs_wkt_of(utm)));
    CHECK(same_crs(crs_wkt_of("+proj=utm +zone=33 +datum=WGS84"), utm));
    CHECK_FALSE(same_crs(utm, crs_wkt_of("EPSG:32632")));
    CHECK(crs_name(utm) == "WGS 84 / UTM zone 33N (EPSG:32633)");
    CHECK(is_geographic(crs_wkt_of("EPSG:4326")));
    CHECK_FALSE(is_geographic(utm));
    CHECK(metres_per_unit(crs_wkt_of("EPSG:3566")) == Approx(1200.0 / 3937).epsilon(1e-12));
    CHECK_THAT(error_text([] { (void)crs_wkt_of("EPSG:999999"); }),
               Contains("this CRS is not known"));
    CHECK_THAT(error_text([] { (void)crs_wkt_of(""); }), Contains("this CRS is not known"));
    CHECK_THAT(error_text([] { (void)crs_wkt_of("EPSG:4978"); }), Contains("geocentric"));
    // A file or an address is no CRS, though GDAL would read both.
    CHECK_THAT(error_text([] { (void)crs_wkt_of("/etc/hostname"); }),
               Contains("this CRS is not known"));
    CHECK_THAT(error_text([] { (void)crs_wkt_of("http://127.0.0.1:9/crs"); }),
               Contains("this CRS is not known"));
}

TEST_CASE("crs_wkt_of: drops the height part of a compound CRS", "[raster][edge]") {
    CHECK(same_crs(crs_wkt_of("EPSG:4326+5773"), crs_wkt_of("EPSG:4326")));
    CHECK(same_crs(crs_wkt_of("EPSG:4979"), crs_wkt_of("EPSG:4326")));
}

TEST_CASE("upright: turns south-up and mirrored grids on the same ground", "[raster][property]") {
    const auto grid = square_grid(7, 5, 100, 200, 10);
    const auto flip_rows = [](Grid g) {
        g.affine[3] += g.height * g.affine[5];
        g.affine[5] = -g.affine[5];
        return g;
    };
    const auto flip_columns = [](Grid g) {
        g.affine[0] += g.width * g.affine[1];
        g.affine[1] = -g.affine[1];
        return g;
    };
    CHECK(upright(grid) == std::pair(grid, Storage::north_up));
    CHECK(upright(flip_rows(grid)) == std::pair(grid, Storage::south_up));
    CHECK(upright(flip_columns(grid)) == std::pair(grid, Storage::mirrored));
    CHECK(upright(flip_rows(flip_columns(grid))) == std::pair(grid, Storage::south_up_mirrored));
    auto rotated = grid;
    rotated.affine = {100, 8, 6, 200, 6, -8};
    CHECK(upright(rotated) == std::pair(rotated, Storage::rotated));
    auto noisy = grid;
    noisy.affine[2] = 1e-9;  // moves the far corner by 5e-9 m
    CHECK(upright(noisy) == std::pair(grid, Storage::north_up));
}

TEST_CASE("grid_from: covers the bounds with whole cells from the north-west on",
          "[raster][property]") {
    const auto grid = grid_from(crs_wkt_of("EPSG:32633"), {1000, 2000, 1095, 2301}, 30);
    CHECK(grid.width == 4);
    CHECK(grid.height == 11);
    CHECK(grid.affine == Affine{1000, 30, 0, 2301, 0, -30});
    // 0.1 cannot be written in binary; ten cells stay ten.
    CHECK(grid_from(crs_wkt_of("EPSG:4326"), {0, 0, 1, 1}, 0.1).width == 10);
    const auto wkt = crs_wkt_of("EPSG:32633");
    CHECK_THAT(error_text([&] {
                   (void)grid_from(wkt, {5, 0, 5, 1}, 1);
               }),
               Contains("hold no area"));
    CHECK_THAT(error_text([&] {
                   (void)grid_from(wkt, {0, 0, 1, 1}, -1);
               }),
               Contains("a cell of -1"));
    CHECK_THAT(error_text([&] {
                   (void)grid_from(wkt, {0, 0, 1e7, 1e7}, 0.001);
               }),
               Contains("the grid would have"));
}

TEST_CASE("cropped: stays on the lattice, also in whole multiples of its cells",
          "[raster][property]") {
    const auto grid = square_grid(100, 80, 1000, 5000, 30);
    CHECK(cropped(grid, {}, {}) == grid);
    const auto part = cropped(grid, Bounds{1031, 4700, 1100, 4999}, {});
    CHECK(part.affine == Affine{1030, 30, 0, 5000, 0, -30});
    CHECK(part.width == 3);
    CHECK(part.height == 10);
    const auto coarse = cropped(grid, Bounds{1200, 4600, 1500, 4800}, 90);
    CHECK(coarse.affine == Affine{1180, 90, 0, 4820, 0, -90});
    CHECK(coarse.width == 4);
    CHECK(coarse.height == 3);
    CHECK(cropped(grid, {}, 90).width == 34);  // 33.3 threes: the last is partly beyond the edge
    CHECK(cropped(grid, Bounds{0, 0, 1e6, 1e6}, {}) == grid);
    CHECK_THAT(error_text([&] {
                   (void)cropped(grid, Bounds{0, 0, 10, 10}, {});
               }),
               Contains("the bounds lie outside the raster"));
    auto rotated = grid;
    rotated.affine = {1000, 18, 24, 5000, 24, -18};
    CHECK_THAT(error_text([&] { (void)cropped(rotated, {}, 60); }), Contains("rotated"));
    const auto cut = cropped(rotated, Bounds{1500, 4900, 1600, 5000}, {});
    CHECK(cut.width < rotated.width);
    CHECK(same_grid(cropped(cut, bounds_of(cut), {}), cut));
}

TEST_CASE("describe: says size, cell, CRS", "[raster][edge]") {
    CHECK(describe(square_grid(10, 20, 0, 100, 30)) ==
          "10 x 20 cells of 30 x 30 m, WGS 84 / UTM zone 33N (EPSG:32633)");
    CHECK_THAT(describe(square_grid(10, 20, 0, 50, 0.5, "EPSG:4326")), Contains("0.5 x 0.5 deg"));
}

TEST_CASE("cell_size: metres on the ground, degrees and feet included", "[raster][property]") {
    const auto utm = cell_size(square_grid(10, 10, 500000, 5300000, 30));
    // On the central meridian of a UTM zone the scale is 0.9996. The sphere used for this figure is
    // within 0.4 % of the ellipsoid in any direction.
    CHECK(utm.width_m == Approx(30 / 0.9996).epsilon(0.004));
    CHECK(utm.height_m == Approx(30 / 0.9996).epsilon(0.006));
    const auto degrees = cell_size(square_grid(10, 10, 10, 60.005, 0.001, "EPSG:4326"));
    // 60 N: a degree of longitude is half as long as at the equator (111.32 km).
    CHECK(degrees.width_m == Approx(55.66).epsilon(0.005));
    CHECK(degrees.height_m == Approx(111.3).epsilon(0.005));
}
