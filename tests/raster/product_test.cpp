#include "sunbudget/raster/product.hpp"

#include <catch2/catch.hpp>
#include <fstream>

#include "raster/input_support.hpp"
#include "support/vectors.hpp"

using namespace sunbudget;
using namespace sunbudget::test;
using Catch::Matchers::Contains;
using Catch::Matchers::WithinAbs;

namespace {

namespace fs = std::filesystem;

const std::string greenland = "LC08_L2SP_005009_20150710_20200908_02_T2";
const std::string marburg8 = "LC08_L1TP_195025_20130707_20170503_01_T1";

fs::path scene_file(const std::string& id, const std::string& ending) {
    return *real_data("landsat_c2l2/" + id + "/" + id + ending);
}

fs::path write(const TemporaryFolder& folder, const std::string& name, const std::string& text) {
    const auto path = folder.path() / name;
    std::ofstream(path, std::ios::binary) << text;
    return path;
}

/// A metadata file as short as it may be.
std::string short_mtl(const std::string& id, const std::string& level = "L2SP",
                      const std::string& more = "") {
    return "GROUP = LANDSAT_METADATA_FILE\n  GROUP = PRODUCT_CONTENTS\n    LANDSAT_PRODUCT_ID = "
           "\"" +
           id + "\"\n    PROCESSING_LEVEL = \"" + level +
           "\"\n  END_GROUP = PRODUCT_CONTENTS\n  GROUP = IMAGE_ATTRIBUTES\n" + more +
           "  END_GROUP = IMAGE_ATTRIBUTES\nEND_GROUP = LANDSAT_METADATA_FILE\nEND\n";
}

std::string error_with(const std::string& mtl, const std::string& ending = ".txt") {
    const TemporaryFolder folder;
    const auto path = write(folder, greenland + "_MTL" + ending, mtl);
    return error_text([&] { (void)recognise(folder.path() / (greenland + "_SR_B2.TIF")); });
}

}  // namespace

TEST_CASE("recognise: the forms of product names tell level, profile, band and day",
          "[raster][vector]") {
    struct Row {
        std::string name;
        ProductLevel level;
        std::string sensor, platform, band;
        int collection;
        std::string date;
    };
    using enum ProductLevel;
    // Forms: USGS Landsat Collection 1 and 2 product guides, ESA Sentinel-2 products specification
    // (from memory); those of Collections 1 and 2 and of Sentinel-2 as in the real test data.
    const auto row = GENERATE(values<Row>({
        {"LC08_L2SP_005009_20150710_20200908_02_T2_SR_B2.TIF", surface_reflectance,
         "landsat-oli-c2", "Landsat 8", "SR_B2", 2, "2015-07-10"},
        {"lc09_l2sr_005009_20220710_20230408_02_t1_sr_b7.tif", surface_reflectance,
         "landsat-oli-c2", "Landsat 9", "SR_B7", 2, "2022-07-10"},
        {"LE07_L2SP_195025_20010730_20200917_02_T1_SR_B3_crop.tif", surface_reflectance,
         "landsat-tm-c2", "Landsat 7", "SR_B3", 2, "2001-07-30"},
        {"town_LC08_L2SP_005009_20150710_20200908_02_T2_SR_B4.vrt", surface_reflectance,
         "landsat-oli-c2", "Landsat 8", "SR_B4", 2, "2015-07-10"},
        {"LC08_L2SP_005009_20150710_20200908_02_T2_ST_B10.TIF", surface_temperature,
         "landsat-oli-c2", "Landsat 8", "ST_B10", 2, "2015-07-10"},
        {"LC08_L2SP_005009_20150710_20200908_02_T2_QA_PIXEL.TIF", auxiliary, "landsat-oli-c2",
         "Landsat 8", "QA_PIXEL", 2, "2015-07-10"},
        {"LC08_L2SP_005009_20150710_20200908_02_T2_SR_QA_AEROSOL.TIF", auxiliary, "landsat-oli-c2",
         "Landsat 8", "SR_QA_AEROSOL", 2, "2015-07-10"},
        {"LC08_L1TP_195025_20130707_20200912_02_T1_B2.TIF", level1, "", "Landsat 8", "B2", 2,
         "2013-07-07"},
        {"LE07_L1TP_195025_20010730_20170204_01_T1_B6_VCID_1.TIF", level1, "", "Landsat 7", "B6", 1,
         "2001-07-30"},
        {"LC08_L1TP_195025_20130707_20170503_01_T1_BQA.TIF", auxiliary, "", "Landsat 8", "BQA", 1,
         "2013-07-07"},
        {"LC08_L1TP_195025_20130707_20170503_01_T1_sr_band2.tif", surface_reflectance, "",
         "Landsat 8", "SR_BAND2", 1, "2013-07-07"},
        {"LC08_L1TP_195025_20130707_20170503_01_T1_toa_band2.tif", level1, "", "Landsat 8",
         "TOA_BAND2", 1, "2013-07-07"},
        {"LC80380342015230LGN00_B2.TIF", level1, "", "Landsat 8", "B2", 0, "2015-08-18"},
        {"T29UNU_20221005T115411_B02_60m.jp2", surface_reflectance, "sentinel2-l2a", "Sentinel-2",
         "B02", 0, "2022-10-05"},
        {"T29UNU_20221005T115411_B8A_60m_crop.tif", surface_reflectance, "sentinel2-l2a",
         "Sentinel-2", "B8A", 0, "2022-10-05"},
        {"T29UNU_20221005T115411_SCL_60m.jp2", auxiliary, "", "Sentinel-2", "SCL", 0, "2022-10-05"},
        {"T29UNU_20221005T115411_B02.jp2", level1, "", "Sentinel-2", "B02", 0, "2022-10-05"},
        {"T29UNU_20221005T115411_B02_crop.tif", unknown, "", "Sentinel-2", "B02", 0, "2022-10-05"},
    }));
    CAPTURE(row.name);
    const auto product = recognise(row.name);
    CHECK(product.level == row.level);
    CHECK(product.sensor == row.sensor);
    CHECK(product.platform == row.platform);
    CHECK(product.band == row.band);
    CHECK(product.collection == row.collection);
    REQUIRE(product.date);
    CHECK(format_date(*product.date) == row.date);
    CHECK_THAT(product.evidence.front(), Contains("from the file's name"));
}

TEST_CASE("recognise: a name of no known form is an unknown product", "[raster][edge]") {
    const auto name = GENERATE(as<std::string>{}, "landsat_b2.tif", "L7_ETMs.tif", "B2.tif", "",
                               "S2A2A_20170703_022_Barbellino_BOA_10.tif", "LC08_L2SP.tif",
                               "LC08_L2SP_5009_20150710_20200908_02_T2_SR_B2.TIF",
                               "XC08_L2SP_005009_20150710_20200908_02_T2_SR_B2.TIF", "__.tif");
    const auto product = recognise(name);
    CHECK(product.level == ProductLevel::unknown);
    CHECK(product.sensor.empty());
    CHECK(product.id.empty());
    CHECK(product.evidence.empty());
}

TEST_CASE("recognise: a day that no calendar has is left out", "[raster][edge]") {
    CHECK_FALSE(recognise("LC08_L2SP_005009_20150230_20200908_02_T2_SR_B2.TIF").date);
    CHECK_FALSE(recognise("LC80380342015999LGN00_B2.TIF").date);
    CHECK_FALSE(recognise("T29UNU_20221005T996199_B02_60m.jp2").acquired_utc);
}

TEST_CASE("recognise: each scene's metadata file gives its instant and sun", "[raster][vector]") {
    SUNBUDGET_NEEDS_DATA();
    struct Row {
        std::string id, utc;
        double elevation_deg, azimuth_deg;
    };
    // As listed with the real data, read there from the metadata files by eye.
    const auto row = GENERATE(values<Row>({
        {"LC08_L2SP_005009_20150710_20200908_02_T2", "2015-07-10T14:34:36Z", 40.002, 177.885},
        {"LC08_L2SP_008059_20191201_20200825_02_T1", "2019-12-01T15:13:52Z", 57.087, 136.317},
        {"LC08_L2SP_017036_20130419_20200913_02_T2", "2013-04-19T16:01:52Z", 59.250, 133.709},
    }));
    const auto product = recognise(scene_file(row.id, "_SR_B4.TIF"));
    CHECK(product.id == row.id);
    CHECK(product.metadata_file.filename() == row.id + "_MTL.txt");
    REQUIRE(product.acquired_utc);
    CHECK(format_utc(*product.acquired_utc) == row.utc);
    CHECK_THAT(product.sun_elevation_deg.value(),
               WithinAbs(row.elevation_deg, 5e-4));  // as rounded
    CHECK_THAT(product.sun_azimuth_deg.value(), WithinAbs(row.azimuth_deg, 5e-4));
}

TEST_CASE("recognise: scale and offset are those of the file's own level", "[raster][vector]") {
    SUNBUDGET_NEEDS_DATA();
    // The same metadata file also has the Level-1 numbers' scale, 2e-5, under the same key.
    CHECK(recognise(scene_file(greenland, "_SR_B2.TIF")).scaling == Scaling{2.75e-5, -0.2});
    CHECK_FALSE(recognise(scene_file(greenland, "_QA_PIXEL.TIF")).scaling);
    // As in the metadata files of the two Level-1 scenes, read by eye.
    const auto first = *real_data("marburg_landsat_l1/" + marburg8 + "_B2.TIF");
    CHECK(recognise(first).scaling == Scaling{2e-5, -0.1});
    const auto second =
        *real_data("marburg_landsat_l1/LE07_L1TP_195025_20010730_20170204_01_T1_B1.TIF");
    CHECK(recognise(second).scaling == Scaling{1.2384e-3, -0.011098});
}

TEST_CASE("recognise: the metadata file as JSON tells the same as its text",
          "[raster][differential]") {
    SUNBUDGET_NEEDS_DATA();
    const auto file = scene_file(greenland, "_SR_B5.TIF");
    const auto text = recognise(file, scene_file(greenland, "_MTL.txt"));
    const auto json = recognise(file, scene_file(greenland, "_MTL.json"));
    CHECK(text.acquired_utc == json.acquired_utc);
    CHECK(text.sun_elevation_deg == json.sun_elevation_deg);
    CHECK(text.sun_azimuth_deg == json.sun_azimuth_deg);
    CHECK(text.scaling == json.scaling);
    CHECK(json.metadata_file.extension() == ".json");
}

TEST_CASE("recognise: a Level-1 scene's metadata file tells instant and sun", "[raster][vector]") {
    SUNBUDGET_NEEDS_DATA();
    const auto product = recognise(*real_data("marburg_landsat_l1/" + marburg8 + "_B4.TIF"));
    CHECK(product.level == ProductLevel::level1);
    CHECK(format_utc(product.acquired_utc.value()) == "2013-07-07T10:17:42Z");
    CHECK_THAT(product.sun_elevation_deg.value(), WithinAbs(58.997, 5e-4));  // as listed, rounded
    CHECK_THAT(product.sun_azimuth_deg.value(), WithinAbs(146.985, 5e-4));
}

TEST_CASE("recognise: Sentinel-2's metadata give the offset of the band, the instant and the sun",
          "[raster][vector]") {
    SUNBUDGET_NEEDS_DATA();
    const std::string folder = "sentinel2_ireland_T29UNU/";
    const auto product = recognise(*real_data(folder + "T29UNU_20221005T115411_B8A_60m_crop.tif"));
    CHECK(product.metadata_file.filename() == "MTD_MSIL2A.xml");
    REQUIRE(product.scaling);
    CHECK(product.scaling->scale == 1e-4);
    CHECK_THAT(product.scaling->offset, WithinAbs(-0.1, 1e-15));  // -1000 / 10000
    CHECK(format_utc(product.acquired_utc.value()) == "2022-10-05T11:54:11Z");
    // As listed with the data: mean zenith 57.82, azimuth 172.84.
    CHECK_THAT(product.sun_elevation_deg.value(), WithinAbs(90 - 57.82, 5e-3));
    CHECK_THAT(product.sun_azimuth_deg.value(), WithinAbs(172.84, 5e-3));
}

TEST_CASE("recognise: another Sentinel-2 scene's metadata lying by are not used",
          "[raster][edge]") {
    const TemporaryFolder folder;
    const auto metadata = write(
        folder, "MTD_MSIL2A.xml",
        "<?xml version=\"1.0\"?><a:P xmlns:a=\"x\"><PRODUCT_URI>S2A_MSIL2A_20220101T115411_N0400_"
        "R023_T29UNU_20221005T164454.SAFE</PRODUCT_URI><PROCESSING_LEVEL>Level-2A"
        "</PROCESSING_LEVEL></a:P>");
    const auto file = folder.path() / "T29UNU_20221005T115411_B02_60m.jp2";
    const auto product = recognise(file);
    CHECK(product.metadata_file.empty());
    CHECK_THAT(product.evidence.back(), Contains("not used"));
    CHECK_THAT(error_text([&] { (void)recognise(file, metadata); }), Contains("20220101T115411"));
}

TEST_CASE("recognise: Sentinel-2's metadata know the level better than a name cut short",
          "[raster][edge]") {
    const auto metadata = [](const std::string& level) {
        return "<a><PRODUCT_URI>S2A_MSIL" + level +
               "_20221005T115411_N0400_R023_T29UNU_20221005T164454.SAFE</PRODUCT_URI>"
               "<PROCESSING_LEVEL>Level-" +
               level + "</PROCESSING_LEVEL></a>";
    };
    const TemporaryFolder second;
    write(second, "MTD_MSIL2A.xml", metadata("2A"));
    const auto corrected = recognise(second.path() / "T29UNU_20221005T115411_B02.tif");
    CHECK(corrected.level == ProductLevel::surface_reflectance);
    CHECK(corrected.sensor == "sentinel2-l2a");
    CHECK(recognise(second.path() / "T29UNU_20221005T115411_SCL_20m.jp2").level ==
          ProductLevel::auxiliary);
    const TemporaryFolder first;
    write(first, "MTD_MSIL1C.xml", metadata("1C"));
    CHECK(recognise(first.path() / "T29UNU_20221005T115411_B02_crop.tif").level ==
          ProductLevel::level1);
    const auto contradiction = first.path() / "T29UNU_20221005T115411_B02_10m.jp2";
    CHECK_THAT(error_text([&] { (void)recognise(contradiction); }),
               Contains("surface reflectance") && Contains("Level-1"));
}

TEST_CASE("recognise: Sentinel-2's metadata are found above the folder of the bands",
          "[raster][edge]") {
    SUNBUDGET_NEEDS_DATA();
    const TemporaryFolder folder;
    const auto bands = folder.path() / "GRANULE" / "tile" / "IMG_DATA" / "R60m";
    fs::create_directories(bands);
    fs::copy_file(*real_data("sentinel2_ireland_T29UNU/MTD_MSIL2A.xml"),
                  folder.path() / "MTD_MSIL2A.xml");
    const auto product = recognise(bands / "T29UNU_20221005T115411_B11_60m.jp2");
    CHECK_FALSE(product.metadata_file.empty());
    CHECK(product.scaling);
    CHECK_FALSE(product.sun_elevation_deg);  // the tile's own file is not there
}

TEST_CASE("recognise: a file of any name is what the named metadata file says", "[raster][edge]") {
    const TemporaryFolder folder;
    const auto level2 = write(folder, "a.txt", short_mtl(greenland));
    const auto product = recognise(folder.path() / "blue.tif", level2);
    CHECK(product.level == ProductLevel::surface_reflectance);
    CHECK(product.sensor == "landsat-oli-c2");
    const auto level1 = write(folder, "b.txt", short_mtl(marburg8, "L1TP"));
    CHECK(recognise(folder.path() / "blue.tif", level1).level == ProductLevel::level1);
}

TEST_CASE("recognise: the file's own metadata items count, and may not contradict the name",
          "[raster][edge]") {
    const std::map<std::string, std::string> level2{{"LANDSAT_PRODUCT_ID", greenland}};
    CHECK(recognise("blue.tif", {}, level2).level == ProductLevel::surface_reflectance);
    const auto text = error_text([&] { (void)recognise(marburg8 + "_B2.TIF", {}, level2); });
    CHECK_THAT(text, Contains(marburg8) && Contains(greenland) && Contains("LANDSAT_PRODUCT_ID"));
    const std::map<std::string, std::string> other{{"LANDSAT_PRODUCT_ID", "something"}};
    CHECK(recognise("blue.tif", {}, other).level == ProductLevel::unknown);
}

TEST_CASE("recognise: a metadata file of another product is refused, both named",
          "[raster][edge]") {
    const TemporaryFolder folder;
    const auto other = write(folder, "x_MTL.txt", short_mtl(marburg8, "L1TP"));
    const auto text = error_text([&] { (void)recognise(greenland + "_SR_B2.TIF", other); });
    CHECK_THAT(text, Contains(greenland) && Contains(marburg8) && Contains("x_MTL.txt"));
}

TEST_CASE("recognise: a metadata file that contradicts itself is refused", "[raster][edge]") {
    CHECK_THAT(error_with(short_mtl(greenland, "L1TP")), Contains("its level is L1TP"));
    CHECK_THAT(error_with(short_mtl(greenland, "L2SP", "DATE_ACQUIRED = 2016-07-10\n")),
               Contains("2016-07-10"));
    CHECK_THAT(error_with(short_mtl(greenland, "L2SP", "A = 1\nA = 2\n")), Contains("both"));
    CHECK_THAT(error_with(short_mtl(greenland, "L2SP", "SUN_ELEVATION = 95\n")),
               Contains("95 degrees"));
    CHECK_THAT(error_with(short_mtl(greenland, "L2SP", "SUN_ELEVATION = high\n")),
               Contains("\"high\", not a number"));
    CHECK_THAT(
        error_with(short_mtl(greenland, "L2SP",
                             "DATE_ACQUIRED = 2015-07-10\nSCENE_CENTER_TIME = \"25:00:00Z\"\n")),
        Contains("25:00:00Z"));
}

TEST_CASE("recognise: a malformed metadata file is refused with its line or its fault",
          "[raster][edge]") {
    const auto good = short_mtl(greenland);
    CHECK(error_with(good).empty());
    CHECK_THAT(error_with(""), Contains("not a Landsat metadata file"));
    CHECK_THAT(error_with("{}"), Contains("no \"KEY = VALUE\"") && Contains("line 1"));
    CHECK_THAT(error_with("GROUP = SOMETHING\nEND_GROUP = SOMETHING\n"),
               Contains("not a Landsat metadata file"));
    CHECK_THAT(error_with("A = 1\n" + good), Contains("line 1"));
    CHECK_THAT(error_with(good.substr(0, good.size() / 2)), Contains("_MTL.txt"));
    CHECK_THAT(error_with("GROUP = L1_METADATA_FILE\nEND_GROUP = OTHER\n"), Contains("line 2"));
    CHECK_THAT(error_with("GROUP = L1_METADATA_FILE\nEND_GROUP = L1_METADATA_FILE\n"),
               Contains("names no product"));
    CHECK_THAT(error_with(short_mtl("LX99", "L2SP")), Contains("\"LX99\""));
    CHECK_THAT(error_with(std::string(4, '\0') + good), Contains("no text"));
    CHECK_THAT(error_with(std::string((1 << 20) + 1, ' ')), Contains("megabyte"));
    std::string deep = "GROUP = L1_METADATA_FILE\n";
    for (int i = 0; i < 20; ++i) deep += "GROUP = A\n";
    CHECK_THAT(error_with(deep), Contains("groups in groups"));
}

TEST_CASE("recognise: every cut of a metadata file is refused or tells no falsehood",
          "[raster][property]") {
    const auto text = short_mtl(greenland, "L2SP", "SUN_ELEVATION = 40.0\n");
    for (std::size_t size = 0; size < text.size(); ++size) {
        const TemporaryFolder folder;
        write(folder, greenland + "_MTL.txt", text.substr(0, size));
        CAPTURE(size);
        try {
            // Only the closing END may be missing without harm.
            const auto product = recognise(folder.path() / (greenland + "_SR_B2.TIF"));
            REQUIRE(size >= text.size() - 5);
            REQUIRE(product.sun_elevation_deg == 40.0);
        } catch (const Error& error) {
            REQUIRE(error.cause() == Cause::input);
        }
    }
}

TEST_CASE("recognise: malformed JSON is refused", "[raster][edge]") {
    const auto json_error = [](const std::string& text) {
        const TemporaryFolder folder;
        const auto path = write(folder, "x_MTL.json", text);
        return error_text([&] { (void)recognise(greenland + "_SR_B2.TIF", path); });
    };
    CHECK_THAT(json_error("{\"LANDSAT_METADATA_FILE\": {"), Contains("no JSON, or cut short"));
    CHECK_THAT(json_error("[1]"), Contains("not a Landsat metadata file"));
    CHECK_THAT(json_error("{\"A\": {}}"), Contains("not a Landsat metadata file"));
    CHECK_THAT(json_error("{\"LANDSAT_METADATA_FILE\": {\"PRODUCT_CONTENTS\": 3}}"),
               Contains("names no product"));
    CHECK_THAT(json_error(std::string(500000, '[')), Contains("no JSON, or cut short"));
    std::string deep = "{\"LANDSAT_METADATA_FILE\": ";
    for (int i = 0; i < 20; ++i) deep += "{\"A\": ";
    CHECK_THAT(json_error(deep + "{}" + std::string(21, '}')), Contains("groups in groups"));
}

TEST_CASE("recognise: malformed Sentinel-2 metadata are refused", "[raster][edge]") {
    const auto xml_error = [](const std::string& text) {
        const TemporaryFolder folder;
        const auto path = write(folder, "MTD_MSIL2A.xml", text);
        return error_text([&] { (void)recognise("blue.tif", path); });
    };
    CHECK_THAT(xml_error("<a><b>"), Contains("no XML, or cut short"));
    CHECK_THAT(xml_error("<a/>"), Contains("not a Sentinel-2 product's metadata file"));
    std::string deep;
    for (int i = 0; i < 149000; ++i) deep += "<a>";
    for (int i = 0; i < 149000; ++i) deep += "</a>";
    CHECK_THAT(xml_error(deep), Contains("MTD_MSIL2A.xml"));
    const std::string uri =
        "<PRODUCT_URI>S2A_MSIL2A_20221005T115411_N0400_R023_T29UNU_20221005T164454.SAFE"
        "</PRODUCT_URI>";
    CHECK_THAT(xml_error("<a>" + uri + "<PROCESSING_LEVEL>Level-1C</PROCESSING_LEVEL></a>"),
               Contains("\"Level-1C\""));
    CHECK_THAT(
        xml_error("<a>" + uri + "<BOA_QUANTIFICATION_VALUE>x</BOA_QUANTIFICATION_VALUE></a>"),
        Contains("not a number"));
}

TEST_CASE("recognise: a metadata file is local and exists", "[raster][edge]") {
    const TemporaryFolder folder;
    const auto error_of = [&](const fs::path& metadata) {
        return error_text([&] { (void)recognise("blue.tif", metadata); });
    };
    CHECK_THAT(error_of(folder.path() / "none_MTL.txt"), Contains("no such metadata file"));
    CHECK_THAT(error_of(folder.path()), Contains("no such metadata file"));
    CHECK_THAT(error_of("/vsicurl/http://example.org/x_MTL.txt"), Contains("only local files"));
}
