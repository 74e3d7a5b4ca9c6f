// The reflectance route on real scenes, block by block as a run does it: sources, weights, range,
// quality; against plain double arithmetic on pixels that GDAL read.
#include <gdal_priv.h>

#include <catch2/catch.hpp>
#include <cmath>
#include <limits>

#include "raster/input_support.hpp"
#include "sunbudget/physics/broadband.hpp"
#include "sunbudget/physics/quality_bits.hpp"
#include "sunbudget/raster/gdal_setup.hpp"
#include "sunbudget/raster/scene.hpp"
#include "sunbudget/tables/quality.hpp"
#include "sunbudget/tables/sensors.hpp"
#include "support/vectors.hpp"

using namespace sunbudget;
using namespace sunbudget::test;
using Catch::Matchers::WithinAbs;

namespace {

namespace fs = std::filesystem;

std::vector<int> stored_numbers(const fs::path& file) {
    gdal_setup(64 << 20);
    const std::unique_ptr<GDALDataset, void (*)(GDALDataset*)> dataset(
        GDALDataset::FromHandle(GDALOpen(file.c_str(), GA_ReadOnly)),
        [](GDALDataset* open) { GDALClose(GDALDataset::ToHandle(open)); });
    REQUIRE(dataset);
    const int width = dataset->GetRasterXSize(), height = dataset->GetRasterYSize();
    std::vector<int> numbers(static_cast<std::size_t>(width) * static_cast<std::size_t>(height));
    REQUIRE(dataset->GetRasterBand(1)->RasterIO(GF_Read, 0, 0, width, height, numbers.data(), width,
                                                height, GDT_Int32, 0, 0, nullptr) == CE_None);
    return numbers;
}

/// A whole scene's albedo and quality, as a run makes them.
struct Route {
    Plane<float> albedo;
    Plane<std::uint16_t> flags;
    Plane<RejectReason> reasons;
};

const Sensor& oli() {
    return sensor("landsat-oli-c2");
}
const WeightSet& liang() {
    return weight_set("landsat-oli-c2", "liang2001");
}

Plane<float> read_band(const fs::path& file) {
    auto spec = spec_of(file);
    spec.profile_scaling = Scaling{oli().scale, oli().offset};
    spec.profile_nodata = oli().fill;
    return read_all(spec);
}

void sum_bands(const Scene& scene, Route& route) {
    std::vector<Plane<float>> planes;
    for (const auto& weight : liang().weights)
        planes.push_back(read_band(scene.files.at(oli().band(weight.band)->product)));
    route.albedo = Plane<float>(planes[0].width(), planes[0].height());
    route.flags = Plane<std::uint16_t>(planes[0].width(), planes[0].height(), 0);
    route.reasons = Plane<RejectReason>(planes[0].width(), planes[0].height(), not_rejected);
    for (int r = 0; r < planes[0].height(); ++r) {
        std::vector<WeightedBand> bands;
        for (std::size_t b = 0; b < planes.size(); ++b)
            bands.push_back({static_cast<float>(liang().weights[b].weight), planes[b].row(r)});
        broadband_sum(bands, static_cast<float>(liang().constant), route.albedo.row(r));
    }
}

/// Reasons in the order of the profile's tests.
void judge(const Scene& scene, const std::string& raster, Route& route) {
    std::vector<QualityBits> tests;
    for (std::size_t i = 0; i < oli().tests.size(); ++i) {
        const auto& test = oli().tests[i];
        if (test.raster != raster) continue;
        tests.push_back({test.first_bit, test.bits, test.value, test.flag,
                         test.rejects ? static_cast<RejectReason>(i) : not_rejected});
    }
    const auto codes = read_all_codes(spec_of(scene.files.at(raster), DataKind::code));
    for (int r = 0; r < codes.height(); ++r)
        apply_quality(codes.row(r), tests, 0, route.flags.row(r), route.reasons.row(r));
}

Scene real_scene(const std::string& id) {
    return scene_in(*real_data("landsat_c2l2/" + id));
}

/// The sum by hand, NaN for the fill.
std::vector<double> plain_albedo(const Scene& scene) {
    std::vector<double> albedo;
    for (const auto& [band, weight] : liang().weights) {
        const auto numbers = stored_numbers(scene.files.at(oli().band(band)->product));
        albedo.resize(numbers.size(), -0.0018);  // constant of Liang 2001, in tests/tables
        for (std::size_t i = 0; i < numbers.size(); ++i)
            albedo[i] += numbers[i] == 0 ? std::numeric_limits<double>::quiet_NaN()
                                         : weight * (2.75e-5 * numbers[i] - 0.2);
    }
    return albedo;
}

const std::vector<std::string> scenes{"LC08_L2SP_005009_20150710_20200908_02_T2",
                                      "LC08_L2SP_008059_20191201_20200825_02_T1",
                                      "LC08_L2SP_017036_20130419_20200913_02_T2"};

}  // namespace

TEST_CASE("Liang's albedo of each Collection 2 scene is that of plain arithmetic on GDAL's pixels",
          "[raster][differential]") {
    SUNBUDGET_NEEDS_DATA();
    const auto scene = real_scene(GENERATE(from_range(scenes)));
    Route route;
    sum_bands(scene, route);
    const auto plain = plain_albedo(scene);
    double worst = 0;
    std::size_t values = 0;
    for (std::size_t i = 0; i < plain.size(); ++i) {
        const auto width = static_cast<std::size_t>(route.albedo.width());
        const float found = route.albedo.row(static_cast<int>(i / width))[i % width];
        REQUIRE(std::isnan(plain[i]) == std::isnan(found));
        if (std::isnan(found)) continue;
        ++values;
        worst = std::max(worst, std::abs(plain[i] - static_cast<double>(found)));
    }
    CHECK(values > 100000);
    // Five reflectances rounded to float (6e-8 each, weights sum to 1), five products and sums below
    // 2 (6e-8 each): under 1e-6, a hundredth of the stored quantum.
    CHECK(worst < 1e-6);
}

TEST_CASE(
    "Quality bits reject what they say, pixel by pixel, and leave nothing of the clouded scene",
    "[raster][vector]") {
    SUNBUDGET_NEEDS_DATA();
    struct Row {
        std::string id;
        int fill, dilated_cloud, cirrus, cloud, cloud_shadow, kept;
    };
    // Counted with NumPy from QA_PIXEL, each pixel under the first of these bits that it has.
    const auto row = GENERATE(values<Row>({
        {scenes[0], 124772, 5340, 1274, 73833, 3131, 53794},
        {scenes[1], 81507, 5753, 9859, 136562, 7129, 21334},
        {scenes[2], 86129, 0, 174638, 1377, 0, 0},
    }));
    const auto scene = real_scene(row.id);
    Route route;
    sum_bands(scene, route);
    judge(scene, "QA_PIXEL", route);
    std::vector<int> counts(256, 0);
    for (int r = 0; r < route.reasons.height(); ++r)
        for (const auto reason : route.reasons.row(r)) ++counts[reason];
    CAPTURE(row.id);
    CHECK(counts[0] == row.fill);
    CHECK(counts[1] == row.dilated_cloud);
    CHECK(counts[2] == row.cirrus);
    CHECK(counts[3] == row.cloud);
    CHECK(counts[4] == row.cloud_shadow);
    CHECK(counts[not_rejected] == row.kept);
}

TEST_CASE("A rejected pixel has no albedo; snow is kept and flagged", "[raster][edge]") {
    SUNBUDGET_NEEDS_DATA();
    const auto scene = real_scene(scenes[0]);
    Route route;
    sum_bands(scene, route);
    for (const auto* raster : {"QA_PIXEL", "QA_RADSAT", "SR_QA_AEROSOL"})
        judge(scene, raster, route);
    std::size_t snow = 0;
    for (int r = 0; r < route.albedo.height(); ++r) {
        keep_albedo(route.albedo.row(r), static_cast<float>(liang().fit_error),
                    quality::out_of_range, route.flags.row(r));
        drop_rejected(route.reasons.row(r), route.albedo.row(r));
        for (std::size_t c = 0; c < 512; ++c) {
            const bool rejected = route.reasons.row(r)[c] != not_rejected;
            const float albedo = route.albedo.row(r)[c];
            if (rejected) REQUIRE(std::isnan(albedo));
            if (!std::isnan(albedo)) REQUIRE((albedo >= 0 && albedo <= 1));
            if (!rejected && (route.flags.row(r)[c] & quality::snow) != 0 && albedo > 0.6F) ++snow;
        }
    }
    CHECK(snow > 40000);  // most of the 53794 clear pixels are the ice sheet
}

TEST_CASE("Scale and offset in the file win over the profile's, the user's over both, none twice",
          "[raster][edge]") {
    SUNBUDGET_NEEDS_DATA();
    const auto file = awkward("made/zion_b4_scale_offset_in_tags.tif");
    const auto numbers = stored_numbers(file);
    auto spec = spec_of(file);
    spec.profile_scaling = Scaling{oli().scale, oli().offset};
    const auto check = [&](double scale, double offset, Origin origin) {
        const auto source = Source::open(spec, inspect(spec.name).grid);
        CHECK(source.scaling_origin() == origin);
        const auto plane = read_all(spec);
        const auto wanted = static_cast<float>(scale * numbers[5 * 160 + 7] + offset);
        CHECK(plane.row(5)[7] == Approx(wanted).epsilon(1e-6));  // float rounding
    };
    check(2e-5, -0.1, Origin::file);  // the tags, as gdalinfo shows them
    spec.scaling = Scaling{1e-4, 0};
    check(1e-4, 0, Origin::user);
}

TEST_CASE("A Collection 2 band has no scale of its own, so the profile's is used once",
          "[raster][edge]") {
    SUNBUDGET_NEEDS_DATA();
    const auto file = real_scene(scenes[1]).files.at("SR_B5");
    auto spec = spec_of(file);
    spec.profile_scaling = Scaling{oli().scale, oli().offset};
    spec.profile_nodata = oli().fill;
    const auto source = Source::open(spec, inspect(spec.name).grid);
    CHECK(source.scaling_origin() == Origin::profile);
    CHECK(source.scaling() == Scaling{2.75e-5, -0.2});
    CHECK(source.nodata() == 0.0);
}
