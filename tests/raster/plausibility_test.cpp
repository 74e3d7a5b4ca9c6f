#include "sunbudget/raster/plausibility.hpp"

#include <catch2/catch.hpp>
#include <random>

#include "raster/input_support.hpp"
#include "support/vectors.hpp"

using namespace sunbudget;
using namespace sunbudget::test;
using Catch::Matchers::Contains;

namespace {

namespace fs = std::filesystem;

/// A band of a real scene: its role, file and number in the file.
struct RealBand {
    std::string role;
    std::string file;
    int number = 1;
};

struct RealScene {
    std::vector<RealBand> bands;
    Scaling scaling;
    std::optional<double> nodata;
};

ReflectanceSample sample_of(const RealScene& scene, int threads = 2, int blocks = 64) {
    std::vector<Source> sources;
    sources.reserve(scene.bands.size());
    std::vector<SampledBand> bands;
    for (const auto& band : scene.bands) {
        SourceSpec spec;
        spec.name = {*real_data(band.file), band.number, {}};
        spec.scaling = scene.scaling;
        spec.profile_nodata = scene.nodata;
        sources.push_back(Source::open(spec, inspect(spec.name).grid));
        bands.push_back({band.role, &sources.back()});
    }
    return sample_reflectance(bands, threads, blocks);
}

const std::vector<std::string> six_roles{"blue", "green", "red", "nir", "swir1", "swir2"};
constexpr Scaling collection2{2.75e-5, -0.2};
constexpr Scaling ten_thousandth{1e-4, 0};

std::vector<RealBand> single_files(const std::string& before, const std::vector<std::string>& bands,
                                   const std::string& after) {
    std::vector<RealBand> all;
    for (std::size_t i = 0; i < bands.size(); ++i)
        all.push_back({six_roles[i], before + bands[i] + after, 1});
    return all;
}

std::vector<RealBand> one_file(const std::string& file, const std::vector<int>& numbers) {
    std::vector<RealBand> all;
    for (std::size_t i = 0; i < numbers.size(); ++i)
        all.push_back({six_roles[i], file, numbers[i]});
    return all;
}

RealScene landsat(const std::string& id) {
    return {single_files("landsat_c2l2/" + id + "/" + id + "_SR_B", {"2", "3", "4", "5", "6", "7"},
                         ".TIF"),
            collection2, 0.0};
}
RealScene ireland(const Scaling& scaling) {
    return {single_files("sentinel2_ireland_T29UNU/T29UNU_20221005T115411_",
                         {"B02", "B03", "B04", "B8A", "B11", "B12"}, "_60m_crop.tif"),
            scaling, 0.0};
}
RealScene barbellino(const std::string& day, const Scaling& scaling) {
    return {one_file("sentinel2_barbellino_alps/S2A2A_" + day + "_022_Barbellino_BOA_10.tif",
                     {2, 3, 4, 9, 10, 11}),
            scaling,
            {}};
}
RealScene costa_rica(const std::string& year, const Scaling& scaling = ten_thousandth) {
    return {one_file("costarica_landsat5_sr/L5TSR_" + year + ".tif", {1, 2, 3, 4}), scaling, {}};
}
RealScene zion(const Scaling& scaling) {
    return {single_files("zion_utah/landsat_b", {"2", "3", "4", "5"}, ".tif"), scaling, {}};
}
RealScene marburg(const Scaling& scaling) {
    return {single_files("marburg_landsat_l1/LC08_L1TP_195025_20130707_20170503_01_T1_B",
                         {"2", "3", "4", "5", "6", "7"}, ".TIF"),
            scaling,
            {}};
}
RealScene olinda(const Scaling& scaling) {
    return {one_file("olinda_brazil/L7_ETMs.tif", {1, 2, 3, 4, 5, 6}), scaling, {}};
}

std::string warnings_of(const RealScene& scene) {
    std::string all;
    for (const auto& warning : plausibility_warnings(sample_of(scene))) all += warning + "\n";
    return all;
}

/// A sample with one value a band and pixel, a little noise on it.
ReflectanceSample made(const std::vector<std::pair<std::string, double>>& bands,
                       std::size_t pixels = 1000) {
    std::mt19937 random(5);
    std::uniform_real_distribution<double> noise(-0.002, 0.002);
    ReflectanceSample sample;
    for (const auto& [role, value] : bands) {
        sample.bands.push_back({role, {}});
        for (std::size_t i = 0; i < pixels; ++i)
            sample.bands.back().reflectance.push_back(static_cast<float>(value + noise(random)));
    }
    return sample;
}

}  // namespace

TEST_CASE(
    "Sound scenes raise no warning: forest and cloud, ice sheet, full cloud, lowland, mountains",
    "[raster][vector]") {
    SUNBUDGET_NEEDS_DATA();
    CHECK(warnings_of(landsat("LC08_L2SP_005009_20150710_20200908_02_T2")).empty());
    CHECK(warnings_of(landsat("LC08_L2SP_008059_20191201_20200825_02_T1")).empty());
    CHECK(warnings_of(landsat("LC08_L2SP_017036_20130419_20200913_02_T2")).empty());
    CHECK(warnings_of(ireland({1e-4, -0.1})).empty());
    CHECK(warnings_of(barbellino("20170703", ten_thousandth)).empty());
    CHECK(warnings_of(barbellino("20190723", ten_thousandth)).empty());
    CHECK(warnings_of(costa_rica("2001")).empty());
}

TEST_CASE("Level-1 numbers look like haze under the Level-2 scale and under their own",
          "[raster][vector]") {
    SUNBUDGET_NEEDS_DATA();
    CHECK_THAT(warnings_of(zion(collection2)), Contains("haze"));
    CHECK_THAT(warnings_of(marburg(collection2)), Contains("haze"));
    // Top of the atmosphere: the scale of the metadata file, over the sine of the sun's elevation.
    CHECK_THAT(warnings_of(marburg({2e-5 / 0.857, -0.1 / 0.857})), Contains("haze"));
    CHECK_THAT(warnings_of(zion({2e-5 / 0.85, -0.1 / 0.85})), Contains("haze"));
}

TEST_CASE("Raw numbers look wrong under every scale that somebody might try", "[raster][vector]") {
    SUNBUDGET_NEEDS_DATA();
    CHECK_THAT(warnings_of(zion(ten_thousandth)), Contains("the scale looks wrong"));
    CHECK_THAT(warnings_of(marburg(ten_thousandth)), Contains("the scale looks wrong"));
    CHECK_THAT(warnings_of(olinda(collection2)), Contains("below -0.02"));
    CHECK_THAT(warnings_of(olinda({1, 0})), Contains("the scale looks wrong"));
    CHECK_THAT(warnings_of(olinda({1.0 / 255, 0})), Contains("haze"));
}

TEST_CASE("Bands ten times too bright, and all bands ten times too bright or dark, are noticed",
          "[raster][vector]") {
    SUNBUDGET_NEEDS_DATA();
    CHECK_THAT(warnings_of(costa_rica("1986")), Contains("as no ground is"));
    CHECK_THAT(warnings_of(costa_rica("2001", {1e-3, 0})), Contains("the scale looks wrong"));
    CHECK_THAT(warnings_of(costa_rica("2001", {1e-5, 0})), Contains("only open water is so dark"));
}

TEST_CASE("An offset forgotten or taken off where there is none is noticed", "[raster][vector]") {
    SUNBUDGET_NEEDS_DATA();
    CHECK_THAT(warnings_of(ireland(ten_thousandth)), Contains("an offset looks forgotten"));
    CHECK_THAT(warnings_of(barbellino("20170703", {1e-4, -0.1})), Contains("below -0.02"));
    CHECK_THAT(warnings_of(barbellino("20190723", {1e-4, -0.1})), Contains("below -0.02"));
}

TEST_CASE("Clear blue water is no haze, where near infrared tells water from land",
          "[raster][edge]") {
    auto sea = made({{"blue", 0.06}, {"green", 0.03}, {"red", 0.01}, {"nir", 0.005}}, 5000);
    const auto land = made({{"blue", 0.04}, {"green", 0.06}, {"red", 0.04}, {"nir", 0.3}}, 5000);
    for (std::size_t b = 0; b < sea.bands.size(); ++b)
        sea.bands[b].reflectance.insert(sea.bands[b].reflectance.end(),
                                        land.bands[b].reflectance.begin(),
                                        land.bands[b].reflectance.end());
    CHECK(plausibility_warnings(sea).empty());
    sea.bands.pop_back();
    CHECK(plausibility_warnings(sea).size() == 1);
}

TEST_CASE("Snow, desert and black lava raise no warning", "[raster][edge]") {
    // Reflectances of the size that spectral libraries show (from memory).
    CHECK(plausibility_warnings(made({{"blue", 0.95},
                                      {"green", 0.95},
                                      {"red", 0.93},
                                      {"nir", 0.8},
                                      {"swir1", 0.1},
                                      {"swir2", 0.05}}))
              .empty());
    CHECK(plausibility_warnings(made({{"blue", 0.12},
                                      {"green", 0.22},
                                      {"red", 0.35},
                                      {"nir", 0.42},
                                      {"swir1", 0.5},
                                      {"swir2", 0.45}}))
              .empty());
    CHECK(plausibility_warnings(made({{"blue", 0.04},
                                      {"green", 0.05},
                                      {"red", 0.055},
                                      {"nir", 0.06},
                                      {"swir1", 0.07},
                                      {"swir2", 0.07}}))
              .empty());
}

TEST_CASE("A sample too small for percentiles warns of nothing and has no ranges",
          "[raster][edge]") {
    const auto tiny = made({{"blue", 50}, {"red", 20}, {"nir", 10}}, 99);
    CHECK(ranges_of(tiny).empty());
    CHECK(plausibility_warnings(tiny).empty());
    CHECK(plausibility_warnings({}).empty());
    CHECK_FALSE(plausibility_warnings(made({{"blue", 50}, {"red", 20}, {"nir", 10}}, 100)).empty());
}

TEST_CASE("ranges_of: percentiles of known values", "[raster][vector]") {
    ReflectanceSample sample;
    sample.bands.push_back({"nir", {}});
    for (int i = 100; i >= 0; --i)
        sample.bands[0].reflectance.push_back(static_cast<float>(i) / 64 - 0.125F);  // exact
    const auto range = ranges_of(sample).at(0);
    CHECK(range.p1 == 1.0 / 64 - 0.125);
    CHECK(range.p50 == 50.0 / 64 - 0.125);
    CHECK(range.p99 == 99.0 / 64 - 0.125);
    CHECK(range.share_below_zero == Approx(8.0 / 101));
    CHECK(range.share_above_one == Approx(28.0 / 101));  // 73 to 100: above 72/64 - 0.125 = 1
    CHECK_THAT(text_of(range), Contains("nir -0.109 to 1.422"));
}

TEST_CASE("sample_reflectance: the same pixels for every number of threads",
          "[raster][differential]") {
    SUNBUDGET_NEEDS_DATA();
    const auto scene = zion(collection2);
    const auto one = sample_of(scene, 1), three = sample_of(scene, 3);
    REQUIRE(one.size() > 100000);
    CHECK(one.pixels_looked_at == three.pixels_looked_at);
    for (std::size_t b = 0; b < one.bands.size(); ++b)
        CHECK(one.bands[b].reflectance == three.bands[b].reflectance);
    CHECK_FALSE(one.whole);
}

TEST_CASE("sample_reflectance: a small scene is read whole, pixels without a value left out",
          "[raster][edge]") {
    SUNBUDGET_NEEDS_DATA();
    const auto sample = sample_of(landsat("LC08_L2SP_005009_20150710_20200908_02_T2"));
    CHECK(sample.whole);
    CHECK(sample.pixels_looked_at == 512 * 512);
    CHECK(sample.size() == 138293);  // counted with GDAL in Python: no band is 0
}
