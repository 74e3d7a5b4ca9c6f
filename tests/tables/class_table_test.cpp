#include "sunbudget/tables/class_table.hpp"

#include <algorithm>
#include <catch2/catch.hpp>
#include <cmath>

#include "sunbudget/base/digest.hpp"
#include "sunbudget/base/error.hpp"
#include "sunbudget/base/text.hpp"
#include "support/vectors.hpp"

using namespace sunbudget;

namespace {

struct Hull {
    double low = 1;
    double high = 0;
};

/// The hull of the ranges whose ids stand, separated by blanks, in one cell.
Hull hull_of(const test::Table& ranges, const std::string& ids) {
    Hull hull;
    for (const auto& id : split(ids, ' ')) {
        const auto row = std::find_if(ranges.rows.begin(), ranges.rows.end(),
                                      [&](const auto& r) { return r[0] == id; });
        REQUIRE(row != ranges.rows.end());
        const auto index = static_cast<std::size_t>(row - ranges.rows.begin());
        hull.low = std::min(hull.low, ranges.number(index, "low"));
        hull.high = std::max(hull.high, ranges.number(index, "high"));
    }
    return hull;
}

const std::vector<std::string> by_code{"worldcover", "nlcd", "corine", "lcz"};

}  // namespace

TEST_CASE("shipped class tables: every code of the published legends is there",
          "[tables][vector]") {
    const auto legends = test::read_table("vectors/legends.csv");
    std::size_t classes = 0;
    for (const auto& name : by_code) {
        const auto table = shipped_class_table(name);
        for (const auto& row : table.rows()) classes += row.is_nodata() ? 0 : 1;
    }
    CHECK(classes == legends.rows.size());  // and no class more than the legends have
    for (std::size_t i = 0; i < legends.rows.size(); ++i) {
        CAPTURE(legends.rows[i]);
        const auto table = shipped_class_table(legends.cell(i, "table"));
        const auto* found = table.find(static_cast<int>(legends.number(i, "code")));
        REQUIRE(found != nullptr);
        CHECK_THAT(lower_case(found->name),
                   Catch::Matchers::Contains(lower_case(legends.cell(i, "name"))));
    }
}

TEST_CASE("shipped class tables: albedos lie inside the published ranges", "[tables][vector]") {
    const auto ranges = test::read_table("vectors/albedo_ranges.csv");
    const auto held_to = test::read_table("vectors/class_ranges.csv");
    for (std::size_t i = 0; i < held_to.rows.size(); ++i) {
        CAPTURE(held_to.rows[i]);
        const auto table = shipped_class_table(held_to.cell(i, "table"));
        const auto* row = table.find(static_cast<int>(held_to.number(i, "code")));
        REQUIRE(row != nullptr);
        const auto hull = hull_of(ranges, held_to.cell(i, "albedo_ranges"));
        CHECK(hull.low <= row->albedo_low);
        CHECK(row->albedo_low <= row->albedo);
        CHECK(row->albedo <= row->albedo_high);
        CHECK(row->albedo_high <= hull.high);
    }
}

TEST_CASE("shipped class tables: emissivities lie inside the published ranges",
          "[tables][vector]") {
    const auto ranges = test::read_table("vectors/emissivity_ranges.csv");
    const auto held_to = test::read_table("vectors/class_ranges.csv");
    for (std::size_t i = 0; i < held_to.rows.size(); ++i) {
        CAPTURE(held_to.rows[i]);
        const auto table = shipped_class_table(held_to.cell(i, "table"));
        const auto* row = table.find(static_cast<int>(held_to.number(i, "code")));
        REQUIRE(row != nullptr);
        const auto& ids = held_to.cell(i, "emissivity_ranges");
        if (ids.empty()) {
            CHECK_THAT(row->source, Catch::Matchers::Contains("emissivity: common practice"));
            continue;
        }
        const auto hull = hull_of(ranges, ids);
        CHECK(hull.low <= row->emissivity);
        CHECK(row->emissivity <= hull.high);
    }
}

TEST_CASE("shipped class tables: every class is held to a range and names its sources",
          "[tables][property]") {
    const auto held_to = test::read_table("vectors/class_ranges.csv");
    std::size_t classes = 0;
    for (const auto& name : by_code) {
        for (const auto& row : shipped_class_table(name).rows()) {
            CAPTURE(name, row.code);
            CHECK_FALSE(row.source.empty());
            if (row.is_nodata()) continue;
            ++classes;
            CHECK(row.kind != Kind::other);
            CHECK_THAT(row.source, Catch::Matchers::Contains("albedo: ") &&
                                       Catch::Matchers::Contains("; emissivity: "));
        }
    }
    CHECK(classes == held_to.rows.size());
}

TEST_CASE("shipped class tables: missing data is declared, unclassified is not",
          "[tables][vector]") {
    // ESA WorldCover product manual; CORINE legend (999 level 3, 48 in rasters); the others from
    // memory. NLCD 0, CORINE 990 and 995 are unclassified ground, not missing data.
    CHECK(shipped_class_table("worldcover").find(0)->is_nodata());
    CHECK(shipped_class_table("nlcd").find(250)->is_nodata());
    CHECK(shipped_class_table("corine").find(999)->is_nodata());
    CHECK(shipped_class_table("corine-grid").find(48)->is_nodata());
    CHECK(shipped_class_table("lcz").find(0)->is_nodata());
    CHECK(shipped_class_table("nlcd").find(0) == nullptr);
    CHECK(shipped_class_table("corine").find(990) == nullptr);
    CHECK(std::isnan(shipped_class_table("worldcover").find(0)->albedo));
}

TEST_CASE("corine-grid: the same classes by the rasters' own numbers", "[tables][vector]") {
    // Copernicus CORINE Land Cover legend: grid codes 1 to 44 follow the level-3 codes in order.
    const auto grid = shipped_class_table("corine-grid");
    const auto codes = shipped_class_table("corine");
    const std::vector<std::pair<int, int>> pairs{{1, 111},  {11, 142}, {12, 211}, {23, 311},
                                                 {34, 335}, {40, 511}, {44, 523}};
    for (const auto& [number, code] : pairs) {
        CAPTURE(number, code);
        REQUIRE(grid.find(number) != nullptr);
        CHECK(grid.find(number)->name == codes.find(code)->name);
        CHECK(grid.find(number)->albedo == codes.find(code)->albedo);
    }
    CHECK(grid.find(45) == nullptr);
    CHECK(grid.rows().size() == 45);
}

TEST_CASE("local: only neighbourhoods with buildings carry values of a whole neighbourhood",
          "[tables][property]") {
    CHECK(shipped_class_table("worldcover").find(50)->scale == Scale::local);
    CHECK(shipped_class_table("worldcover").find(10)->scale == Scale::facet);
    CHECK(shipped_class_table("nlcd").find(24)->scale == Scale::local);
    const auto zones = shipped_class_table("lcz");
    for (int code = 1; code <= 17; ++code) CHECK(zones.find(code)->scale == Scale::local);
}

TEST_CASE("digest: that of the data file, byte for byte", "[tables][property]") {
    for (const auto& name : by_code) {
        const auto file =
            test::testdata("..") / "src" / "tables" / "data" / (std::string(name) + ".csv");
        CHECK(shipped_class_table(name).digest() == "sha256:" + sha256_of_file(file));
        CHECK(read_class_table(file).digest() == shipped_class_table(name).digest());
    }
}

TEST_CASE("find: each code leads to its own row, others to nothing", "[tables][property]") {
    const ClassTable table("mine", {{.code = 7, .name = "b"}, {.code = -3, .name = "a"}}, "d");
    CHECK(table.find(7)->name == "b");
    CHECK(table.find(-3)->name == "a");
    CHECK(table.find(0) == nullptr);
    CHECK(table.find(8) == nullptr);
    CHECK(ClassTable("none", {}, "").find(1) == nullptr);
    CHECK(table.rows().front().code == 7);
}

TEST_CASE("class_table: takes a shipped name or a path, and suggests for neither",
          "[tables][edge]") {
    CHECK(class_table("worldcover").name() == "worldcover");
    CHECK_THROWS_WITH(class_table("worldcovr"),
                      Catch::Matchers::Contains("did you mean \"worldcover\"?"));
    CHECK_THROWS_WITH(shipped_class_table("nlccd"), Catch::Matchers::Contains("\"nlcd\""));
    try {
        (void)class_table("no/such/file.csv");
        FAIL("no error");
    } catch (const Error& error) {
        CHECK(error.cause() == Cause::input);
        CHECK_THAT(error.what(), Catch::Matchers::Contains("known here: worldcover, nlcd"));
    }
}

TEST_CASE("class_tables_with: finds the legend a raster's codes belong to", "[tables][property]") {
    CHECK(class_tables_with(std::vector<int>{11, 21, 95}) == std::vector<std::string>{"nlcd"});
    CHECK(class_tables_with(std::vector<int>{1, 44, 48}) ==
          std::vector<std::string>{"corine-grid"});
    CHECK(class_tables_with(std::vector<int>{10, 50, 100}) ==
          std::vector<std::string>{"worldcover"});
    CHECK(class_tables_with(std::vector<int>{6666}).empty());
}

TEST_CASE("kinds and scales: every name leads back to its value", "[tables][property]") {
    CHECK(kind_names().size() == 14);
    for (const auto& name : kind_names()) CHECK(name_of(*kind_named(name)) == name);
    for (const auto& name : scale_names()) CHECK(name_of(*scale_named(name)) == name);
    CHECK_FALSE(kind_named("pavement"));
    CHECK(name_of(Kind::paved) == "paved");
}
