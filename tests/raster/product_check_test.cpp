#include <catch2/catch.hpp>

#include "raster/input_support.hpp"
#include "sunbudget/raster/product.hpp"
#include "sunbudget/tables/sensors.hpp"
#include "support/vectors.hpp"

using namespace sunbudget;
using namespace sunbudget::test;
using Catch::Matchers::Contains;

namespace {

const std::string scene = "LC08_L2SP_005009_20150710_20200908_02_T2";
const std::string level1 = "LC08_L1TP_195025_20130707_20170503_01_T1_B2.TIF";

BandRules rules_for(const std::string& sensor_name,
                    DeclaredProduct declared = DeclaredProduct::automatic) {
    BandRules rules{declared, sensor_name, {}, sensor_names()};
    for (const auto& band : sensor(sensor_name).bands)
        if (!band.product.empty()) rules.roles.push_back({band.name, band.product});
    return rules;
}

BandFile band(const std::string& role, const std::string& file) {
    return {role, recognise(file), {}};
}

std::string refusal(const std::vector<BandFile>& bands, const BandRules& rules) {
    return error_text([&] { refuse_unless_surface_reflectance(bands, rules); });
}

}  // namespace

TEST_CASE("Every recognised surface reflectance band passes without a declaration",
          "[raster][edge]") {
    std::vector<BandFile> bands;
    for (const auto& one : sensor("landsat-oli-c2").bands)
        bands.push_back(band(one.name, scene + "_" + one.product + ".TIF"));
    CHECK(refusal(bands, rules_for("landsat-oli-c2")).empty());
    CHECK(
        refusal(bands, rules_for("landsat-oli-c2", DeclaredProduct::surface_reflectance)).empty());
    CHECK(refusal(bands, rules_for("generic")).empty());
}

TEST_CASE("An unknown product needs the declaration, and gets through with it", "[raster][edge]") {
    const std::vector bands{band("blue", "landsat_b2.tif"), band("red", "L7_ETMs.tif")};
    const auto text = refusal(bands, rules_for("landsat-oli-c2"));
    CHECK_THAT(text, Contains("landsat_b2.tif") && Contains("L7_ETMs.tif"));
    CHECK_THAT(text, Contains("product: surface-reflectance"));
    const auto declared = rules_for("landsat-oli-c2", DeclaredProduct::surface_reflectance);
    CHECK(refusal(bands, declared).empty());
}

TEST_CASE("Level-1 numbers are refused, declared or not, with the reason", "[raster][edge]") {
    const std::vector bands{band("blue", level1)};
    const auto plain = refusal(bands, rules_for("landsat-oli-c2"));
    CHECK_THAT(plain, Contains("not corrected for the atmosphere") && Contains("Level-1") &&
                          Contains("from the file's name") && Contains("Level-2 product"));
    const auto declared =
        refusal(bands, rules_for("generic", DeclaredProduct::surface_reflectance));
    CHECK_THAT(declared, Contains("declared surface-reflectance, but it is a Level-1 product"));
}

TEST_CASE("Top-of-atmosphere reflectance is refused as declared", "[raster][edge]") {
    const std::vector bands{band("blue", scene + "_SR_B2.TIF")};
    CHECK_THAT(refusal(bands, rules_for("generic", DeclaredProduct::top_of_atmosphere)),
               Contains("the weights hold for surface reflectance"));
}

TEST_CASE("Temperatures and quality are no band, whatever is declared", "[raster][edge]") {
    const std::vector bands{band("blue", scene + "_ST_B10.TIF"),
                            band("red", scene + "_QA_PIXEL.TIF")};
    const auto text = refusal(bands, rules_for("generic", DeclaredProduct::surface_reflectance));
    CHECK_THAT(text, Contains("surface temperature") && Contains("quality or angles"));
}

TEST_CASE("A band in another band's role is named", "[raster][edge]") {
    const std::vector bands{band("blue", scene + "_SR_B4.TIF"), band("red", scene + "_SR_B4.TIF")};
    const auto problems = band_problems(bands, rules_for("landsat-oli-c2"));
    REQUIRE(problems.size() == 1);
    CHECK(problems[0].what == "this is SR_B4, the band red; blue is SR_B2");
    CHECK_THAT(refusal({band("blue", scene + "_SR_B1.TIF")}, rules_for("landsat-oli-c2")),
               Contains("this is SR_B1; blue is SR_B2"));
}

TEST_CASE("Another encoding than the profile's is refused, with the profile or generic to take",
          "[raster][edge]") {
    const std::string tm = "LE07_L2SP_195025_20010730_20200917_02_T1_SR_B1.TIF";
    auto rules = rules_for("landsat-oli-c2");
    rules.profiles = {"landsat-oli-c2", "landsat-tm-c2"};
    const auto text = refusal({band("blue", tm)}, rules);
    CHECK_THAT(text, Contains("stored otherwise than landsat-oli-c2") && Contains("Landsat 7") &&
                         Contains("\"sensor: landsat-tm-c2\""));
    rules.profiles = {"landsat-oli-c2"};
    CHECK_THAT(refusal({band("blue", tm)}, rules), Contains("\"sensor: generic\""));
    const std::string on_demand = "LC08_L1TP_195025_20130707_20170503_01_T1_sr_band2.tif";
    CHECK_THAT(refusal({band("blue", on_demand)}, rules), Contains("\"sensor: generic\""));
    CHECK(refusal({band("blue", on_demand)}, rules_for("generic")).empty());
}

TEST_CASE("Fractions under the name of a product of whole numbers are refused", "[raster][edge]") {
    auto one = band("blue", scene + "_SR_B2.TIF");
    one.type = PixelType::u16;
    CHECK(refusal({one}, rules_for("landsat-oli-c2")).empty());
    one.type = PixelType::f32;
    CHECK_THAT(refusal({one}, rules_for("landsat-oli-c2")),
               Contains("Float32") && Contains("scaled already"));
    CHECK(refusal({one}, rules_for("generic")).empty());
}

TEST_CASE("scaling_warning: speaks up only where the metadata file says otherwise",
          "[raster][edge]") {
    SUNBUDGET_NEEDS_DATA();
    const auto sentinel =
        recognise(*real_data("sentinel2_ireland_T29UNU/T29UNU_20221005T115411_B02_60m_crop.tif"));
    CHECK_FALSE(scaling_warning(sentinel, *sentinel.scaling));
    CHECK_THAT(scaling_warning(sentinel, {1e-4, 0}).value(),
               Contains("MTD_MSIL2A.xml says scale 0.0001, offset -0.1"));
    CHECK_FALSE(scaling_warning(recognise("landsat_b2.tif"), {1e-4, 0}));
}

TEST_CASE("Bands of two scenes are refused, and every problem is told at once", "[raster][edge]") {
    const std::vector bands{band("blue", scene + "_SR_B2.TIF"), band("nir", level1),
                            band("red", "LC08_L2SP_008059_20191201_20200825_02_T1_SR_B4.TIF")};
    const auto problems = band_problems(bands, rules_for("landsat-oli-c2"));
    REQUIRE(problems.size() == 2);
    CHECK_THAT(problems[0].what, Contains("Level-1"));
    CHECK_THAT(problems[1].what, Contains("two scenes"));
}

TEST_CASE("The real Level-1 and raw files are refused as surface reflectance", "[raster][edge]") {
    SUNBUDGET_NEEDS_DATA();
    const auto file =
        GENERATE(as<std::string>{}, "zion_utah/landsat_b2.tif", "olinda_brazil/L7_ETMs.tif",
                 "marburg_landsat_l1/LC08_L1TP_195025_20130707_20170503_01_T1_B2.TIF",
                 "marburg_landsat_l1/LE07_L1TP_195025_20010730_20170204_01_T1_B1.TIF");
    const auto path = *real_data(file);
    const auto info = inspect({path, 1, {}});
    const BandFile one{"blue", recognise(path, {}, info.metadata), info.type};
    CHECK_FALSE(refusal({one}, rules_for("landsat-oli-c2")).empty());
}
