#include <catch2/catch.hpp>
#include <cmath>
#include <cstdlib>
#include <limits>

#include "input_support.hpp"
#include "sunbudget/base/error.hpp"
#include "sunbudget/raster/gdal_setup.hpp"
#include "sunbudget/raster/grid_build.hpp"

using namespace sunbudget;
using namespace sunbudget::test;
using Catch::Matchers::Contains;

namespace {

constexpr double not_a_number = std::numeric_limits<double>::quiet_NaN();
constexpr double endless = std::numeric_limits<double>::infinity();

/// 0, 1, 2, ... row by row.
std::function<double(int, int)> counting(int width) {
    return [width](int c, int r) { return static_cast<double>(r * width + c); };
}

TEST_CASE("inspect: bands keep their names in a file with overviews", "[raster][edge]") {
    const TemporaryFolder folder;
    gdal_setup(std::uint64_t{64} << 20);
    const auto file = folder.path() / "named.tif";
    const auto script =
        "from osgeo import gdal; d = gdal.GetDriverByName('GTiff').Create('" + file.string() +
        "', 600, 600, 2); d.SetGeoTransform((0, 10, 0, 6000, 0, -10)); "
        "d.SetProjection('EPSG:32633'); "
        "d.GetRasterBand(2).SetDescription('July'); d.BuildOverviews('NEAREST', [2])";
    REQUIRE(std::system(("/usr/bin/python3 -c \"" + script + "\"").c_str()) == 0);
    const auto info = inspect(raster_name(file.string() + ":July"));
    CHECK(info.band == 2);
    CHECK(info.band_names.back() == "July");
}

}  // namespace

TEST_CASE("raster_name: splits a band's number or name off the path", "[raster][edge]") {
    const TemporaryFolder folder;
    CHECK(raster_name("a/b.tif") == RasterName{"a/b.tif", 0, ""});
    CHECK(raster_name("a/b.tif:3") == RasterName{"a/b.tif", 3, ""});
    CHECK(raster_name("a/b.tif:nir") == RasterName{"a/b.tif", 0, "nir"});
    CHECK(raster_name("12:30/b.tif") == RasterName{"12:30/b.tif", 0, ""});
    CHECK_THAT(error_text([] { (void)raster_name("b.tif:0"); }), Contains("bands count from 1"));
    for (const char* text : {"b.tif", "b.tif:2", "b.tif:red"})
        CHECK(text_of(raster_name(text)) == text);
    const auto odd = make_raster(folder.path() / "odd:2",
                                 {.grid = square_grid(2, 2, 0, 100, 10), .bands = {counting(2)}});
    CHECK(raster_name(odd.string()).path == odd);
}

TEST_CASE("inspect: finds bands by name and suggests the nearest", "[raster][edge]") {
    SUNBUDGET_NEEDS_DATA();
    const auto logo = real_data("dem/ecuador_slope_elev_10m.tif")->string();
    CHECK(inspect(raster_name(logo + ":2")).band == 2);
    CHECK_THAT(error_text([&] { (void)inspect(raster_name(logo + ":3")); }),
               Contains("there is no band 3") && Contains("bands 1 to 2"));
    const auto first = inspect(raster_name(logo));
    CHECK(first.band == 1);
    REQUIRE(first.warnings.size() == 1);
    CHECK_THAT(first.warnings[0], Contains("2 bands and none is named: band 1 is read"));
}

TEST_CASE("inspect: a missing file brings the nearest name", "[raster][edge]") {
    const TemporaryFolder folder;
    const auto there = make_raster(folder.path() / "elevation.tif",
                                   {.grid = square_grid(2, 2, 0, 100, 10), .bands = {counting(2)}});
    const auto text = error_text([&] { (void)inspect({folder.path() / "elevaton.tif"}); });
    CHECK_THAT(text, Contains("no such file") && Contains("did you mean \"elevation.tif\"?"));
    CHECK_THAT(error_text([&] { (void)inspect({folder.path() / "sub" / "a.tif"}); }),
               Contains("no such folder"));
    CHECK_THAT(error_text([&] { (void)inspect({folder.path()}); }), Contains("this is a folder"));
}

TEST_CASE("inspect: reads class names from an attribute table and knows a palette",
          "[raster][vector]") {
    SUNBUDGET_NEEDS_DATA();
    const auto info =
        inspect(raster_name(real_data("landcover/nlcd_puertorico_3km.tif")->string()));
    CHECK(info.has_palette);
    // data/landcover/nlcd_puertorico_3km.tif.aux.xml, field "Land Cover Class", rows 11 and 95, spelt as there
    CHECK(info.class_names.at(11) == "Open Water");
    CHECK(info.class_names.at(95) == "Emergent Herbaceuous Wetlands");
    CHECK(info.class_names.count(0) <= 1);
}

TEST_CASE("inspect: Point files keep the corner that GDAL gives", "[raster][vector]") {
    SUNBUDGET_NEEDS_DATA();
    const auto info = inspect({awkward("real/cog_dateline.tif")});
    CHECK(info.pixel_is_point);
    // gdalinfo: Origin = (570585, 5847615)
    CHECK(info.grid.affine[0] == 570585);
    CHECK(info.grid.affine[3] == 5847615);
}

TEST_CASE("inspect: nodata that the band cannot hold is ignored and said", "[raster][edge]") {
    const TemporaryFolder folder;
    const auto byte =
        make_raster(folder.path() / "byte.tif", {.grid = square_grid(2, 2, 0, 100, 10),
                                                 .type = "Byte",
                                                 .bands = {counting(2)},
                                                 .nodata = -9999});
    const auto info = inspect({byte});
    CHECK_FALSE(info.nodata);
    REQUIRE(info.warnings.size() == 1);
    CHECK_THAT(info.warnings[0], Contains("nodata -9999 cannot occur in a band of Byte"));
    CHECK(possible_nodata(PixelType::u8, 255) == 255);
    CHECK_FALSE(possible_nodata(PixelType::u8, 0.5));
    CHECK_FALSE(possible_nodata(PixelType::i16, not_a_number));
    CHECK(possible_nodata(PixelType::f32, -1.7976931348623157e308) ==
          static_cast<double>(std::numeric_limits<float>::lowest()));
    auto spec = spec_of(byte);
    spec.nodata = 300;
    CHECK_THAT(error_text([&] { (void)Source::open(spec, info.grid); }),
               Contains("nodata 300 cannot occur in a band of Byte"));
}

TEST_CASE("Reader: nodata, NaN, infinities and the mask all mean no value", "[raster][edge]") {
    const TemporaryFolder folder;
    const std::vector<double> row{1, -9999, not_a_number, endless, -endless, 6, 7, 8};
    const auto file =
        make_raster(folder.path() / "gaps.tif",
                    {.grid = square_grid(8, 1, 0, 100, 10),
                     .bands = {[&](int c, int) { return row[static_cast<std::size_t>(c)]; }},
                     .nodata = -9999,
                     .mask = [](int c, int) { return c != 6; }});
    CHECK(inspect({file}).mask == MaskKind::mask_band);
    const auto source = Source::open(spec_of(file), inspect({file}).grid);
    Reader reader(source);
    Plane<float> out;
    reader.read({0, 0, 8, 1}, out);
    CHECK(out.at(0, 0) == 1);
    for (const int c : {1, 2, 3, 4, 6}) CHECK(std::isnan(out.at(c, 0)));
    CHECK(out.at(5, 0) == 6);
    CHECK(out.at(7, 0) == 8);
    CHECK(reader.infinities() == 2);
}

TEST_CASE("Reader: nodata is compared before scaling, the user's instead of the file's",
          "[raster][edge]") {
    const TemporaryFolder folder;
    const auto file =
        make_raster(folder.path() / "scaled.tif", {.grid = square_grid(4, 1, 0, 100, 10),
                                                   .type = "Int16",
                                                   .bands = {counting(4)},
                                                   .nodata = 1,
                                                   .scaling = Scaling{0.5, 10}});
    auto spec = spec_of(file);
    spec.profile_scaling = Scaling{7, 7};
    spec.profile_nodata = 3;
    auto out = read_all(spec);
    CHECK(out.at(0, 0) == 10.0f);
    CHECK(std::isnan(out.at(1, 0)));
    CHECK(out.at(3, 0) == 11.5f);
    spec.nodata = 0;
    spec.scaling = Scaling{2, 0};
    out = read_all(spec);
    CHECK(std::isnan(out.at(0, 0)));
    CHECK(out.at(1, 0) == 2.0f);
    const auto source = Source::open(spec, inspect(spec.name).grid);
    CHECK(source.scaling_origin() == Origin::user);
    CHECK(source.nodata_origin() == Origin::user);
}

TEST_CASE("Reader: a profile fills what neither user nor file says", "[raster][edge]") {
    const TemporaryFolder folder;
    const auto file = make_raster(
        folder.path() / "plain.tif",
        {.grid = square_grid(4, 1, 0, 100, 10), .type = "UInt16", .bands = {counting(4)}});
    auto spec = spec_of(file);
    spec.profile_scaling = Scaling{1e-4, -0.1};
    spec.profile_nodata = 0;
    const auto out = read_all(spec);
    CHECK(std::isnan(out.at(0, 0)));
    CHECK(out.at(3, 0) == static_cast<float>(3 * 1e-4 - 0.1));
    const auto source = Source::open(spec, inspect(spec.name).grid);
    CHECK(source.scaling_origin() == Origin::profile);
    CHECK_THAT(source.description()[2], Contains("scale 0.0001, offset -0.1 (from the profile)"));
    CHECK_THAT(source.description()[3], Contains("nodata 0 (from the profile)"));
}

TEST_CASE("Reader: every number type gives its numbers", "[raster][edge]") {
    const TemporaryFolder folder;
    const std::string type = GENERATE("Byte", "UInt16", "Int16", "UInt32", "Int32", "UInt64",
                                      "Int64", "Float32", "Float64");
    CAPTURE(type);
    const auto file = make_raster(
        folder.path() / "typed.tif",
        {.grid = square_grid(5, 3, 0, 100, 10), .type = type, .bands = {counting(5)}, .nodata = 7});
    CHECK(text_of(inspect({file}).type) == type);
    const auto values = read_all(spec_of(file));
    const auto codes = read_all_codes(spec_of(file));
    for (int r = 0; r < 3; ++r)
        for (int c = 0; c < 5; ++c) {
            const int number = r * 5 + c;
            if (number == 7) {
                CHECK(std::isnan(values.at(c, r)));
                CHECK(codes.at(c, r) == no_code);
            } else {
                CHECK(values.at(c, r) == static_cast<float>(number));
                CHECK(codes.at(c, r) == number);
            }
        }
}

TEST_CASE("Reader: signed bytes keep their sign", "[raster][edge]") {
    const TemporaryFolder folder;
    // Written as bytes that mean -3 to 0: GDAL 3.6 knows signed bytes by this option only.
    const auto file = make_raster(folder.path() / "signed.tif",
                                  {.grid = square_grid(4, 1, 0, 100, 10),
                                   .type = "Byte",
                                   .bands = {[](int c, int) { return c == 3 ? 0.0 : 253.0 + c; }},
                                   .options = {"PIXELTYPE=SIGNEDBYTE"}});
    REQUIRE(inspect({file}).type == PixelType::i8);
    const auto values = read_all(spec_of(file));
    const auto codes = read_all_codes(spec_of(file));
    for (int c = 0; c < 4; ++c) {
        CHECK(values.at(c, 0) == static_cast<float>(c - 3));
        CHECK(codes.at(c, 0) == c - 3);
    }
}

TEST_CASE("Reader: fractions and giants are no class codes", "[raster][edge]") {
    const TemporaryFolder folder;
    const double odd = GENERATE(3.7, 5e9);
    const auto file =
        make_raster(folder.path() / "odd.tif", {.grid = square_grid(4, 1, 0, 100, 10),
                                                .type = "Float64",
                                                .bands = {[odd](int, int) { return odd; }}});
    CHECK_THAT(error_text([&] { (void)read_all_codes(spec_of(file)); }),
               Contains("which is no class code"));
}

TEST_CASE("Reader: windows may reach beyond the target and the raster", "[raster][edge]") {
    const TemporaryFolder folder;
    const auto grid = square_grid(6, 4, 0, 100, 10);
    const auto file = make_raster(folder.path() / "r.tif", {.grid = grid, .bands = {counting(6)}});
    const auto target = cropped(grid, Bounds{20, 70, 40, 90}, {});
    const auto source = Source::open(spec_of(file), target);
    CHECK(source.alignment() == Alignment::shifted);
    CHECK_THAT(source.alignment_text(), Contains("from column 2 and row 1 on"));
    Plane<float> out;
    Reader(source).read({-3, -2, 8, 6}, out);
    for (int r = 0; r < 6; ++r)
        for (int c = 0; c < 8; ++c) {
            const int column = c - 3 + 2, row = r - 2 + 1;
            if (column < 0 || column >= 6 || row < 0 || row >= 4)
                CHECK(std::isnan(out.at(c, r)));
            else
                CHECK(out.at(c, r) == static_cast<float>(row * 6 + column));
        }
}

TEST_CASE("Reader: mirrored and south-up rasters read as if they lay upright",
          "[raster][property]") {
    const TemporaryFolder folder;
    const auto grid = square_grid(9, 7, 0, 100, 10);
    const bool south_up = GENERATE(false, true), mirrored = GENERATE(false, true);
    CAPTURE(south_up, mirrored);
    auto stored = grid;
    if (south_up) stored.affine[3] = 30, stored.affine[5] = 10;
    if (mirrored) stored.affine[0] = 90, stored.affine[1] = -10;
    const auto file = make_raster(folder.path() / "flipped.tif",
                                  {.grid = stored, .bands = {[&](int c, int r) {
                                                       return (south_up ? 6 - r : r) * 9.0 +
                                                              (mirrored ? 8 - c : c);
                                                   }}});
    CHECK(inspect({file}).grid == grid);
    const auto source = Source::open(spec_of(file), grid);
    Plane<float> out;
    Reader(source).read({2, 1, 5, 4}, out);
    for (int r = 0; r < 4; ++r)
        for (int c = 0; c < 5; ++c) CHECK(out.at(c, r) == static_cast<float>((r + 1) * 9 + c + 2));
}

TEST_CASE("Reader: longitudes meet behind the globe", "[raster][edge]") {
    const TemporaryFolder folder;
    const auto file = make_raster(
        folder.path() / "globe.tif",
        {.grid = square_grid(36, 18, -180, 90, 10, "EPSG:4326"), .bands = {counting(36)}});
    // The same globe from 0 to 360: whole pixels away, once round.
    const auto target = square_grid(36, 18, 0, 90, 10, "EPSG:4326");
    const auto source = Source::open(spec_of(file), target);
    CHECK(source.alignment() == Alignment::shifted);
    CHECK(source.coverage() == 1);
    Plane<float> out;
    Reader reader(source);
    reader.read({-2, 0, 40, 1}, out);
    for (int c = 0; c < 40; ++c) CHECK(out.at(c, 0) == static_cast<float>((c - 2 + 18 + 36) % 36));
}

TEST_CASE("Source: refuses a raster that lies elsewhere, and sees one smaller than its mesh",
          "[raster][edge]") {
    const TemporaryFolder folder;
    const auto dot =
        make_raster(folder.path() / "dot.tif",
                    {.grid = square_grid(1, 1, 4210, 5000, 10), .bands = {counting(1)}});
    const auto source = Source::open(spec_of(dot), square_grid(1000, 1000, 0, 10000, 10));
    // One pixel of a million.
    CHECK(source.coverage() == Approx(1e-6).epsilon(1e-9));
    CHECK_THAT(
        error_text([&] { (void)Source::open(spec_of(dot), square_grid(10, 10, 0, 100, 10)); }),
        Contains("the raster lies nowhere on the run's grid"));
}

TEST_CASE("inspect: control points, no CRS and no georeference are told apart", "[raster][edge]") {
    const TemporaryFolder folder;
    auto grid = square_grid(4, 4, 0, 100, 10);
    grid.crs_wkt.clear();
    const auto bare =
        make_raster(folder.path() / "bare.tif", {.grid = grid, .bands = {counting(4)}});
    CHECK_THAT(error_text([&] { (void)inspect({bare}); }), Contains("it has no CRS"));
    const auto command =
        "gdal_translate -q -a_srs EPSG:4326 -gcp 0 0 10 50 -gcp 4 0 11 50 -gcp 4 4 11 49 " +
        bare.string() + ' ' + (folder.path() / "gcp.tif").string();
    REQUIRE(std::system(command.c_str()) == 0);
    CHECK_THAT(error_text([&] { (void)inspect({folder.path() / "gcp.tif"}); }),
               Contains("ground control points only") && Contains("gdalwarp"));
}

TEST_CASE("inspect: complex numbers are refused", "[raster][edge]") {
    const TemporaryFolder folder;
    const auto file = make_raster(
        folder.path() / "complex.tif",
        {.grid = square_grid(2, 2, 0, 100, 10), .type = "CFloat32", .bands = {counting(2)}});
    CHECK_THAT(error_text([&] { (void)inspect({file}); }), Contains("numbers of type CFloat32"));
}

TEST_CASE("inspect: the formats let in read the same pixels on the same ground",
          "[raster][differential]") {
    const TemporaryFolder folder;
    const auto tiff =
        make_raster(folder.path() / "a.tif", {.grid = square_grid(30, 20, 500000, 5300000, 10),
                                              .type = "Int16",
                                              .bands = {counting(30)}});
    const auto reference = read_all(spec_of(tiff));
    const auto grid = inspect({tiff}).grid;
    const auto [format, name] = GENERATE(table<std::string, std::string>({
        {"HFA", "b.img"},
        {"AAIGrid", "b.asc"},
        {"EHdr", "b.bil"},
        {"ENVI", "b.dat"},
        {"netCDF", "b.nc"},
        {"JP2OpenJPEG -co QUALITY=100 -co REVERSIBLE=YES", "b.jp2"},
        {"VRT", "b.vrt"},
    }));
    CAPTURE(format);
    const auto file = folder.path() / name;
    const auto command =
        "gdal_translate -q -of " + format + ' ' + tiff.string() + ' ' + file.string();
    REQUIRE(std::system(command.c_str()) == 0);
    CHECK(same_grid(inspect({file}).grid, grid));
    CHECK(same_bits(read_all(spec_of(file), grid), reference));
}

TEST_CASE("inspect: a netCDF variable is chosen by its name", "[raster][edge]") {
    const TemporaryFolder folder;
    const auto tiff = make_raster(
        folder.path() / "a.tif",
        {.grid = square_grid(6, 4, 10, 50, 0.5, "EPSG:4326"), .bands = {counting(6), counting(7)}});
    const auto file = folder.path() / "b.nc";
    const auto command = "gdal_translate -q -of netCDF " + tiff.string() + ' ' + file.string();
    REQUIRE(std::system(command.c_str()) == 0);
    CHECK_THAT(error_text([&] { (void)inspect({file}); }),
               Contains("several rasters") && Contains("Band1, Band2"));
    CHECK(read_all(spec_of(file.string() + ":Band2")).at(1, 2) == 15);
    CHECK_THAT(error_text([&] { (void)inspect(raster_name(file.string() + ":Band9")); }),
               Contains("it has Band1, Band2"));
}
