#include "sunbudget/raster/spool.hpp"

#include <sys/stat.h>

#include <catch2/catch.hpp>
#include <fstream>

#include "layer_maker.hpp"
#include "sunbudget/base/error.hpp"
#include "sunbudget/base/parallel.hpp"
#include "support/vectors.hpp"

using namespace sunbudget;
using namespace sunbudget::test;
namespace fs = std::filesystem;

namespace {
Layout small_layout(int width = 500) {
    return layout_of(invented_layer(width, 300, 128, 2, Sample::float32));
}

std::vector<std::byte> bytes_for(int number) {
    return std::vector<std::byte>(static_cast<std::size_t>(100 + number),
                                  static_cast<std::byte>(number));
}

/// Three tiles of level 0, the first with statistics.
void fill_three(Spool& spool) {
    const std::vector<BlockStatistics> blocks{{3, 0.1, 1e300, 1.0 / 3.0, 5e-324}, {}};
    spool.append({0, 0, 0, 0}, bytes_for(1), blocks);
    spool.append({0, 1, 1, 2}, bytes_for(2));
    spool.append({2, 0, 0, 0}, bytes_for(3));
}

fs::path index_of(const fs::path& file) {
    return file.string() + ".index";
}
}  // namespace

TEST_CASE("Spool: gives back what was appended, also after it was opened again", "[raster]") {
    TemporaryFolder folder;
    const auto file = folder.path() / "spool";
    const auto layout = small_layout();
    std::optional<SpooledTile> first;
    {
        auto spool = Spool::create(file, layout);
        fill_three(spool);
        spool.sync();
        first = spool.find({0, 0, 0, 0});
        CHECK(spool.read({0, 1, 1, 2}) == bytes_for(2));
        CHECK(spool.missing() == layout.tile_count() - 3);
    }
    auto again = Spool::reopen(file, layout);
    CHECK(again.find({0, 0, 0, 0}) == first);
    CHECK(again.read({0, 0, 0, 0}) == bytes_for(1));
    CHECK(again.read({2, 0, 0, 0}) == bytes_for(3));
    CHECK_FALSE(again.has({0, 0, 1, 0}));
    CHECK_FALSE(again.find({0, 0, 1, 0}));
    CHECK(again.missing() == layout.tile_count() - 3);
    CHECK(again.bytes() == 101 + 102 + 103);

    again.append({0, 0, 1, 0}, bytes_for(4));
    again.append({0, 1, 1, 2}, bytes_for(9));
    CHECK(again.bytes() == 101 + 109 + 103 + 104);
    const auto third = Spool::reopen(file, layout);
    CHECK(third.read({0, 0, 1, 0}) == bytes_for(4));
    CHECK(third.read({0, 1, 1, 2}) == bytes_for(9));
    CHECK(third.missing() == layout.tile_count() - 4);
}

TEST_CASE("Spool: an index cut at any byte loses only the line that was cut", "[raster][edge]") {
    TemporaryFolder folder;
    const auto file = folder.path() / "spool";
    {
        auto spool = Spool::create(file, small_layout());
        fill_three(spool);
    }
    const auto whole = fs::file_size(index_of(file));
    std::size_t last_missing = small_layout().tile_count() - 3;
    for (auto size = whole; size-- > 0;) {
        fs::resize_file(index_of(file), size);
        auto spool = Spool::reopen(file, small_layout());
        const auto missing = spool.missing();
        CHECK(missing >= last_missing);
        CHECK(missing <= last_missing + 1);
        last_missing = missing;
    }
    CHECK(last_missing == small_layout().tile_count());
    auto spool = Spool::reopen(file, small_layout());
    fill_three(spool);
    CHECK(Spool::reopen(file, small_layout()).missing() == small_layout().tile_count() - 3);
}

TEST_CASE("Spool: a killed start is taken up", "[raster][edge]") {
    TemporaryFolder folder;
    const auto file = folder.path() / "spool";
    std::ofstream(file).flush();
    auto spool = Spool::reopen(file, small_layout());
    CHECK(spool.missing() == small_layout().tile_count());
    spool.append({0, 0, 0, 0}, bytes_for(1));
    CHECK(Spool::reopen(file, small_layout()).has({0, 0, 0, 0}));
}

TEST_CASE("Spool: damaged lines and damaged tiles are forgotten", "[raster][edge]") {
    TemporaryFolder folder;
    const auto file = folder.path() / "spool";
    std::size_t header = 0;
    {
        auto spool = Spool::create(file, small_layout());
        header = fs::file_size(index_of(file));
        fill_three(spool);
    }
    SECTION("any byte of the index") {
        for (auto at = header; at < fs::file_size(index_of(file)); at += 3) {
            CAPTURE(at);
            flip_byte(index_of(file), at);
            const auto missing = Spool::reopen(file, small_layout()).missing();
            CHECK(missing >= small_layout().tile_count() - 2);
            flip_byte(index_of(file), at);
        }
        CHECK(Spool::reopen(file, small_layout()).missing() == small_layout().tile_count() - 3);
    }
    SECTION("a byte of a tile") {
        flip_byte(file, 150);
        auto spool = Spool::reopen(file, small_layout());
        CHECK(spool.has({0, 0, 0, 0}));
        CHECK_FALSE(spool.has({0, 1, 1, 2}));
    }
    SECTION("tiles that were never written") {
        fs::resize_file(file, 120);
        auto spool = Spool::reopen(file, small_layout());
        CHECK(spool.missing() == small_layout().tile_count() - 1);
    }
}

TEST_CASE("Spool: a tile damaged under way is noticed when it is read", "[raster][edge]") {
    TemporaryFolder folder;
    const auto file = folder.path() / "spool";
    auto spool = Spool::create(file, small_layout());
    fill_three(spool);
    flip_byte(file, 150);
    CHECK_THROWS_WITH(spool.read({0, 1, 1, 2}), Catch::Contains("damaged"));
    CHECK(spool.read({2, 0, 0, 0}) == bytes_for(3));
}

TEST_CASE("Spool: of another layout, existing files, links and pipes are refused",
          "[raster][edge]") {
    TemporaryFolder folder;
    const auto file = folder.path() / "spool";
    { auto spool = Spool::create(file, small_layout()); }
    CHECK_THROWS_WITH(Spool::reopen(file, small_layout(501)), Catch::Contains("another raster"));
    CHECK_THROWS_AS(Spool::create(file, small_layout()), Error);

    const auto victim = folder.path() / "victim";
    std::ofstream(victim) << "precious";
    fs::create_symlink(victim, folder.path() / "link");
    CHECK_THROWS_AS(Spool::create(folder.path() / "link", small_layout()), Error);
    CHECK_THROWS_AS(Spool::reopen(folder.path() / "link", small_layout()), Error);
    CHECK(fs::file_size(victim) == 8);

    const auto other = folder.path() / "other";
    std::ofstream(index_of(other)) << "precious";
    CHECK_THROWS_AS(Spool::create(other, small_layout()), Error);
    CHECK_FALSE(fs::exists(other));
    CHECK(fs::file_size(index_of(other)) == 8);

    const auto pipe = folder.path() / "pipe";
    REQUIRE(mkfifo(pipe.c_str(), 0600) == 0);
    CHECK_THROWS_AS(Spool::reopen(pipe, small_layout()), Error);
}

TEST_CASE("Spool: many threads at once lose nothing", "[raster][differential]") {
    TemporaryFolder folder;
    const auto file = folder.path() / "spool";
    const auto layout = layout_of(invented_layer(1300, 1300, 16, 1, Sample::uint16));
    const auto columns = static_cast<std::size_t>(layout.levels[0].columns);
    const auto tiles = layout.tile_count(0);
    const auto key = [&](std::size_t i) {
        return TileKey{0, 0, static_cast<int>(i % columns), static_cast<int>(i / columns)};
    };
    auto spool = Spool::create(file, layout);
    parallel_for(tiles, 4, [&](std::size_t i, int) {
        spool.append(key(i), bytes_for(static_cast<int>(i % 1000)));
    });
    const auto again = Spool::reopen(file, layout);
    CHECK(again.missing() == layout.tile_count() - tiles);
    std::size_t wrong = 0;
    for (std::size_t i = 0; i < tiles; ++i)
        wrong += again.read(key(i)) != bytes_for(static_cast<int>(i % 1000));
    CHECK(wrong == 0);
}

TEST_CASE("Spool: remove leaves nothing", "[raster]") {
    TemporaryFolder folder;
    auto spool = Spool::create(folder.path() / "spool", small_layout());
    spool.remove();
    CHECK(fs::is_empty(folder.path()));
}
