#include <catch2/catch.hpp>

#include <fmt/format.h>

#include <cmath>
#include <cstring>
#include <iostream>

#include "sunbudget/engine/execute.hpp"
#include "support/vectors.hpp"
#include "terrain_run.hpp"

using namespace sunbudget;
using namespace sunbudget::test;

namespace {

Frame frame() {
    return frame_about("EPSG:32633", 47, 13, 20, 600, 530);
}

Plane<float> hills() {
    Plane<float> heights_m(600, 530);
    for (int r = 0; r < 530; ++r)
        for (int c = 0; c < 600; ++c)
            heights_m.at(c, r) =
                static_cast<float>(900 + 300 * std::sin(c / 31.0) * std::cos(r / 23.0) +
                                   60 * std::sin(c / 5.0 + r / 7.0));
    return heights_m;
}

/// Pixel bits of every layer of a whole run, as read back from its files.
std::vector<Plane<float>> files_of(const std::filesystem::path& folder, const std::string& plan,
                                   int threads, std::uint64_t memory_bytes) {
    auto run = resolve(parse_plan({(folder / "plan.yaml").string(), "sunbudget: 1\n" + plan, {}}),
                       {threads, memory_bytes, true});
    const TemporaryFolder out;
    OutputSet outputs(out.path(), OutputSet::Mark::none);
    const auto done = execute(run, {threads, memory_bytes, {}}, outputs);
    std::vector<Plane<float>> found;
    for (std::size_t n = 0; n < run.layers.size(); ++n)
        for (std::size_t band = 1; band <= run.layers[n].file.bands.size(); ++band)
            found.push_back(
                read_raster(outputs.staged(done.layers[n].file_name), static_cast<int>(band))
                    .values);
    return found;
}

int different_bits(const std::vector<Plane<float>>& a, const std::vector<Plane<float>>& b) {
    REQUIRE(a.size() == b.size());
    int count = 0;
    for (std::size_t n = 0; n < a.size(); ++n)
        for (int r = 0; r < a[n].height(); ++r)
            count +=
                std::memcmp(a[n].row(r).data(), b[n].row(r).data(), a[n].row(r).size_bytes()) != 0;
    return count;
}

}  // namespace

TEST_CASE("terrain: the same bits on 1 or 2 threads, with any tile and memory",
          "[model][property]") {
    const TemporaryFolder folder;
    write_heights(folder.path() / "hills.tif", frame(), hills());
    const auto plan = [](int tile) {
        return fmt::format(
            "surface: {{albedo: {{value: 0.3}}}}\nterrain: {{elevation: hills.tif, directions: "
            "32}}\n"
            "time: {{from: 2025-01-10, to: 2025-03-10, totals: month, days: mid-month}}\n"
            "outputs: {{layers: [net_shortwave, insolation, direct, diffuse, reflected, "
            "sunlit_hours, sky_view, slope, aspect, quality]}}\n"
            "engine: {{tile: {}}}\n",
            tile);
    };
    const std::uint64_t usual = std::uint64_t{1} << 30, little = std::uint64_t{200} << 20;
    const auto first = files_of(folder.path(), plan(512), 1, usual);
    CHECK(first.size() == 6 * 3 + 4);
    CHECK(different_bits(first, files_of(folder.path(), plan(512), 2, usual)) == 0);
    CHECK(different_bits(first, files_of(folder.path(), plan(256), 2, little)) == 0);
    CHECK(different_bits(first, files_of(folder.path(), plan(128), 2, usual)) == 0);
    CHECK(different_bits(first, files_of(folder.path(), plan(1024), 1, usual)) == 0);
}

TEST_CASE("terrain: a crop gets the light of the whole", "[model][property]") {
    const TemporaryFolder folder;
    const auto whole = frame();
    write_heights(folder.path() / "hills.tif", whole, hills());
    const std::string rest =
        "terrain: {elevation: hills.tif}\ntime: {from: 2025-02-10, to: 2025-02-10}\noutputs: "
        "{layers: [insolation, sky_view, slope]}\n";
    const auto all = computed(folder.path(), rest);
    constexpr int left = 100, top = 70, width = 300, height = 280;
    const double west = whole.affine[0] + 20 * left, north = whole.affine[3] - 20 * top;
    const auto crop = computed(
        folder.path(),
        fmt::format("grid: {{like: elevation, bounds: [{:.6f}, {:.6f}, {:.6f}, {:.6f}]}}\n", west,
                    north - 20 * height, west + 20 * width, north) +
            rest);
    REQUIRE(crop.run.grid.width == width);
    REQUIRE(crop.run.grid.height == height);
    Errors light, view;
    double slope = 0;
    for (int r = 0; r < height; ++r)
        for (int c = 0; c < width; ++c) {
            const auto off = [&](const char* layer) {
                return static_cast<double>(crop[layer].at(c, r)) -
                       static_cast<double>(all[layer].at(c + left, r + top));
            };
            light.add(off("insolation"));
            view.add(off("sky_view"));
            slope = std::max(slope, std::abs(off("slope")));
        }
    std::cout << fmt::format(
        "a crop against the whole: insolation [W m-2] 99 % {:.4f}, largest {:.4f}; sky view 99 % "
        "{:.5f}, largest {:.5f}\n",
        light.percentile(0.99), light.percentile(1), view.percentile(0.99), view.percentile(1));
    CHECK(slope < 1e-4);
    // Coarse levels begin at the crop's own corner, and the sun's reference place is another.
    CHECK(view.percentile(0.99) < 0.005);
    CHECK(light.percentile(0.99) < 1);
}
