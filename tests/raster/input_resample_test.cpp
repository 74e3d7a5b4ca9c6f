#include <algorithm>
#include <catch2/catch.hpp>
#include <cmath>
#include <limits>
#include <numbers>

#include "input_support.hpp"
#include "sunbudget/base/parallel.hpp"
#include "sunbudget/raster/grid_build.hpp"
#include "sunbudget/raster/source.hpp"

using namespace sunbudget;
using namespace sunbudget::test;
using Catch::Matchers::Contains;

namespace {

constexpr double not_a_number = std::numeric_limits<double>::quiet_NaN();

/// Part of the Landsat grid over Zion, 30 m.
Grid zion_part() {
    return square_grid(300, 260, 309015, 4130025, 30, "EPSG:32612");
}

SourceSpec zion(const char* file, DataKind kind = DataKind::continuous) {
    return spec_of(*real_data(std::string("zion_utah/") + file), kind);
}

/// Rough ground without a pattern: an integer hash of the pixel, 0 to 255.
double noise(int c, int r) {
    auto h =
        static_cast<std::uint32_t>(c) * 2654435761u ^ static_cast<std::uint32_t>(r) * 2246822519u;
    h ^= h >> 15;
    h *= 2654435761u;
    return (h >> 13) % 256;
}

struct Difference {
    double greatest = 0;
    long unequal = 0;
    long compared = 0;
    long one_sided = 0;  ///< a value in one plane only
};
Difference difference(const Plane<float>& a, const Plane<float>& b) {
    REQUIRE(a.width() == b.width());
    REQUIRE(a.height() == b.height());
    Difference d;
    for (int r = 0; r < a.height(); ++r)
        for (int c = 0; c < a.width(); ++c) {
            const float x = a.at(c, r), y = b.at(c, r);
            if (std::isnan(x) != std::isnan(y)) ++d.one_sided;
            if (std::isnan(x) || std::isnan(y)) continue;
            ++d.compared;
            if (x != y) ++d.unequal;
            d.greatest = std::max(d.greatest, static_cast<double>(std::abs(x - y)));
        }
    return d;
}

/// What a place that is wrong by the interpolation's bound, 0.01 source pixels on both axes, can do
/// to a bilinear value: that share of the steepest step between neighbours.
double bound_of_places(const Plane<float>& source) {
    float steepest = 0;
    for (int r = 0; r + 1 < source.height(); ++r)
        for (int c = 0; c + 1 < source.width(); ++c)
            steepest = std::max({steepest, std::abs(source.at(c + 1, r) - source.at(c, r)),
                                 std::abs(source.at(c, r + 1) - source.at(c, r))});
    return 2 * 0.01 * static_cast<double>(steepest);
}

Plane<float> floats(const Plane<std::int32_t>& codes) {
    Plane<float> out(codes.width(), codes.height());
    for (int r = 0; r < codes.height(); ++r)
        for (int c = 0; c < codes.width(); ++c)
            out.at(c, r) = codes.at(c, r) == no_code ? std::numeric_limits<float>::quiet_NaN()
                                                     : static_cast<float>(codes.at(c, r));
    return out;
}

/// Reads in windows of a size, beginning off the grid, and puts them together.
template <typename Value, typename Read>
Plane<Value> in_windows(const Grid& grid, int width, int height, const Read& read) {
    Plane<Value> all(grid.width, grid.height), part;
    for (long row = -(height / 3); row < grid.height; row += height)
        for (long column = -(width / 3); column < grid.width; column += width) {
            read(Window{column, row, width, height}, part);
            for (int r = 0; r < height; ++r)
                for (int c = 0; c < width; ++c)
                    if (column + c >= 0 && column + c < grid.width && row + r >= 0 &&
                        row + r < grid.height)
                        all.at(static_cast<int>(column + c), static_cast<int>(row + r)) =
                            part.at(c, r);
        }
    return all;
}

}  // namespace

TEST_CASE("resampling: nearest agrees with gdalwarp's exact transformer",
          "[raster][differential]") {
    SUNBUDGET_NEEDS_DATA();
    const std::string file =
        GENERATE("zion_utah/nlcd2011.tif", "awkward/made/nlcd_same_place_epsg5070.tif",
                 "awkward/made/nlcd_same_place_us_feet_epsg3566.tif",
                 "awkward/made/zion_b4_rotated_geotransform_30deg.tif");
    CAPTURE(file);
    const auto path = *real_data(file);
    const auto target = square_grid(300, 260, 312015, 4137025, 30, "EPSG:32612");
    const auto ours = floats(read_all_codes(spec_of(path), target));
    const auto d = difference(ours, warped_by_gdal(path, target, "-r near -et 0"));
    REQUIRE(d.compared > 10000);
    // Places are right to 0.01 source pixels: at most 4 % of middles lie that near to a border. The
    // interpolation is usually a hundred times better than its bound.
    CHECK(static_cast<double>(d.unequal) < 0.001 * static_cast<double>(d.compared));
    CHECK(static_cast<double>(d.one_sided) < 0.001 * static_cast<double>(d.compared));
}

TEST_CASE("resampling: bilinear agrees with gdalwarp where target pixels are small",
          "[raster][differential]") {
    SUNBUDGET_NEEDS_DATA();
    const auto target = zion_part();
    const auto spec = zion("srtm.tif");
    const auto source = Source::open(spec, target);
    CHECK(source.alignment() == Alignment::bilinear);
    CHECK_THAT(source.alignment_text(), Contains("bilinear, reprojected from WGS 84 (EPSG:4326)"));
    const auto d = difference(read_all(spec, target),
                              warped_by_gdal(spec.name.path, target, "-r bilinear -et 0"));
    CHECK(d.compared == 300L * 260);
    CHECK(d.one_sided == 0);
    CHECK(d.greatest < bound_of_places(read_all(spec)));
}

TEST_CASE("resampling: averages agree with gdalwarp where target pixels are large",
          "[raster][differential]") {
    SUNBUDGET_NEEDS_DATA();
    const TemporaryFolder folder;
    // Same CRS and axes, so that gdalwarp's box is the pixel's outline and not larger; 3.7 source
    // pixels a side, off the lattice.
    const auto file = make_raster(folder.path() / "noise.tif",
                                  {.grid = square_grid(400, 300, 0, 9000, 10), .bands = {noise}});
    const auto target = square_grid(90, 70, 123, 8765, 37);
    const auto source = Source::open(spec_of(file), target);
    CHECK(source.alignment() == Alignment::averaged);
    CHECK_THAT(source.alignment_text(), Contains("averaged over 3.70 x 3.70 source pixels"));
    const auto d = difference(read_all(spec_of(file), target),
                              warped_by_gdal(file, target, "-r average -et 0"));
    CHECK(d.compared == 90L * 70);
    // gdalwarp holds the weights in float: seven digits of 255.
    CHECK(d.greatest < 1e-4);
}

TEST_CASE("resampling: whole cells average exactly", "[raster][property]") {
    const TemporaryFolder folder;
    const auto file =
        make_raster(folder.path() / "noise.tif",
                    {.grid = square_grid(60, 60, 0, 600, 10), .type = "Byte", .bands = {noise}});
    const int cells = GENERATE(2, 3, 5);
    const auto target = square_grid(60 / cells, 60 / cells, 0, 600, 10.0 * cells);
    const auto out = read_all(spec_of(file), target);
    for (int r = 0; r < target.height; ++r)
        for (int c = 0; c < target.width; ++c) {
            double sum = 0;
            for (int y = 0; y < cells; ++y)
                for (int x = 0; x < cells; ++x) sum += noise(c * cells + x, r * cells + y);
            REQUIRE(out.at(c, r) == static_cast<float>(sum / (cells * cells)));
        }
}

TEST_CASE("resampling: the values of classes are averaged, not their codes", "[raster][property]") {
    const TemporaryFolder folder;
    const auto code = [](int c, int r) { return 10 + static_cast<int>(noise(c, r)) % 4; };
    const auto file =
        make_raster(folder.path() / "codes.tif",
                    {.grid = square_grid(40, 40, 0, 400, 10), .type = "Byte", .bands = {code}});
    const std::vector<std::pair<std::int32_t, float>> table{{10, 0.1f}, {11, 0.25f}, {12, 0.7f}};
    const CodeValues values(table);
    const auto target = square_grid(10, 10, 0, 400, 40);
    const auto source = Source::open(spec_of(file, DataKind::code), target);
    CHECK(source.alignment() == Alignment::nearest);
    CHECK(source.values_alignment() == Alignment::averaged);
    Plane<float> out;
    Reader(source).read_values({0, 0, 10, 10}, values, out);
    long without = 0;
    for (int r = 0; r < 10; ++r)
        for (int c = 0; c < 10; ++c) {
            double sum = 0;
            int count = 0;
            for (int y = 0; y < 4; ++y)
                for (int x = 0; x < 4; ++x) {
                    const float value = values.of(code(c * 4 + x, r * 4 + y));
                    if (std::isnan(value)) continue;  // class 13 has none
                    sum += static_cast<double>(value);
                    ++count;
                }
            if (count < 8) {
                ++without;
                CHECK(std::isnan(out.at(c, r)));
            } else {
                CHECK(out.at(c, r) == static_cast<float>(sum / count));
            }
        }
    CHECK(without < 10);
    // On its own grid every pixel has its class's value.
    const auto same = Source::open(spec_of(file, DataKind::code), inspect({file}).grid);
    Reader(same).read_values({3, 5, 1, 1}, values, out);
    const float expected = values.of(code(3, 5));
    CHECK((out.at(0, 0) == expected || (std::isnan(out.at(0, 0)) && std::isnan(expected))));
}

TEST_CASE("resampling: half of a pixel must be known", "[raster][edge]") {
    const TemporaryFolder folder;
    // Left target pixel: 2 of 4 known. Right one: 1 of 4.
    const auto file =
        make_raster(folder.path() / "half.tif",
                    {.grid = square_grid(4, 2, 0, 20, 10),
                     .bands = {[](int c, int r) {
                         return (c < 2 ? r == 0 : c == 2 && r == 0) ? 5.0 + c : not_a_number;
                     }}});
    const auto out = read_all(spec_of(file), square_grid(2, 1, 0, 20, 20));
    CHECK(out.at(0, 0) == 5.5f);
    CHECK(std::isnan(out.at(1, 0)));
}

TEST_CASE("resampling: the raster's edge neither shrinks nor grows", "[raster][edge]") {
    const TemporaryFolder folder;
    const auto file = make_raster(
        folder.path() / "flat.tif",
        {.grid = square_grid(4, 4, 0, 40, 10), .bands = {[](int, int) { return 3.0; }}});
    // Cells of 2.5: 16 of them across the raster, 2 more on each side.
    const auto out = read_all(spec_of(file), square_grid(20, 20, -5, 45, 2.5));
    for (int r = 0; r < 20; ++r)
        for (int c = 0; c < 20; ++c) {
            const bool on = c >= 2 && c < 18 && r >= 2 && r < 18;
            CHECK(std::isnan(out.at(c, r)) == !on);
            if (on) CHECK(out.at(c, r) == 3.0f);
        }
}

TEST_CASE("resampling: bits do not depend on the window", "[raster][differential]") {
    SUNBUDGET_NEEDS_DATA();
    const auto target = zion_part();
    const auto srtm = Source::open(zion("srtm.tif"), target);
    const auto cover = Source::open(zion("nlcd2011.tif", DataKind::code), target);
    const auto coarse_grid = square_grid(61, 53, 309015, 4130025, 147, "EPSG:32612");
    const auto coarse = Source::open(zion("nlcd2011.tif", DataKind::code), coarse_grid);
    std::vector<std::pair<std::int32_t, float>> table;
    for (int code = 11; code < 96; ++code)
        table.emplace_back(code, 0.003f * static_cast<float>(code));
    const CodeValues values(table);
    Reader srtm_reader(srtm), cover_reader(cover), coarse_reader(coarse);
    const auto heights = [&](const Window& w, Plane<float>& out) { srtm_reader.read(w, out); };
    const auto codes = [&](const Window& w, Plane<std::int32_t>& out) {
        cover_reader.read_codes(w, out);
    };
    const auto means = [&](const Window& w, Plane<float>& out) {
        coarse_reader.read_values(w, values, out);
    };
    const auto whole_heights = read_all(zion("srtm.tif"), target);
    const auto whole_codes = read_all_codes(zion("nlcd2011.tif"), target);
    Plane<float> whole_means;
    coarse_reader.read_values({0, 0, 61, 53}, values, whole_means);
    for (const auto& [width, height] :
         {std::pair(256, 256), {512, 512}, {37, 91}, {300, 1}, {7, 5}}) {
        CAPTURE(width, height);
        CHECK(same_bits(in_windows<float>(target, width, height, heights), whole_heights));
        CHECK(same_bits(in_windows<std::int32_t>(target, width, height, codes), whole_codes));
        CHECK(same_bits(in_windows<float>(coarse_grid, width, height, means), whole_means));
    }
}

TEST_CASE("resampling: bits do not depend on the threads", "[raster][differential]") {
    SUNBUDGET_NEEDS_DATA();
    const auto target = zion_part();
    const auto source = Source::open(zion("srtm.tif"), target);
    const auto alone = read_all(zion("srtm.tif"), target);
    constexpr int side = 64, columns = 5, rows = 5;
    for (const int threads : {2, 4}) {
        std::vector<Plane<float>> parts(columns * rows);
        std::vector<std::optional<Reader>> readers(static_cast<std::size_t>(threads));
        parallel_for(parts.size(), threads, [&](std::size_t i, int thread) {
            auto& reader = readers[static_cast<std::size_t>(thread)];
            if (!reader) reader.emplace(source);
            const int index = static_cast<int>(i);
            reader->read({index % columns * side, index / columns * side, side, side}, parts[i]);
        });
        long unequal = 0;
        for (int r = 0; r < target.height; ++r)
            for (int c = 0; c < target.width; ++c) {
                const auto part = static_cast<std::size_t>(r / side * columns + c / side);
                unequal += parts[part].at(c % side, r % side) != alone.at(c, r);
            }
        CHECK(unequal == 0);
    }
}

TEST_CASE("resampling: bits do not depend on where the target begins", "[raster][differential]") {
    SUNBUDGET_NEEDS_DATA();
    // Parts of a run share the lattice of the whole grid, so this holds for windows; a grid cut
    // elsewhere has another lattice and may differ by the interpolation's bound, not more.
    const auto whole = zion_part();
    const auto part = cropped(whole, Bounds{310215, 4126000, 313000, 4129000}, {});
    const auto a = read_all(zion("srtm.tif"), part);
    const auto source = Source::open(zion("srtm.tif"), whole);
    Plane<float> b;
    const auto place = std::lround((part.affine[0] - whole.affine[0]) / 30);
    const auto down = std::lround((whole.affine[3] - part.affine[3]) / 30);
    Reader(source).read({place, down, part.width, part.height}, b);
    CHECK(difference(a, b).greatest < bound_of_places(read_all(zion("srtm.tif"))));
}

TEST_CASE("resampling: the seam behind the globe is no seam", "[raster][edge]") {
    const TemporaryFolder folder;
    const auto wave = [](int c) { return std::cos(2 * std::numbers::pi * (c + 0.5) / 72); };
    const auto file = make_raster(folder.path() / "globe.tif",
                                  {.grid = square_grid(72, 36, -180, 90, 5, "EPSG:4326"),
                                   .type = "Float64",
                                   .bands = {[&](int c, int) { return wave(c); }}});
    // From 172 E to 188 E in quarter degrees, off the lattice.
    const auto target = square_grid(64, 8, 172.1, 4, 0.25, "EPSG:4326");
    const auto out = read_all(spec_of(file), target);
    for (int c = 0; c < target.width; ++c) {
        const double place = (target.easting(c + 0.5, 0) + 180) / 5 - 0.5;
        const int left = static_cast<int>(std::floor(place));
        const double share = place - left;
        const double expected = wave(left) * (1 - share) + wave(left + 1) * share;
        // Rounded to float once.
        CHECK(static_cast<double>(out.at(c, 3)) == Approx(expected).margin(1e-7));
    }
}

TEST_CASE("resampling: a projected raster across 180 degrees reads the same from both sides",
          "[raster][edge]") {
    SUNBUDGET_NEEDS_DATA();
    const auto spec = spec_of(awkward("real/cog_dateline.tif"));
    const auto east = square_grid(200, 150, 178.5, 52.6, 0.01, "EPSG:4326");
    auto west = east;
    west.affine[0] -= 360;
    const auto a = read_all(spec, east);
    const auto b = read_all(spec, west);
    long known = 0;
    for (int r = 0; r < a.height(); ++r)
        for (int c = 0; c < a.width(); ++c) known += !std::isnan(a.at(c, r));
    CHECK(known > 20000);
    const auto d = difference(a, b);
    // 178.5 - 360 has one bit less behind the point; numbers of up to 65535 a hundredth of a pixel
    // apart would differ by far more.
    CHECK(d.greatest < 0.5);
    CHECK(d.one_sided == 0);
}

TEST_CASE("resampling: pixels off the globe have no value", "[raster][edge]") {
    SUNBUDGET_NEEDS_DATA();
    // A world of 2 degrees seen from a satellite over 75 W: the far side is not there.
    const auto target = square_grid(180, 90, -180, 90, 2, "EPSG:4326");
    const auto source = Source::open(spec_of(awkward("real/goes.tif")), target);
    const auto out = read_all(source.spec(), target);
    CHECK(std::isnan(out.at(140, 45)));       // 101 E on the equator
    CHECK_FALSE(std::isnan(out.at(52, 45)));  // 75 W
    // A geostationary satellite sees 81 degrees of arc around its foot point: 42 % of the sphere, in
    // plate carree pixels a little less.
    CHECK(source.coverage() > 0.3);
    CHECK(source.coverage() < 0.5);
}

TEST_CASE("resampling: one row, one column, one pixel", "[raster][edge]") {
    SUNBUDGET_NEEDS_DATA();
    const auto reference = read_all(spec_of(awkward("made/zion_b4_reference.tif")));
    for (const char* name : {"one_row", "one_column", "one_pixel"}) {
        CAPTURE(name);
        const auto spec = spec_of(awkward(std::string("made/zion_b4_") + name + ".tif"));
        const auto grid = inspect(spec.name).grid;
        // Half the cell: bilinear, up to the edges.
        const auto fine = cropped(grid, {}, 15);
        const auto out = read_all(spec, fine);
        for (int r = 0; r < fine.height; ++r)
            for (int c = 0; c < fine.width; ++c) CHECK_FALSE(std::isnan(out.at(c, r)));
        const auto whole = read_all(spec);
        CHECK(whole.at(0, 0) == reference.at(0, 0));
        CHECK(whole.at(grid.width - 1, grid.height - 1) ==
              reference.at(grid.width - 1, grid.height - 1));
    }
}
