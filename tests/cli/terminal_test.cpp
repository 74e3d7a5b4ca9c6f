// What is written where: stdout, stderr, a terminal.
#include <catch2/catch.hpp>

#include "desk.hpp"

using namespace sunbudget::test;
using Catch::Contains;
using Catch::StartsWith;

namespace {
constexpr const char* escape = "\x1b";

/// Long enough that a bar is drawn.
const std::vector<std::string> visible_run{"run",
                                           "plan.yaml",
                                           "--fresh",
                                           "--set",
                                           "grid.cell=2",
                                           "--set",
                                           "surface.cover.raster=cover.tif"};
std::vector<std::string> with(std::vector<std::string> arguments, const std::string& more) {
    arguments.push_back(more);
    return arguments;
}
const std::vector<std::string> plain{"TERM=xterm", "NO_COLOR"};
const std::vector<std::string> colourless{"TERM=xterm", "NO_COLOR=1"};
}  // namespace

TEST_CASE("run: stdout stays empty, stderr holds lines of one form without escapes", "[cli]") {
    const Desk desk;
    const auto outcome = desk.run({"run", "plan.yaml"}, plain);
    CHECK(outcome.exit_code == 0);
    CHECK(outcome.out.empty());
    CHECK(well_formed(outcome.err));
    CHECK_THAT(outcome.err, Contains("albedo: mean "));
    const auto wrong = desk.run({"run", "none.yaml"}, plain);
    CHECK_THAT(wrong.err, StartsWith("sunbudget: error: ") && !Contains(escape));
    CHECK(wrong.out.empty());
}

TEST_CASE("run --quiet: prints nothing but warnings and errors", "[cli]") {
    const Desk desk;
    const auto silent = desk.run({"run", "plan.yaml", "--quiet"});
    CHECK(silent.exit_code == 0);
    CHECK((silent.out + silent.err).empty());
    CHECK(desk.run({"run", "plan.yaml", "--quiet"}).err.empty());  // complete already
    const auto warned =
        desk.run({"run", "plan.yaml", "--quiet", "--fresh", "--set", "sky.turbidity=8"});
    CHECK(warned.exit_code == 0);
    CHECK_THAT(warned.err, StartsWith("sunbudget: warning: sky.turbidity: 8"));
    CHECK_THAT(desk.run({"run", "none.yaml", "--quiet"}).err, StartsWith("sunbudget: error: "));
    const auto shown =
        sunbudget_on_terminal(with(visible_run, "--quiet"), {desk.path().string(), plain});
    CAPTURE(shown.err);
    CHECK(shown.exit_code == 0);
    CHECK_THAT(shown.err, !Contains("computing"));
}

TEST_CASE("check: prints the resolved run on stdout and warnings on stderr", "[cli]") {
    const Desk desk;
    const auto outcome = desk.run({"check", "plan.yaml", "--set", "sky.turbidity=8"});
    CHECK(outcome.exit_code == 0);
    CHECK_THAT(outcome.out, StartsWith("Grid\n  80 x 60 cells of 30 x 30 m") &&
                                Contains("surface.cover.raster: cover.tif") &&
                                Contains("Classes in the raster") && Contains("kasten-young1989") &&
                                Contains("rounded to 0.0625") && Contains("Estimate"));
    CHECK_THAT(outcome.err, StartsWith("sunbudget: warning: sky.turbidity: 8"));
    CHECK_THAT(desk.run({"check", "plan.yaml", "--set", "outputs.layers=[albedo]"}).out,
               Contains("the plan's time is not used"));
    CHECK(names_in(desk.path()) == std::vector<std::string>{"cover.tif", "plan.yaml"});
}

TEST_CASE("run: a terminal gets a progress bar, and colour unless NO_COLOR says no", "[cli]") {
    const Desk desk;
    make_cover(desk.path("cover.tif"), 80, 60, patchy);
    const auto bar = sunbudget_on_terminal(visible_run, {desk.path().string(), plain});
    CAPTURE(bar.err);
    CHECK(bar.exit_code == 0);
    CHECK(bar.out.empty());
    CHECK_THAT(bar.err, Contains("\rcomputing ") && Contains("%"));
    const auto wrong = sunbudget_on_terminal({"run", "none.yaml"}, {desk.path().string(), plain});
    CHECK_THAT(wrong.err, Contains("\x1b[1;31merror: \x1b[0m"));
    const auto grey =
        sunbudget_on_terminal({"run", "none.yaml"}, {desk.path().string(), colourless});
    CHECK_THAT(grey.err, StartsWith("sunbudget: error: ") && !Contains(escape));
    const auto dumb = sunbudget_on_terminal(with(visible_run, "--threads=1"),
                                            {desk.path().string(), {"TERM=dumb"}});
    CHECK_THAT(dumb.err, !Contains(escape) && !Contains("computing"));
}

TEST_CASE("sunbudget: a reader that goes away does not end the program with a signal",
          "[cli][edge]") {
    const auto outcome =
        shell("{ " + program_path() + " tables corine --csv; echo code $? >&2; } | true");
    CAPTURE(outcome.err);
    CHECK_THAT(outcome.err, !Contains("code 141"));
}

TEST_CASE("sunbudget: results that cannot be written to stdout end with 4", "[cli][edge]") {
    for (const auto* command :
         {"tables nlcd --csv", "sun --at 1,2 --time 2025-01-01T00:00Z", "--help", "tables plan"}) {
        const auto outcome = shell(program_path() + " " + command + " > /dev/full");
        CAPTURE(command, outcome.err);
        CHECK(outcome.exit_code == 4);
        CHECK_THAT(outcome.err, StartsWith("sunbudget: error: "));
    }
}

TEST_CASE("sunbudget: started without its streams it writes the same files, and no result unseen",
          "[cli][edge]") {
    const Desk desk;
    REQUIRE(desk.run({"run", "plan.yaml"}).exit_code == 0);
    const auto start = "cd " + word(desk.path()) + " && " + program_path() + " ";
    CHECK(shell(start + "run plan.yaml --out bare <&- >&- 2>&-").exit_code == 0);
    CHECK(content(desk.path("bare/SHA256SUMS")) == content(desk.path("out/SHA256SUMS")));
    CHECK(
        shell("cd " + word(desk.path("bare")) + " && sha256sum -c --quiet SHA256SUMS").exit_code ==
        0);
    CHECK(shell(start + "check plan.yaml >&-").exit_code == 4);
}
