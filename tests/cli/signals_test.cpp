// Runs that are stopped while they work.
#include <signal.h>
#include <catch2/catch.hpp>

#include <chrono>
#include <random>
#include <thread>

#include "desk.hpp"

using namespace sunbudget::test;

namespace {
/// Works for about half a minute as it stands: no test waits for its end.
void write_long_plan(const Desk& desk) {
    write(desk.path("plan.yaml"),
          "sunbudget: 1\n"
          "grid: {crs: EPSG:32633, bounds: [500000, 5496000, 504000, 5500000], cell: 1}\n"
          "surface: {albedo: {value: 0.2}}\n"
          "time: {from: 2025-01-01, to: 2025-12-31, step: 10 min, totals: month}\n"
          "outputs: {directory: out, layers: [insolation, direct, diffuse, net_shortwave]}\n");
}

double random_delay_s(double longest_s) {
    static std::mt19937 generator{std::random_device{}()};
    return std::uniform_real_distribution<double>(0, longest_s)(generator);
}

void wait_s(double seconds) {
    std::this_thread::sleep_for(std::chrono::duration<double>(seconds));
}
}  // namespace

TEST_CASE("run: a signal ends it within five seconds with its code, and nothing is left behind",
          "[cli][edge]") {
    const Desk desk;
    write_long_plan(desk);
    for (const int signal : {SIGTERM, SIGINT, SIGTERM, SIGINT, SIGHUP}) {
        const double delay_s = random_delay_s(1.2);
        Running run({"run", "plan.yaml"}, {desk.path().string(), {}});
        wait_s(delay_s);
        run.send(signal);
        const auto outcome = run.end(5);
        CAPTURE(signal, delay_s, outcome.err);
        CHECK(outcome.exit_code == 128 + signal);
        CHECK(outcome.out.empty());
        CHECK(well_formed(outcome.err));
        CHECK(names_in(desk.path("out")).empty());
    }
    const auto second = desk.run({"run", "plan.yaml", "--set", "grid.cell=50"});
    CHECK(second.exit_code == 0);
    CHECK(names_in(desk.path("out")).size() == 6);
}

TEST_CASE("run: whenever a signal comes, the folder holds the whole set or none of it",
          "[cli][edge]") {
    const Desk desk;
    write_long_plan(desk);
    for (int i = 0; i < 12; ++i) {
        const double delay_s = random_delay_s(0.5);
        Running run({"run", "plan.yaml", "--set", "grid.cell=10"}, {desk.path().string(), {}});
        wait_s(delay_s);
        run.send(SIGTERM);
        const auto outcome = run.end(5);
        CAPTURE(delay_s, outcome.err);
        const auto names = names_in(desk.path("out"));
        CHECK((outcome.exit_code == 0 || outcome.exit_code == 143));
        CHECK(names.size() == (outcome.exit_code == 0 ? 6U : 0U));
        std::filesystem::remove_all(desk.path("out"));
    }
}

TEST_CASE("run: what a killed run left is cleared away by the next", "[cli][edge]") {
    const Desk desk;
    write_long_plan(desk);
    Running run({"run", "plan.yaml"}, {desk.path().string(), {}});
    wait_s(0.7);
    run.send(SIGKILL);
    CHECK(run.end(5).exit_code == 128 + SIGKILL);
    CHECK(desk.run({"run", "plan.yaml", "--set", "grid.cell=50"}).exit_code == 0);
    CHECK(names_in(desk.path("out")).size() == 6);
}

TEST_CASE("run: goes on after a hang-up when it was started to ignore it", "[cli][edge]") {
    const Desk desk;
    write_long_plan(desk);
    const auto outcome = shell(
        "cd " + word(desk.path()) + " && nohup " + program_path() +
        " run plan.yaml --set grid.cell=4 >log 2>&1 & p=$!; sleep 0.5; kill -HUP $p; wait $p");
    CHECK(outcome.exit_code == 0);
    CHECK(names_in(desk.path("out")).size() == 6);
}

TEST_CASE("run: a second run in the folder of a running one is refused", "[cli][edge]") {
    const Desk desk;
    write_long_plan(desk);
    Running first({"run", "plan.yaml"}, {desk.path().string(), {}});
    for (int i = 0; i < 500 && names_in(desk.path("out")).empty(); ++i) wait_s(0.01);
    const auto second = desk.run({"run", "plan.yaml"});
    CHECK(second.exit_code == 4);
    CHECK_THAT(second.err, Catch::Contains("another run is writing here: process "));
    first.send(SIGTERM);
    CHECK(first.end(5).exit_code == 143);
}
