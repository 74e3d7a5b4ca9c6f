#include "sunbudget/tables/methods.hpp"

#include <catch2/catch.hpp>
#include <limits>

#include "sunbudget/base/error.hpp"
#include "sunbudget/physics/longwave.hpp"

using namespace sunbudget;
using Catch::Matchers::Contains;

TEST_CASE("esra2000: turbidity warns outside 2 to 7 and is refused at 0 and above 9",
          "[tables][vector]") {
    // The published fit turns over above 9 (Rigollier, Bauer & Wald 2000, diffuse term); 2 to 7 is
    // the span from cold clean air to a polluted or dusty one (common practice).
    const auto* turbidity = method("clear_sky", "esra2000").parameter("turbidity");
    REQUIRE(turbidity != nullptr);
    CHECK(turbidity->default_value == 3.0);
    CHECK(judge(*turbidity, 3.0) == Verdict::fine);
    CHECK(judge(*turbidity, 2.0) == Verdict::fine);
    CHECK(judge(*turbidity, 7.0) == Verdict::fine);
    CHECK(judge(*turbidity, 1.99) == Verdict::unusual);
    CHECK(judge(*turbidity, 9.0) == Verdict::unusual);
    CHECK(judge(*turbidity, 9.01) == Verdict::refused);
    CHECK(judge(*turbidity, 0.0) == Verdict::refused);
    CHECK(judge(*turbidity, -1.0) == Verdict::refused);
    CHECK(judge(*turbidity, std::numeric_limits<double>::quiet_NaN()) == Verdict::refused);
    CHECK(turbidity->allowed.text() == "above 0 and up to 9");
    CHECK(turbidity->usual.text() == "2 to 7");
}

TEST_CASE("methods: every row is complete and its defaults are usual", "[tables][property]") {
    for (const auto& row : methods()) {
        CAPTURE(row.family, row.name);
        CHECK_FALSE(row.text.empty());
        CHECK_FALSE(row.source.empty());
        CHECK(&method(row.family, row.name) == &row);
        for (const auto& p : row.parameters) {
            CHECK(row.parameter(p.name) == &p);
            CHECK_FALSE(p.unit.empty());
            CHECK(p.allowed.holds(p.usual.low));
            CHECK(p.allowed.holds(p.usual.high));
            if (p.default_value) CHECK(judge(p, *p.default_value) == Verdict::fine);
        }
    }
}

TEST_CASE("method: an unknown name comes with a suggestion", "[tables][edge]") {
    CHECK_THROWS_WITH(method("clear_sky", "esra200"), Contains("did you mean \"esra2000\"?"));
    CHECK_THROWS_WITH(method("albedo", "guess"), Contains("known here: class-table, given"));
    CHECK(method("clear_sky", "esra2000").parameter("ozone") == nullptr);
    CHECK(method_names("no-such-family").empty());
    CHECK(method_families() ==
          std::vector<std::string>{"sun_position", "air_mass", "clear_sky", "diffuse_sky",
                                   "real_sky", "horizon", "albedo", "longwave", "longwave_daily",
                                   "longwave_cloud", "surface_temperature", "emissivity", "sri"});
}

TEST_CASE("methods of heat: rows stand in the order of the physics' enumerations",
          "[tables][property]") {
    const auto row = [](const char* family, auto which) {
        return method_names(family).at(static_cast<std::size_t>(which));
    };
    CHECK(method_names("longwave").size() == 11);
    CHECK(row("longwave", LongwaveFormula::dilley_obrien1998) == "dilley-obrien1998");
    CHECK(row("longwave", LongwaveFormula::prata1996) == "prata1996");
    CHECK(row("longwave", LongwaveFormula::brutsaert1975) == "brutsaert1975");
    CHECK(row("longwave", LongwaveFormula::brunt1932) == "brunt1932");
    CHECK(row("longwave", LongwaveFormula::swinbank1963) == "swinbank1963");
    CHECK(row("longwave", LongwaveFormula::idso_jackson1969) == "idso-jackson1969");
    CHECK(row("longwave", LongwaveFormula::idso1981) == "idso1981");
    CHECK(row("longwave", LongwaveFormula::angstrom1918) == "angstrom1918");
    CHECK(row("longwave", LongwaveFormula::satterlund1979) == "satterlund1979");
    CHECK(row("longwave", LongwaveFormula::konzelmann1994) == "konzelmann1994");
    CHECK(row("longwave", LongwaveFormula::maykut_church1973) == "maykut-church1973");
    CHECK(method_names("longwave_daily") == std::vector<std::string>{"fao56", "asce2005"});
    CHECK(method_names("longwave_cloud").size() == 5);
    CHECK(row("longwave_cloud", LongwaveCloud::unsworth_monteith1975) == "unsworth-monteith1975");
    CHECK(row("longwave_cloud", LongwaveCloud::crawford_duchon1999) == "crawford-duchon1999");
    CHECK(row("longwave_cloud", LongwaveCloud::sugita_brutsaert1993) == "sugita-brutsaert1993");
    CHECK(row("longwave_cloud", LongwaveCloud::maykut_church1973) == "maykut-church1973");
    CHECK(row("longwave_cloud", LongwaveCloud::jacobs1978) == "jacobs1978");
}

TEST_CASE("given albedo: 0 and 1 are allowed, beyond is refused", "[tables][edge]") {
    const auto* value = method("albedo", "given").parameter("value");
    REQUIRE(value != nullptr);
    CHECK_FALSE(value->default_value);
    CHECK(judge(*value, 0.0) == Verdict::unusual);
    CHECK(judge(*value, 0.2) == Verdict::fine);
    CHECK(judge(*value, 1.0) == Verdict::unusual);
    CHECK(judge(*value, 1.01) == Verdict::refused);
    CHECK(judge(*value, -0.01) == Verdict::refused);
}
