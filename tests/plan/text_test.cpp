#include <catch2/catch.hpp>

#include "plan_support.hpp"

namespace sunbudget::test {

namespace {
const std::string period = "time: {from: 2025-06-01, to: 2025-06-30}\n";
}  // namespace

TEST_CASE("a plan made in the program can be written and read", "[plan][vector]") {
    const Place flag{"--albedo", 0, "surface.albedo"};
    Plan plan;
    plan.surface.albedo.emplace().raster = {{{"a b.tif", "/plans/a b.tif"}, "2"}, flag};
    plan.outputs.layers = {{LayerId::albedo, flag}};
    const auto text = plan_text(plan);
    CHECK(text ==
          "sunbudget: 1\n"
          "surface:\n"
          "  albedo:\n"
          "    raster: a b.tif:2\n"
          "outputs:\n"
          "  layers: [albedo]\n");
    CHECK(plan_of(text) == plan);
}

TEST_CASE("defaults are not written", "[plan][property]") {
    const auto plan = plan_of(small_plan + period);
    CHECK(plan_text(with_defaults(plan)) == plan_text(plan));
}

TEST_CASE("texts that YAML would take for something else are written in quotes",
          "[plan][property]") {
    const auto title =
        GENERATE(as<std::string>{}, "2025", "true", "no", "null", "~", "- x", "a: b", "a #b", "#",
                 "[x]", "{x", "\"q\"", "it's", "back\\slash", "x:", "*x", "&x", "!x", "%x", "@x",
                 "`x", "|", ">", "-07:00", "+1", "0x10", ".inf", "1e5", "?", "? x", "a, b",
                 "caf\xc3\xa9", "=", "<<", " padded ");
    auto plan = plan_of(small_plan);
    plan.title = {title, {}};
    const auto text = plan_text(plan);
    INFO(text);
    CHECK(**plan_of(text).title == title);
}

TEST_CASE("instants keep their fractions and offsets", "[plan][property]") {
    const auto at =
        GENERATE(as<std::string>{}, "2025-06-21T12:00Z", "2025-06-21T23:59:59.999999-07:00",
                 "2025-06-21T00:00:07+05:45", "2025-12-31T24:00+02:00");
    const auto plan = plan_of(small_plan + "time: {at: " + at + "}\n");
    const auto text = plan_text(plan);
    INFO(text);
    CHECK(plan_of(text) == plan);
}

TEST_CASE("the digest does not change with what shapes no result", "[plan][property]") {
    const auto digest = plan_digest(plan_of(small_plan + period));
    CHECK(digest.size() == 64);
    CHECK(digest == plan_digest(plan_of("# a comment\n" + period + small_plan)));
    CHECK(digest == plan_digest(plan_of(small_plan + period, {"outputs.directory=elsewhere"})));
    CHECK(digest == plan_digest(plan_of(small_plan + period, {"sky.turbidity=3.00"})));
    CHECK(digest == plan_digest(plan_of(small_plan + period, {"time.step=600 s"})));
    CHECK(digest == plan_digest(parse_plan({"/other/name.yaml", small_plan + period, {}})));
}

TEST_CASE("the digest changes with everything else", "[plan][property]") {
    const auto change =
        GENERATE(as<std::string>{}, "title=x", "surface.albedo.value=0.3", "sky.turbidity=3.5",
                 "time.step=5 min", "time.hours=12-17", "time.zone=UTC", "time.totals=day",
                 "outputs.unit=MJ/m2", "outputs.format=geotiff", "outputs.layers=[albedo,direct]",
                 "engine.tile=256", "grid.cell=10", "terrain.elevation=1 m",
                 "terrain.elevation=dem.tif", "time.to=2025-06-29");
    CHECK(plan_digest(plan_of(small_plan + period, {change})) !=
          plan_digest(plan_of(small_plan + period)));
}

}  // namespace sunbudget::test
