#include "sunbudget/base/text.hpp"

#include <catch2/catch.hpp>

using namespace sunbudget;

TEST_CASE("parse_number: takes decimal numbers only, as a whole", "[base][edge]") {
    CHECK(parse_number("0.25") == 0.25);
    CHECK(parse_number("-1e-3") == -0.001);
    CHECK(parse_number("+4") == 4.0);
    CHECK(parse_number("010") == 10.0);
    for (const auto* bad : {"", "1,5", "1.5 ", "nan", "inf", "0x10", "1.5m", "++1", "yes"}) {
        CAPTURE(bad);
        CHECK_FALSE(parse_number(bad));
    }
}

TEST_CASE("parse_bytes: powers of 1024 by one letter", "[base]") {
    CHECK(parse_bytes("2G") == 2'147'483'648u);
    CHECK(parse_bytes("1.5K") == 1536u);
    CHECK(parse_bytes("100") == 100u);
    CHECK_FALSE(parse_bytes("2GB"));
    CHECK_FALSE(parse_bytes("-1M"));
}

TEST_CASE("nearest_name: finds slips, not other words", "[base]") {
    const std::vector<std::string> keys{"turbidity", "model", "diffuse"};
    CHECK(nearest_name("turbidty", keys) == "turbidity");
    CHECK(nearest_name("modle", keys) == "model");
    CHECK_FALSE(nearest_name("b", std::vector<std::string>{"a"}));
    CHECK_FALSE(nearest_name("albedo", keys));
}

TEST_CASE("printable: control characters cannot reach the terminal", "[base]") {
    CHECK(printable("a\x1b[31mb") == "a\\x1b[31mb");
    CHECK(printable("a\nb\tc\x7f") == "a\\x0ab\\x09c\\x7f");
}

TEST_CASE("shortest: reads back as the same double", "[base][property]") {
    for (const double value : {0.1, 1.0 / 3.0, 1e300, -2.5, 0.0})
        CHECK(parse_number(shortest(value)) == value);
}
