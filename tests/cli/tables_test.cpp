// `sunbudget tables`.
#include <catch2/catch.hpp>
#include <nlohmann/json.hpp>

#include "desk.hpp"

using namespace sunbudget::test;
using Catch::Contains;
using Catch::StartsWith;

namespace {
std::string printed(const std::vector<std::string>& arguments) {
    const auto outcome = sunbudget::test::sunbudget(arguments);
    CAPTURE(arguments, outcome.err);
    CHECK(outcome.exit_code == 0);
    CHECK(outcome.err.empty());
    return outcome.out;
}
const std::vector<std::string> class_tables{"worldcover", "nlcd", "corine", "corine-grid", "lcz"};
const std::vector<std::string> other_tables{"methods",        "layers",  "sensors",
                                            "sensor-quality", "weights", "quality"};
}  // namespace

TEST_CASE("tables: lists every table, and prints each as text, CSV and JSON", "[cli]") {
    const auto list = printed({"tables"});
    auto names = class_tables;
    names.insert(names.end(), other_tables.begin(), other_tables.end());
    for (const auto& name : names) {
        CAPTURE(name);
        CHECK_THAT(list, Contains("\n" + name) || StartsWith(name));
        CHECK(printed({"tables", name}).size() > 200);
        CHECK_THAT(printed({"tables", name, "--csv"}), Contains(","));
        const auto json = nlohmann::json::parse(printed({"tables", name, "--json"}));
        CHECK_FALSE(json.empty());
    }
    CHECK(nlohmann::json::parse(printed({"tables", "plan-schema"})).contains("properties"));
    CHECK_THAT(printed({"tables", "plan"}), Contains("surface:") && Contains("outputs:"));
}

TEST_CASE("tables: a printed class table read back is printed with the same bytes",
          "[cli][property]") {
    const TemporaryFolder folder;
    for (const auto& name : class_tables) {
        const auto csv = printed({"tables", name, "--csv"});
        const auto file = folder.path() / (name + ".csv");
        write(file, csv);
        CAPTURE(name);
        CHECK_THAT(csv, StartsWith("code,name,kind,scale,albedo,"));
        CHECK(printed({"tables", file.string(), "--csv"}) == csv);
    }
}

TEST_CASE("tables: a printed class table works as the user's own", "[cli]") {
    const Desk desk;
    write(desk.path("mine.csv"), printed({"tables", "worldcover", "--csv"}));
    REQUIRE(desk.run({"run", "plan.yaml"}).exit_code == 0);
    REQUIRE(
        desk.run({"run", "plan.yaml", "--out", "own", "--set", "surface.cover.classes=./mine.csv"})
            .exit_code == 0);
    for (const auto* layer : {"albedo.tif", "net_shortwave.tif"})
        CHECK(
            same_pixels(pixels_of(desk.path("out") / layer), pixels_of(desk.path("own") / layer)));
}

TEST_CASE("tables: a table that is not there or broken is refused", "[cli][edge]") {
    const Desk desk;
    const auto unknown = desk.run({"tables", "nlcdd"});
    CHECK(unknown.exit_code == 2);
    CHECK_THAT(unknown.err, Contains("did you mean \"nlcd\"?"));
    CHECK(unknown.out.empty());
    CHECK(desk.run({"tables", "./none.csv"}).exit_code == 3);
    write(desk.path("broken.csv"),
          "code,name,kind,scale,albedo\n1,Roofs,roof,facet,1.2\nx,Streets,paved,facet,0.1\n");
    const auto broken = desk.run({"tables", "./broken.csv"});
    CAPTURE(broken.err);
    CHECK(broken.exit_code == 3);
    CHECK_THAT(broken.err, Contains("broken.csv:2") && Contains("broken.csv:3"));
    CHECK(well_formed(broken.err));
}
