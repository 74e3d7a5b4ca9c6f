#include <catch2/catch.hpp>

#include "program.hpp"

using sunbudget::test::Outcome;

TEST_CASE("sunbudget: help and version go to stdout, mistakes to stderr with exit code 2",
          "[cli]") {
    const auto version = sunbudget::test::sunbudget({"--version"});
    CHECK(version.exit_code == 0);
    CHECK_THAT(version.out, Catch::StartsWith("sunbudget "));
    for (const auto* command :
         {"run", "check", "explain", "albedo", "insolation", "net", "sun", "tables"}) {
        const auto help = sunbudget::test::sunbudget({command, "--help"});
        CAPTURE(command, help.out);
        CHECK(help.exit_code == 0);
        CHECK_THAT(help.out, Catch::Contains("Example: sunbudget " + std::string(command)));
        CHECK(help.err.empty());
    }
    const auto wrong = sunbudget::test::sunbudget({"rnu"});
    CHECK(wrong.exit_code == 2);
    CHECK(wrong.out.empty());
    CHECK_THAT(wrong.err, Catch::StartsWith("sunbudget: error: "));
}
