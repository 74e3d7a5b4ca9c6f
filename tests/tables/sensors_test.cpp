#include "sunbudget/tables/sensors.hpp"

#include <catch2/catch.hpp>
#include <map>

#include "sunbudget/base/error.hpp"
#include "sunbudget/tables/quality.hpp"
#include "support/vectors.hpp"

using namespace sunbudget;
using Catch::Matchers::Contains;
using Catch::Matchers::WithinAbs;

namespace {

using Reflectance = std::map<std::string, double>;

double albedo_of(const WeightSet& set, const Reflectance& reflectance) {
    double albedo = set.constant;
    for (const auto& weight : set.weights) albedo += weight.weight * reflectance.at(weight.band);
    return albedo;
}

Reflectance flat(double value) {
    return {{"blue", value}, {"green", value}, {"red", value},
            {"nir", value},  {"swir1", value}, {"swir2", value}};
}

double published(const std::string& quantity) {
    const auto table = test::read_table("vectors/band_weights.csv");
    for (std::size_t i = 0; i < table.rows.size(); ++i)
        if (table.cell(i, "quantity") == quantity) return table.number(i, "value");
    FAIL("no row " + quantity);
    return 0;
}

double weight_of(const WeightSet& set, const std::string& band) {
    for (const auto& weight : set.weights)
        if (weight.band == band) return weight.weight;
    return 0;
}

/// The tests that hold for a number of one quality raster.
std::vector<std::string> seen(const std::string& raster, std::uint16_t pixel) {
    std::vector<std::string> names;
    for (const auto& test : sensor("landsat-oli-c2").tests)
        if (test.raster == raster && test.holds(pixel)) names.push_back(test.name + test.band);
    return names;
}

}  // namespace

TEST_CASE("liang2001: every weight is the published one on the matching band", "[tables][vector]") {
    const auto& set = weight_set("landsat-oli-c2", "liang2001");
    // TM and ETM+ bands 1, 3, 4, 5, 7 are blue, red, near infrared, both shortwave infrareds.
    const std::map<std::string, std::string> bands{{"blue", "weight b1"},
                                                   {"red", "weight b3"},
                                                   {"nir", "weight b4"},
                                                   {"swir1", "weight b5"},
                                                   {"swir2", "weight b7"}};
    REQUIRE(set.weights.size() == bands.size());
    double sum = 0;
    for (const auto& [band, quantity] : bands) {
        CAPTURE(band);
        CHECK(weight_of(set, band) == published(quantity));
        sum += weight_of(set, band);
    }
    CHECK(set.constant == published("constant"));
    CHECK_THAT(sum, WithinAbs(published("sum of weights"), 1e-12));  // rounding of five terms
}

TEST_CASE("liang2001: gives the worked albedos", "[tables][vector]") {
    const auto& set = weight_set("landsat-oli-c2", "liang2001");
    // 1e-12: the worked values are exact decimals, only rounding is left.
    CHECK_THAT(albedo_of(set, flat(0.2)),
               WithinAbs(published("albedo of a flat spectrum 0.20"), 1e-12));
    CHECK_THAT(albedo_of(set, flat(0.0)),
               WithinAbs(published("all bands zero, Liang Landsat shortwave"), 1e-12));
    const Reflectance plants{{"blue", 0.05}, {"green", 0.08}, {"red", 0.06},
                             {"nir", 0.35},  {"swir1", 0.20}, {"swir2", 0.10}};
    CHECK_THAT(albedo_of(set, plants),
               WithinAbs(published("vegetation-like pixel, Liang Landsat shortwave"), 1e-12));
}

TEST_CASE("weight sets: use bands their sensor has and state an error", "[tables][property]") {
    REQUIRE_FALSE(weight_sets().empty());
    for (const auto& set : weight_sets()) {
        CAPTURE(set.name, set.sensor);
        for (const auto& weight : set.weights)
            CHECK(sensor(set.sensor).band(weight.band) != nullptr);
        CHECK(set.fit_error >= 0.02);  // no published conversion does better (Liang et al. 2003)
        CHECK_FALSE(set.source.empty());
    }
}

TEST_CASE("landsat-oli-c2: stored numbers become reflectance", "[tables][vector]") {
    // USGS Landsat Collection 2 Level-2 product guide: valid numbers 7273 to 43636 are 0 to 1.
    const auto& oli = sensor("landsat-oli-c2");
    CHECK_THAT(oli.scale * 7273 + oli.offset, WithinAbs(0.000007, 1e-6));
    CHECK_THAT(oli.scale * 43636 + oli.offset, WithinAbs(0.999990, 1e-6));
    CHECK(oli.fill == 0.0);
    CHECK(oli.band("swir1")->product == "SR_B6");
    CHECK(oli.band("thermal") == nullptr);
}

TEST_CASE("landsat-oli-c2: reads the product's quality bits", "[tables][vector]") {
    // USGS Landsat Collection 2 Level-2 product guide: 21824 is clear land, 21952 clear water.
    using Names = std::vector<std::string>;
    CHECK(seen("QA_PIXEL", 21824).empty());
    CHECK(seen("QA_PIXEL", 21952).empty());
    CHECK(seen("QA_PIXEL", 1) == Names{"fill"});
    CHECK(seen("QA_PIXEL", 1 << 1 | 1 << 3) == Names{"dilated_cloud", "cloud"});
    CHECK(seen("QA_PIXEL", 1 << 2) == Names{"cirrus"});
    CHECK(seen("QA_PIXEL", 1 << 4) == Names{"cloud_shadow"});
    CHECK(seen("QA_PIXEL", 1 << 5) == Names{"snow"});
    CHECK(seen("QA_RADSAT", 1 << 1 | 1 << 6) == Names{"saturatedblue", "saturatedswir2"});
    CHECK(seen("QA_RADSAT", 1).empty());  // band 1 is not used
    CHECK(seen("SR_QA_AEROSOL", 3 << 6) == Names{"high_aerosol"});
    CHECK(seen("SR_QA_AEROSOL", 2 << 6).empty());  // medium
}

TEST_CASE(
    "quality tests: lead to the flag of the same name, and neither snow nor aerosol is a rejection",
    "[tables][property]") {
    for (const auto& row : sensors()) {
        for (const auto& test : row.tests) {
            CAPTURE(row.name, test.name);
            CHECK(test.rejects == (test.name != "snow" && test.name != "high_aerosol"));
            if (test.name == "fill") {
                CHECK(test.flag == 0);
                continue;
            }
            const auto meanings = quality_meanings(test.flag | quality::reflectance);
            CHECK(meanings == std::vector<std::string>{"reflectance", test.name});
        }
    }
}

TEST_CASE("sensor and weight_set: unknown names come with a suggestion", "[tables][edge]") {
    CHECK_THROWS_WITH(sensor("landsat-oli"), Contains("did you mean \"landsat-oli-c2\"?"));
    CHECK_THROWS_WITH(weight_set("landsat-oli-c2", "liang2011"), Contains("\"liang2001\"?"));
    CHECK_THROWS_WITH(weight_set("generic", "liang2001"), Contains("give the weights themselves"));
    CHECK(sensor("generic").scale == 1.0);
    CHECK_FALSE(sensor("generic").fill);
}
