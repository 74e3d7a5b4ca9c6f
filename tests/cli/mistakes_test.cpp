// Wrong command lines, plans and inputs: exit code and message.
#include <algorithm>
#include <catch2/catch.hpp>

#include "desk.hpp"

using namespace sunbudget::test;
using Catch::Contains;
using Catch::StartsWith;

namespace {
std::size_t lines_of(const std::string& text) {
    return static_cast<std::size_t>(std::count(text.begin(), text.end(), '\n'));
}
}  // namespace

TEST_CASE("sunbudget: a wrong command line ends with 2, one line on stderr and nothing on stdout",
          "[cli][edge]") {
    const Desk desk;
    const std::vector<std::vector<std::string>> wrong{
        {},
        {"rnu"},
        {"run"},
        {"run", "plan.yaml", "more.yaml"},
        {"run", "plan.yaml", "--bogus"},
        {"run", "plan.yaml", "--out"},
        {"run", "plan.yaml", "--threads", "0"},
        {"run", "plan.yaml", "--threads", "two"},
        {"run", "plan.yaml", "--threads", "1e9"},
        {"run", "plan.yaml", "--memory", "3"},
        {"run", "plan.yaml", "--memory", "2 GB?"},
        {"check"},
        {"albedo", "--cover", "cover.tif", "--classes", "worldcover"},
        {"albedo", "-o", "a.tif"},
        {"insolation", "--like", "cover.tif", "-o", "a.tif"},
        {"net", "--cover", "cover.tif", "--classes", "worldcover", "-o", "a.tif"},
        {"tables", "worldcovr"},
    };
    for (const auto& arguments : wrong) {
        const auto outcome = desk.run(arguments);
        CAPTURE(arguments, outcome.err);
        CHECK(outcome.exit_code == 2);
        CHECK(outcome.out.empty());
        CHECK_THAT(outcome.err, StartsWith("sunbudget: error: "));
        CHECK(well_formed(outcome.err));
    }
    CHECK(names_in(desk.path()) == std::vector<std::string>{"cover.tif", "plan.yaml"});
}

TEST_CASE("sunbudget: every mistake of a plan is told at once, with file, line, key and what to do",
          "[cli][edge]") {
    const Desk desk;
    write(desk.path("bad.yaml"),
          "sunbudget: 1\n"
          "surface:\n"
          "  cover: {raster: cover.tif, clases: worldcover}\n"
          "sky: {turbidity: 12}\n"
          "time: {at: 2025-02-30T12:00Z}\n"
          "outputs: {directory: out, layers: [albdo]}\n");
    const auto outcome = desk.run({"run", "bad.yaml"});
    CAPTURE(outcome.err);
    CHECK(outcome.exit_code == 2);
    CHECK_THAT(outcome.err, Contains("sunbudget: error: there is no key \"clases\" (bad.yaml:3: "
                                     "surface.cover.clases): did you mean \"classes\"?\n"));
    CHECK_THAT(outcome.err, Contains("(bad.yaml:4: sky.turbidity)"));
    CHECK_THAT(outcome.err, Contains("(bad.yaml:5: time.at)"));
    CHECK_THAT(outcome.err,
               Contains("(bad.yaml:6: outputs.layers[1]): did you mean \"albedo\"?\n"));
    CHECK(lines_of(outcome.err) >= 4);
    CHECK(well_formed(outcome.err));
}

TEST_CASE("sunbudget: every input that is missing or unfit is told at once, with exit code 3",
          "[cli][edge]") {
    const Desk desk;
    write(desk.path("empty.tif"), "");
    write(desk.path("bad.yaml"),
          "sunbudget: 1\n"
          "grid: {crs: EPSG:32633, bounds: [500000, 5499000, 501000, 5500000], cell: 30}\n"
          "surface:\n"
          "  cover: {raster: covr.tif, classes: worldcover}\n"
          "terrain: {elevation: empty.tif}\n"
          "time: {at: 2025-06-21T12:00Z}\n"
          "outputs: {directory: out, layers: [net_shortwave]}\n");
    for (const auto* command : {"run", "check"}) {
        const auto outcome = desk.run({command, "bad.yaml"});
        CAPTURE(command, outcome.err);
        CHECK(outcome.exit_code == 3);
        CHECK(outcome.out.empty());
        CHECK_THAT(outcome.err, Contains("bad.yaml:4: surface.cover.raster") &&
                                    Contains("did you mean \"cover.tif\"?"));
        CHECK_THAT(outcome.err, Contains("bad.yaml:5: terrain.elevation"));
        CHECK(well_formed(outcome.err));
        CHECK(names_in(desk.path("out")).empty());
    }
}

TEST_CASE("sunbudget: a plan that is missing, a folder or no YAML is refused", "[cli][edge]") {
    const Desk desk;
    CHECK(desk.run({"run", "none.yaml"}).exit_code == 3);
    CHECK(desk.run({"run", "."}).exit_code == 3);
    write(desk.path("empty.yaml"), "");
    write(desk.path("torn.yaml"), "sunbudget: 1\nsurface: {cover: [\n");
    write(desk.path("bytes.yaml"), std::string("\0\xff\xfe\x01", 4));
    for (const auto* name : {"empty.yaml", "torn.yaml", "bytes.yaml", "cover.tif"}) {
        const auto outcome = desk.run({"run", name});
        CAPTURE(name, outcome.err);
        CHECK(outcome.exit_code == 2);
        CHECK_THAT(outcome.err, StartsWith("sunbudget: error: ") && Contains(name));
        CHECK(well_formed(outcome.err));
    }
}

TEST_CASE("run --set: changes keys, and its mistakes name the flag", "[cli]") {
    const Desk desk;
    REQUIRE(desk.run({"run", "plan.yaml", "--set", "sky.turbidity=5", "--set",
                      "outputs.directory=here", "--set", "outputs.layers=[albedo, direct]"})
                .exit_code == 0);
    CHECK(names_in(desk.path("here")) ==
          std::vector<std::string>{"SHA256SUMS", "albedo.tif", "direct.tif", "run.json"});
    CHECK_THAT(content(desk.path("here/run.json")), Contains("\"turbidity\""));
    for (const auto* text :
         {"sky.turbdity=5", "sky.turbidity=x", "sky.turbidity", "=3", "surface=3"}) {
        const auto outcome = desk.run({"run", "plan.yaml", "--set", text});
        CAPTURE(text, outcome.err);
        CHECK(outcome.exit_code == 2);
        CHECK_THAT(outcome.err, Contains("--set"));
    }
}
