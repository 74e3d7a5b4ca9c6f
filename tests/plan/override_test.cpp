#include <catch2/catch.hpp>

#include "plan_support.hpp"

namespace sunbudget::test {

using Catch::Matchers::Contains;

TEST_CASE("an override replaces a value, or makes the key", "[plan][vector]") {
    const auto plan =
        plan_of(small_plan,
                {"surface.albedo.value=0.35", "sky.turbidity=4", "outputs.layers=[albedo, quality]",
                 "grid={crs: EPSG:3035, bounds: [0, 0, 10, 10], cell: 1}"});
    CHECK(**plan.surface.albedo->value == 0.35);
    CHECK(turbidity_of(plan)[0] == 4);
    CHECK(plan.outputs.layers.size() == 2);
    CHECK(**plan.grid.crs == "EPSG:3035");
    CHECK(plan.sky[SkyParameter::turbidity]->place.text() == "--set sky.turbidity");
    CHECK(plan.outputs.layers[1].place.text() == "--set outputs.layers[2]");
    CHECK(plan.grid.cell->place.text() == "--set grid.cell");
}

TEST_CASE("the last override of a key wins", "[plan][vector]") {
    CHECK(turbidity_of(plan_of(small_plan, {"sky.turbidity=4", "sky.turbidity=5"}))[0] == 5);
}

TEST_CASE("a value on the command line stands for itself unless it is a list, a map or in quotes",
          "[plan][vector]") {
    const auto title = [](const std::string& value) {
        return **plan_of(small_plan, {"title=" + value}).title;
    };
    CHECK(title("Hot: days # 3") == "Hot: days # 3");
    CHECK(title("it's * & ! | > %") == "it's * & ! | > %");
    CHECK(title("a=b") == "a=b");
    CHECK(title("\"2025\"") == "2025");
    CHECK(title("'it''s'") == "it's");
    CHECK(title("- x") == "- x");
}

TEST_CASE("relative paths of overrides start from the plan's folder too", "[plan][vector]") {
    const auto plan = plan_of(small_plan, {"terrain.elevation=in/dem.tif:2"});
    CHECK(std::get<std::vector<PlanRaster>>(**plan.terrain.elevation).front().path.file ==
          "/plans/in/dem.tif");
}

TEST_CASE("a wrong override is told with its name", "[plan][edge]") {
    const auto told = [](const Override& change) {
        const auto problems = problems_of({"plan.yaml", small_plan, {change}});
        REQUIRE(problems.size() == 1);
        return text_of(problems.front());
    };
    CHECK_THAT(told("sky.turbidity=12"),
               Contains("the number 12") && Contains("(--set sky.turbidity)"));
    CHECK_THAT(told("sky.turbidty=2"), Contains("did you mean \"turbidity\"?"));
    CHECK_THAT(told("sky.turbidity=\"2\""), Contains("remove the quotes"));
    CHECK_THAT(told("title="), Contains("found nothing"));
    CHECK_THAT(told("title=2025"), Contains("found the number 2025"));
    CHECK_THAT(told("sky.turbidity"), Contains("names no key and value"));
    CHECK_THAT(told("sky..turbidity=3"), Contains("names no key and value"));
    CHECK_THAT(told("=3"), Contains("names no key and value"));
    CHECK_THAT(told("outputs.layers.1=albedo"), Contains("a list of 1 on the way"));
    CHECK_THAT(told("outputs.layers=[albedo"),
               Contains("missing bracket") && Contains("(--set outputs.layers)"));
    CHECK_THAT(told("title=caf\xe9"), Contains("not UTF-8"));
    CHECK_THAT(told("engine={tile: &x 256}"), Contains("an anchor"));
}

TEST_CASE("wrong overrides are told after the file's own mistakes", "[plan][edge]") {
    const auto problems =
        problems_of({"plan.yaml", small_plan + "titel: x\n", {"sky.turbidity=12"}});
    REQUIRE(problems.size() == 2);
    CHECK(problems[0].where == "plan.yaml:5: titel");
    CHECK(problems[1].where == "--set sky.turbidity");
}

}  // namespace sunbudget::test
