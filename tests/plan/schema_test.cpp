#include <catch2/catch.hpp>

#include "plan_support.hpp"
#include "sunbudget/tables/layers.hpp"
#include "support/vectors.hpp"

namespace sunbudget::test {

using Catch::Matchers::Contains;

TEST_CASE("the shipped schema is the one the program prints", "[plan][vector]") {
    // After a change of the keys: plan_tool schema > pipelines/plan.schema.json
    CHECK(text_of_file(source_folder() / "pipelines/plan.schema.json") == plan_schema_json());
}

TEST_CASE("the help has every key with its default, choices and rules", "[plan][property]") {
    const auto help = plan_help();
    CHECK_THAT(help, Contains("turbidity: a number above 0 and up to 9, a list of 12 such or a "
                              "raster (PATH, PATH:BAND)\n"));
    CHECK_THAT(help, Contains("default: 10 min\n  step: a duration"));
    CHECK_THAT(help, Contains("required\n  layers: a list of albedo"));
    CHECK_THAT(help, Contains("# at most one of: cover, albedo"));
    CHECK_THAT(help, Contains("# crs needs bounds, cell"));
    for (const auto& name : layer_names()) CHECK_THAT(help, Contains(name));
}

}  // namespace sunbudget::test
