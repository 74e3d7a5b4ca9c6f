#include <catch2/catch.hpp>
#include <filesystem>
#include <string>
#include <tuple>

#include "layer_maker.hpp"
#include "sunbudget/base/digest.hpp"
#include "support/vectors.hpp"

using namespace sunbudget;
using namespace sunbudget::test;

namespace {
void check_every_level(const LayerFile& layer, const std::filesystem::path& file) {
    for (int band = 0; band < static_cast<int>(layer.bands.size()); ++band) {
        const auto levels = reference_levels(layer, band);
        REQUIRE(levels.size() == layout_of(layer).levels.size());
        for (int level = 0; level < static_cast<int>(levels.size()); ++level) {
            CAPTURE(band, level);
            CHECK(same_pixels(read_level(file, band, level),
                              levels[static_cast<std::size_t>(level)]));
        }
    }
}

void check_validated(const std::filesystem::path& file) {
    const auto [content, text] = validated(file);
    CAPTURE(text);
    CHECK(content);
    CHECK(text.find("is a valid cloud optimized GeoTIFF") != std::string::npos);
    CHECK(text.find("arning") == std::string::npos);
}
}  // namespace

TEST_CASE("finish_layer: GDAL reads at every level what was put", "[raster][differential]") {
    const auto [width, height] =
        GENERATE(table<int, int>({{1, 1}, {1, 700}, {513, 511}, {1000, 1300}}));
    const int tile = GENERATE(128, 256, 512);
    const auto sample = GENERATE(Sample::float32, Sample::uint16);
    const int bands = width == 1000 ? 1 : GENERATE(1, 12);
    CAPTURE(width, height, tile, bands, static_cast<int>(sample));
    TemporaryFolder folder;
    const auto layer = invented_layer(width, height, tile, bands, sample);
    check_every_level(layer, made(layer, folder.path()));
}

TEST_CASE("finish_layer: the same bytes whatever the order and the threads",
          "[raster][differential]") {
    const auto sample = GENERATE(Sample::float32, Sample::uint16);
    const auto layer = invented_layer(1000, 1300, 128, 3, sample);
    TemporaryFolder folder;
    const auto expected = sha256_of_file(made(layer, folder.path() / "plain"));
    for (unsigned seed = 1; seed <= 4; ++seed) {
        CAPTURE(seed);
        const auto file =
            made(layer, folder.path() / std::to_string(seed), seed, 1 + static_cast<int>(seed) % 4);
        CHECK(sha256_of_file(file) == expected);
    }
}

TEST_CASE("finish_layer: the public validator is content without a warning", "[raster]") {
    const auto [width, height, tile, bands, sample] =
        GENERATE(table<int, int, int, int, Sample>({{1, 1, 512, 1, Sample::float32},
                                                    {513, 511, 128, 12, Sample::uint16},
                                                    {1000, 1300, 256, 1, Sample::float32},
                                                    {1000, 1300, 512, 3, Sample::float32}}));
    CAPTURE(width, height, tile, bands);
    TemporaryFolder folder;
    check_validated(made(invented_layer(width, height, tile, bands, sample), folder.path()));
}

TEST_CASE("finish_layer: the public validator is content with 365 bands", "[raster]") {
    const auto layer = invented_layer(1024, 1024, 512, 365, Sample::float32);
    TemporaryFolder folder;
    auto spool = Spool::create(folder.path() / "spool", layout_of(layer));
    Pyramid pyramid(layer, spool);
    for (int row = 0; row < 2; ++row)
        for (int column = 0; column < 2; ++column) {
            // One day's pixels for every day: the file's build is looked at here, not its pixels.
            const auto pixels = invented_tile(layer, 0, column, row);
            for (int band = 0; band < 365; ++band) pyramid.put(band, column, row, pixels);
        }
    const auto file = folder.path() / "days.tif";
    finish_layer(layer, spool, {}, file);
    check_validated(file);
    CHECK(same_pixels(read_level(file, 364, 0), reference_levels(layer, 0)[0]));
}
