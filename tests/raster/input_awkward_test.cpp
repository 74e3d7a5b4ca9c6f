#include <array>
#include <catch2/catch.hpp>
#include <cmath>
#include <set>

#include "input_support.hpp"
#include "sunbudget/base/error.hpp"
#include "sunbudget/raster/grid_build.hpp"
#include "sunbudget/raster/source.hpp"

using namespace sunbudget;
using namespace sunbudget::test;

namespace {

/// What a file must come to: refused with a piece of text, or read with so many valid pixels of so
/// many, whose mean is known. Counts and means were taken with numpy on the arrays, masks, scales and
/// offsets that GDAL's Python bindings give (stored order, so flips do not matter).
struct Case {
    const char* file;
    const char* refused;  // nullptr: read
    long valid = 0;
    long pixels = 0;
    double mean = 0;
};

constexpr std::array cases{
    Case{"made/nlcd_jpeg_lossy.tif", nullptr, 18392, 18392, 43.799369291},
    Case{"made/nlcd_same_place_epsg5070.tif", nullptr, 20311, 26752, 43.7971542514},
    Case{"made/nlcd_same_place_us_feet_epsg3566.tif", nullptr, 19767, 19908, 43.7588404917},
    Case{"made/zion_b4_bigtiff_bigendian_striped.tif", nullptr, 20480, 20480, 10138.4063965},
    Case{"made/zion_b4_flipped_bytes.tif", "pixels cannot be read: ZIPDecode"},
    Case{"made/zion_b4_nan_inf_no_nodata_tag.tif", nullptr, 19479, 20480, 10176.3158273},
    Case{"made/zion_b4_nan_nodata_tag.tif", nullptr, 20080, 20480, 10170.8926295},
    Case{"made/zion_b4_no_crs.tif", "it has no CRS"},
    Case{"made/zion_b4_no_georef.tif", "it has no georeference"},
    Case{"made/zion_b4_not_a_tiff.tif", "this is in no raster format known here"},
    Case{"made/zion_b4_one_column.tif", nullptr, 128, 128, 11122.5078125},
    Case{"made/zion_b4_one_pixel.tif", nullptr, 1, 1, 8078},
    Case{"made/zion_b4_one_row.tif", nullptr, 160, 160, 9094.33125},
    Case{"made/zion_b4_reference.tif", nullptr, 20480, 20480, 10138.4063965},
    Case{"made/zion_b4_rotated_geotransform_30deg.tif", nullptr, 20480, 20480, 10138.4063965},
    Case{"made/zion_b4_scale_offset_in_tags.tif", nullptr, 20480, 20480, 0.10276812793},
    Case{"made/zion_b4_south_up.tif", nullptr, 20480, 20480, 10138.4063965},
    Case{"made/zion_b4_sparse_tiles.tif", nullptr, 20480, 20480, 1942.79267578},
    Case{"made/zion_b4_tiled_16_lzw.tif", nullptr, 20480, 20480, 10138.4063965},
    Case{"made/zion_b4_truncated_60pct.tif", "the file is cut short"},
    Case{"made/zion_b4_truncated_header.tif", "the TIFF header is damaged or cut short"},
    Case{"made/zion_b4_zero_bytes.tif", "the file is empty (0 bytes)"},
    Case{"real/GeogToWGS84GeoKey5.tif", nullptr, 10201, 10201, 1.79658856975},
    // The scale tag is wrong, but it is what the file says: 10000 instead of 0.0001.
    Case{"real/MOD13A1.A2022081.h09v05.006.2022101145817_BR_B06_cropped.TIF", nullptr, 16, 16,
         8256875},
    Case{"real/RGBA.uint16.tif", nullptr, 127316, 260574, 10000},
    Case{"real/all-nodata.tif", nullptr, 0, 175725, 0},
    Case{"real/cog_dateline.tif", nullptr, 5475375, 5475375, 14907.0978311},
    Case{"real/cog_gradient.tif", nullptr, 1155, 1155, 577},
    Case{"real/cog_nonearth.tif", "another celestial body"},
    Case{"real/cog_rgb_mask.tif", nullptr, 86117, 88856, 99.6702044892},
    Case{"real/cog_scale.tif", nullptr, 65530, 65536, 1000.48977903},
    Case{"real/cog_scale.tif:2", nullptr, 65530, 65536, 2004.89779029},
    Case{"real/corrupt.tif", "the file is cut short"},
    Case{"real/float_nan.tif", "it has no CRS"},
    Case{"real/float_raster_with_nodata.tif", nullptr, 98, 156, 0.00765306122449},
    Case{"real/geomatrix.tif", nullptr, 400, 400, 126.765},
    Case{"real/goes.tif", nullptr, 230052, 293764, 25.6120398866},
    Case{"real/inverted_lat.tif", nullptr, 0, 259200, 0},
    Case{"real/logo.tif", "its CRS is not tied to the Earth"},
    Case{"real/na.tif", nullptr, 99, 100, 0.488522805603},
    Case{"real/nt_20201024_f18_nrt_s.tif", nullptr, 82863, 104912, 28.5602886691},
    Case{"real/rgb-byte-tenth.tif", nullptr, 3784, 5609, 44.2832980973},
    Case{"real/rotated.tif", "it has no CRS"},
    Case{"real/test_esri_wkt.tif", nullptr, 4, 4, 2.5},
};

/// Means of floats: each pixel is rounded to 24 bits before it is added.
constexpr double mean_tolerance = 1e-6;

void check(const Case& expected, const Plane<float>& pixels) {
    long valid = 0;
    double sum = 0;
    for (int r = 0; r < pixels.height(); ++r)
        for (const float value : pixels.row(r))
            if (!std::isnan(value)) {
                ++valid;
                sum += static_cast<double>(value);
            }
    CHECK(valid == expected.valid);
    CHECK(static_cast<long>(pixels.width()) * pixels.height() == expected.pixels);
    if (valid > 0)
        CHECK(sum / static_cast<double>(valid) == Approx(expected.mean).epsilon(mean_tolerance));
}

}  // namespace

TEST_CASE("input: every awkward file reads right or is refused with a reason", "[raster][edge]") {
    SUNBUDGET_NEEDS_DATA();
    for (const auto& expected : cases) {
        CAPTURE(expected.file);
        SourceSpec spec;
        const std::string name = expected.file;
        spec.name =
            raster_name(awkward(name.substr(0, name.find(':'))).native() +
                        (name.find(':') == std::string::npos ? "" : name.substr(name.find(':'))));
        Plane<float> pixels;
        const auto error = error_text([&] { pixels = read_all(spec); });
        if (expected.refused != nullptr)
            CHECK_THAT(error, Catch::Matchers::Contains(expected.refused));
        else {
            CHECK(error == "");
            check(expected, pixels);
        }
    }
}

TEST_CASE("input: the table holds every awkward file", "[raster][edge]") {
    SUNBUDGET_NEEDS_DATA();
    std::set<std::string> listed;
    for (const auto& known : cases) listed.insert(known.file);
    for (const char* folder : {"made", "real"})
        for (const auto& entry : std::filesystem::directory_iterator(awkward(folder)))
            CHECK(listed.count(folder + ("/" + entry.path().filename().string())) == 1);
}

TEST_CASE("input: the same ground reads the same however it is stored", "[raster][differential]") {
    SUNBUDGET_NEEDS_DATA();
    const auto reference = read_all(spec_of(awkward("made/zion_b4_reference.tif")));
    const auto grid = inspect({awkward("made/zion_b4_reference.tif")}).grid;
    for (const char* other : {"south_up", "bigtiff_bigendian_striped", "tiled_16_lzw"}) {
        CAPTURE(other);
        const auto file = awkward(std::string("made/zion_b4_") + other + ".tif");
        CHECK(inspect({file}).grid == grid);
        CHECK(same_bits(read_all(spec_of(file), grid), reference));
    }
}

TEST_CASE("input: scale and offset in the tags are applied once, in double", "[raster][vector]") {
    SUNBUDGET_NEEDS_DATA();
    const auto numbers = read_all(spec_of(awkward("made/zion_b4_reference.tif")));
    const auto values = read_all(spec_of(awkward("made/zion_b4_scale_offset_in_tags.tif")));
    for (int r = 0; r < numbers.height(); ++r)
        for (int c = 0; c < numbers.width(); ++c)
            REQUIRE(values.at(c, r) ==
                    static_cast<float>(static_cast<double>(numbers.at(c, r)) * 2e-5 + -0.1));
}

TEST_CASE("input: sparse tiles read as the zeros that they stand for", "[raster][edge]") {
    SUNBUDGET_NEEDS_DATA();
    const auto reference = read_all(spec_of(awkward("made/zion_b4_reference.tif")));
    const auto sparse = read_all(spec_of(awkward("made/zion_b4_sparse_tiles.tif")));
    long zeros = 0, others = 0;
    for (int r = 0; r < sparse.height(); ++r)
        for (int c = 0; c < sparse.width(); ++c) {
            const float value = sparse.at(c, r);
            (value == 0 ? zeros : others) += 1;
            if (value != 0) CHECK(value == reference.at(c, r));
        }
    // One of the six 64-pixel tiles is there.
    CHECK(others == 64 * 64);
    CHECK(zeros == 160 * 128 - 64 * 64);
}

TEST_CASE("input: a mean far from the product's range betrays an inverted scale tag",
          "[raster][edge]") {
    SUNBUDGET_NEEDS_DATA();
    auto spec =
        spec_of(awkward("real/MOD13A1.A2022081.h09v05.006.2022101145817_BR_B06_cropped.TIF"));
    spec.profile_scaling = Scaling{0.0001, 0};
    const auto source = Source::open(spec, inspect(spec.name).grid);
    CHECK(source.scaling_origin() == Origin::file);
    REQUIRE(source.warnings().size() == 1);
    CHECK_THAT(source.warnings()[0],
               Catch::Matchers::Contains("It looks upside down: give scale: 0.0001"));
    spec.scaling = Scaling{0.0001, 0};
    CHECK(Source::open(spec, source.target()).scaling() == Scaling{0.0001, 0});
}
