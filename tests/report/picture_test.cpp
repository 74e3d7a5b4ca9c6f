// Pictures of layers: the right colours, at a bounded size.
#include <gdal_priv.h>
#include <catch2/catch.hpp>

#include <cmath>
#include <fstream>

#include "picture.hpp"
#include "raster/input_support.hpp"
#include "sunbudget/raster/gdal_setup.hpp"
#include "sunbudget/raster/preview.hpp"
#include "support/vectors.hpp"

using namespace sunbudget;
using namespace sunbudget::test;

TEST_CASE("png_of: another reader finds the same pixels and colours, the first see-through",
          "[report][differential]") {
    GDALAllRegister();
    const TemporaryFolder folder;
    Plane<std::uint8_t> pixels(70, 33);
    for (int r = 0; r < 33; ++r)
        for (int c = 0; c < 70; ++c)
            pixels.at(c, r) = static_cast<std::uint8_t>((c * 7 + r * 13) % 200);
    std::vector<Colour> palette;
    for (int i = 0; i < 200; ++i)
        palette.push_back({static_cast<std::uint8_t>(i), static_cast<std::uint8_t>(255 - i),
                           static_cast<std::uint8_t>(i / 2)});
    const auto bytes = png_of(pixels, palette);
    const auto file = folder.path() / "a.png";
    std::ofstream(file, std::ios::binary)
        .write(reinterpret_cast<const char*>(bytes.data()),
               static_cast<std::streamsize>(bytes.size()));
    constexpr const char* drivers[] = {"PNG", nullptr};
    const std::unique_ptr<GDALDataset> read(
        GDALDataset::Open(file.c_str(), GDAL_OF_RASTER, drivers));
    REQUIRE(read);
    REQUIRE(read->GetRasterXSize() == 70);
    std::vector<std::uint8_t> found(70 * 33);
    REQUIRE(read->GetRasterBand(1)->RasterIO(GF_Read, 0, 0, 70, 33, found.data(), 70, 33, GDT_Byte,
                                             0, 0, nullptr) == CE_None);
    int wrong = 0;
    for (int r = 0; r < 33; ++r)
        for (int c = 0; c < 70; ++c)
            wrong += found[static_cast<std::size_t>(r * 70 + c)] != pixels.at(c, r);
    CHECK(wrong == 0);
    const auto* colours = read->GetRasterBand(1)->GetColorTable();
    REQUIRE(colours->GetColorEntryCount() == 200);
    CHECK(colours->GetColorEntry(199)->c1 == 199);
    CHECK(colours->GetColorEntry(199)->c2 == 56);
    CHECK(colours->GetColorEntry(0)->c4 == 0);
    CHECK(colours->GetColorEntry(1)->c4 == 255);
    CHECK(png_of(pixels, palette) == bytes);
}

TEST_CASE(
    "preview: bounded whatever the raster's size; means of squares where there are no overviews",
    "[report][property]") {
    gdal_setup(std::uint64_t{64} << 20);
    const TemporaryFolder folder;
    MadeRaster made;
    made.grid = {
        101, 50, {500000, 2, 0, 5600000, 0, -2}, square_grid(1, 1, 500000, 5600000, 2).crs_wkt};
    made.bands = {[](int c, int r) { return c == 0 && r == 0 ? std::nan("") : c + 1000.0 * r; }};
    const auto file = make_raster(folder.path() / "a.tif", made);
    const auto whole = preview(file, 1, 101);
    CHECK(whole.width() == 101);
    CHECK(whole.at(100, 49) == 49100);
    const auto half = preview(file, 1, 60);
    REQUIRE(half.width() == 51);
    REQUIRE(half.height() == 25);
    CHECK(half.at(1, 1) == 2502.5F);                          // of 2002, 2003, 3002, 3003
    CHECK(half.at(0, 0) == Approx((1 + 1000 + 1001) / 3.0));  // nodata left out
    CHECK(half.at(50, 0) == 600);                             // the last column alone: 100 and 1100
    made.type = "UInt16";
    made.bands = {[](int c, int r) { return 8 * c + r; }};
    const auto flags = preview(make_raster(folder.path() / "b.tif", made), 1, 60);
    CHECK(flags.at(1, 1) == 8 * 2 + 2);  // the upper left pixel
}

TEST_CASE("ColourMap: lightness goes one way, so that order can be read without hue",
          "[report][property]") {
    const auto lightness = [](const Colour& c) {
        const auto linear = [](double v) {
            return v <= 0.04045 ? v / 12.92 : std::pow((v + 0.055) / 1.055, 2.4);
        };
        // CIE 1976 from relative luminance, sRGB primaries (IEC 61966-2-1).
        const double y = 0.2126 * linear(c.red / 255.0) + 0.7152 * linear(c.green / 255.0) +
                         0.0722 * linear(c.blue / 255.0);
        return y > 0.008856 ? 116 * std::cbrt(y) - 16 : 903.3 * y;
    };
    for (const auto* name : {"inferno", "viridis", "cividis"}) {
        CAPTURE(name);
        const auto& map = ColourMap::named(name);
        for (int i = 1; i <= 64; ++i)
            CHECK(lightness(map.at(i / 64.0)) >
                  lightness(map.at((i - 1) / 64.0)) - 0.3);  // rounding to 8 bits
        CHECK(lightness(map.at(1)) - lightness(map.at(0)) > 70);
    }
    const auto& two_sided = ColourMap::named("puor");
    for (int i = 1; i <= 20; ++i) {
        CHECK(lightness(two_sided.at(0.5 + i / 40.0)) <
              lightness(two_sided.at(0.5 + (i - 1) / 40.0)));
        CHECK(lightness(two_sided.at(0.5 - i / 40.0)) <
              lightness(two_sided.at(0.5 - (i - 1) / 40.0)));
    }
    CHECK(ColourMap::named("twilight").at(0) == ColourMap::named("twilight").at(1));
}

TEST_CASE("scale_for: readable ends around the middle 96 %, symmetric for differences",
          "[report][property]") {
    Plane<float> plane(100, 10);
    for (int r = 0; r < 10; ++r)
        for (int c = 0; c < 100; ++c)
            plane.at(c, r) = static_cast<float>(c == 99 && r == 9 ? 5000 : 200 + c);
    const Plane<float>* planes[] = {&plane};
    const auto scale = scale_for(layer(LayerId::net_shortwave), false, planes);
    CHECK(scale.low == 200);
    CHECK(scale.high == 300);
    CHECK(scale.cut);
    const auto difference = scale_for(layer(LayerId::net_shortwave), true, planes);
    CHECK(difference.low == -difference.high);
    const Plane<float> nothing(3, 3, std::nanf(""));
    planes[0] = &nothing;
    CHECK(scale_for(layer(LayerId::albedo), false, planes).low <
          scale_for(layer(LayerId::albedo), false, planes).high);
    const Plane<float> constant(3, 3, 0.2F);
    planes[0] = &constant;
    const auto narrow = scale_for(layer(LayerId::albedo), false, planes);
    CHECK((narrow.low < 0.2 && narrow.high > 0.2));
    for (const double least : {0.7, 1.0, 1.1, 2.5, 5.0, 6.0, 0.0003}) {
        CHECK(readable_step(least) >= least * 0.999999);
        CHECK(readable_step(least) < least * 2.6);
    }
}
