#include "sunbudget/tables/print.hpp"

#include <catch2/catch.hpp>
#include <cmath>
#include <nlohmann/json.hpp>

#include "sunbudget/base/error.hpp"
#include "sunbudget/base/text.hpp"
#include "sunbudget/tables/class_table.hpp"
#include "sunbudget/tables/sensors.hpp"

using namespace sunbudget;
using Catch::Matchers::Contains;

namespace {

bool same(double a, double b) {
    return a == b || (std::isnan(a) && std::isnan(b));
}

bool same_rows(const ClassTable& a, const ClassTable& b) {
    if (a.rows().size() != b.rows().size()) return false;
    for (std::size_t i = 0; i < a.rows().size(); ++i) {
        const auto &x = a.rows()[i], &y = b.rows()[i];
        if (x.code != y.code || x.name != y.name || x.kind != y.kind || x.scale != y.scale ||
            !same(x.albedo, y.albedo) || !same(x.albedo_low, y.albedo_low) ||
            !same(x.albedo_high, y.albedo_high) || !same(x.emissivity, y.emissivity) ||
            x.source != y.source)
            return false;
    }
    return true;
}

}  // namespace

TEST_CASE("printed_table: a class table as CSV reads back as the same table",
          "[tables][property]") {
    for (const auto& name : shipped_class_table_names()) {
        CAPTURE(name);
        const auto read = parse_class_table(printed_table(name, TableFormat::csv), name);
        CHECK(same_rows(read, shipped_class_table(name)));
    }
}

TEST_CASE("printed_table: every table in every form, one entry a row", "[tables][property]") {
    for (const auto& name : table_names()) {
        CAPTURE(name);
        CHECK_FALSE(table_text(name).empty());
        const auto json = nlohmann::json::parse(printed_table(name, TableFormat::json));
        CHECK(json.at("table") == name);
        const auto rows = json.at("rows").size();
        CHECK(rows > 0);
        const auto csv = printed_table(name, TableFormat::csv);
        CHECK(split(csv, '\n').size() == rows + 2);  // header, and nothing after the last \n
        const auto text = printed_table(name, TableFormat::text);
        CHECK_THAT(text, Catch::Matchers::StartsWith(name + ": "));
        CHECK(split(text, '\n').size() >= rows + 3);
    }
}

TEST_CASE("printed_table: JSON has numbers as numbers and unknown ones as null",
          "[tables][vector]") {
    const auto json = nlohmann::json::parse(printed_table("worldcover", TableFormat::json));
    CHECK(json.at("digest") == shipped_class_table("worldcover").digest());
    const auto& none = json.at("rows").at(0);
    CHECK(none.at("code") == 0);
    CHECK(none.at("albedo").is_null());
    const auto& built = json.at("rows").at(5);
    CHECK(built.at("code") == 50);
    CHECK(built.at("albedo") == 0.15);
    CHECK(built.at("scale") == "local");
}

TEST_CASE("printed_table: text columns start one below the other", "[tables][property]") {
    const auto lines = split(printed_table("quality", TableFormat::text), '\n');
    const auto column = lines.at(2).find("text");
    REQUIRE(column != std::string::npos);
    for (std::size_t i = 3; i + 1 < lines.size(); ++i) {
        CAPTURE(lines[i]);
        CHECK(lines[i].at(column) != ' ');
        CHECK(lines[i].at(column - 1) == ' ');
    }
}

TEST_CASE("printed_table: text gives each source once, by number", "[tables][property]") {
    const auto text = printed_table("weights", TableFormat::text);
    const std::string source = weight_sets().front().source;
    const auto at = text.find("[2] " + source);
    REQUIRE(at != std::string::npos);
    CHECK(text.find(source) == at + 4);  // nowhere above
    CHECK(text.find(source, at + 5) == std::string::npos);
    CHECK_THAT(text, Contains("0.356"));
}

TEST_CASE("printed_table: an unknown name comes with a suggestion", "[tables][edge]") {
    CHECK_THROWS_WITH(printed_table("metods", TableFormat::text),
                      Contains("no table \"metods\"") && Contains("did you mean \"methods\"?"));
    CHECK(table_text("metods").empty());
}
