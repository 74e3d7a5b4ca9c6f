#include <catch2/catch.hpp>
#include <map>

#include "input_support.hpp"
#include "sunbudget/raster/grid_build.hpp"

using namespace sunbudget;
using namespace sunbudget::test;

namespace {

/// One by one, through the reader.
CodeCounts slowly_counted(const SourceSpec& spec) {
    const auto codes = read_all_codes(spec);
    CodeCounts all;
    for (int r = 0; r < codes.height(); ++r)
        for (const auto code : codes.row(r))
            (code == no_code ? all.without_code : all.counts[code]) += 1;
    return all;
}

}  // namespace

TEST_CASE("count_codes: agrees with counting pixel by pixel, for any number of threads",
          "[raster][differential]") {
    const TemporaryFolder folder;
    const std::string type = GENERATE("Byte", "Int16", "UInt16", "Int32", "Float32");
    const bool masked = GENERATE(false, true);
    CAPTURE(type, masked);
    MadeRaster made{
        .grid = square_grid(700, 130, 0, 1300, 10),
        .type = type,
        .bands = {[](int c, int r) { return static_cast<double>((c * 7 + r * 13) % 97); }},
        .nodata = 13,
        .options = {"TILED=YES", "BLOCKXSIZE=64", "BLOCKYSIZE=32"}};
    if (masked) made.mask = [](int c, int r) { return (c + r) % 5 != 0; };
    if (type == "Int32")
        made.bands = {[](int c, int r) { return (c * 7 + r * 13) % 97 - 1e6 * (c % 3); }};
    const auto spec = spec_of(make_raster(folder.path() / "codes.tif", made), DataKind::code);
    const auto source = Source::open(spec, made.grid);
    const auto slow = slowly_counted(spec);
    for (const int threads : {1, 2, 5}) {
        const auto fast = count_codes(source, threads);
        CHECK(fast.counts == slow.counts);
        CHECK(fast.without_code == slow.without_code);
        CHECK(fast.total() == 700u * 130u);
    }
}

TEST_CASE("count_codes: counts only what the target covers", "[raster][edge]") {
    const TemporaryFolder folder;
    const bool south_up = GENERATE(false, true);
    auto grid = square_grid(50, 40, 0, 400, 10);
    auto stored = grid;
    if (south_up) stored.affine[3] = 0, stored.affine[5] = 10;
    const auto spec =
        spec_of(make_raster(folder.path() / "codes.tif",
                            {.grid = stored, .type = "Byte", .bands = {[=](int, int r) {
                                                                 return static_cast<double>(
                                                                     south_up ? 39 - r : r);
                                                             }}}),
                DataKind::code);
    // Rows 10 to 12, 20 columns.
    const auto counts =
        count_codes(Source::open(spec, cropped(grid, Bounds{100, 270, 300, 300}, {})), 2);
    CHECK(counts.counts == std::map<std::int32_t, std::uint64_t>{{10, 20}, {11, 20}, {12, 20}});
    // The same ground in another CRS: the rectangle around it, a few pixels more.
    const auto other = square_grid(20, 20, 500000, 5300000, 30, "EPSG:32632");
    const auto wide = spec_of(
        make_raster(folder.path() / "wide.tif", {.grid = square_grid(400, 400, 50000, 5320000, 100),
                                                 .type = "Byte",
                                                 .bands = {[](int, int) { return 1.0; }}}),
        DataKind::code);
    const auto place = count_codes(Source::open(wide, other), 1).total();
    CHECK(place >= 36);
    CHECK(place < 100);
}

TEST_CASE("count_codes: a tile of 1.3 billion pixels", "[raster][vector]") {
    SUNBUDGET_NEEDS_DATA();
    const auto spec = spec_of(*real_data("landcover/ESA_WorldCover_10m_2021_v200_N00E006_Map.tif"),
                              DataKind::code);
    const auto source = Source::open(spec, inspect(spec.name).grid);
    const auto counts = count_codes(source, 2);
    // Counted once with numpy over all tiles that GDAL's Python bindings read.
    CHECK(counts.without_code == 1131331361u);
    const std::map<std::int32_t, std::uint64_t> expected{
        {10, 10819361}, {20, 778},       {30, 392489}, {40, 4672}, {50, 181604},
        {60, 124660},   {80, 153136048}, {90, 4390},   {95, 4637}};
    CHECK(counts.counts == expected);
    const auto sample = sample_codes(source, 2, 40);
    CHECK(sample.total() > 36u << 20);
    CHECK(sample.counts.count(80) == 1);
}
