#include "sunbudget/tables/layers.hpp"

#include <catch2/catch.hpp>
#include <cmath>
#include <set>

#include "sunbudget/tables/quality.hpp"

using namespace sunbudget;

TEST_CASE("layers: each id leads to its row, each name to the same", "[tables][property]") {
    CHECK(layers().size() == 21);
    CHECK(layer_names().size() == 20);  // what changes bring is not asked for by name
    for (const auto& row : layers()) {
        CHECK(&layer(row.id) == &row);
        CHECK(layer_named(row.name) == &row);
        CHECK_FALSE(row.text.empty());
    }
    CHECK(layer_named("albdo") == nullptr);
    CHECK(layer_names().front() == "albedo");
}

TEST_CASE("unit_of: radiation follows the chosen unit, the rest has none", "[tables][property]") {
    CHECK(unit_of(layer(LayerId::insolation), OutputUnit::kwh_m2) == "kWh/m2");
    CHECK(unit_of(layer(LayerId::net_shortwave), OutputUnit::w_m2) == "W/m2");
    CHECK(unit_of(layer(LayerId::albedo), OutputUnit::mj_m2) == "1");
    CHECK(unit_of(layer(LayerId::quality), OutputUnit::mj_m2) == "1");
    for (const auto& name : output_unit_names()) CHECK(name_of(*output_unit_named(name)) == name);
    CHECK_FALSE(output_unit_named("W m-2"));
}

TEST_CASE("quantum_of: worked by hand", "[tables][vector]") {
    const auto& sun = layer(LayerId::insolation);
    CHECK(quantum_of(layer(LayerId::albedo), OutputUnit::w_m2, 0) == 1.0 / 8192);
    CHECK(quantum_of(layer(LayerId::quality), OutputUnit::w_m2, 0) == 1.0);
    CHECK(quantum_of(sun, OutputUnit::w_m2, 0) == 0.0625);
    // A day: 86400 s / 16 = 5400 J/m2, that is 0.0054 MJ/m2 and 0.0015 kWh/m2.
    CHECK(quantum_of(sun, OutputUnit::mj_m2, 86400) == 1.0 / 256);    // 0.0039
    CHECK(quantum_of(sun, OutputUnit::kwh_m2, 86400) == 1.0 / 1024);  // 0.00098
    CHECK(quantum_of(sun, OutputUnit::mj_m2, 31536000) == 1.0);       // 1.971 MJ/m2
    CHECK(quantum_of(sun, OutputUnit::mj_m2, 32e6) == 2.0);           // exactly 2 is not above 2
}

TEST_CASE("quantum_of: the largest power of two not above 1/16 W/m2 times the period",
          "[tables][property]") {
    const double period_s = GENERATE(60.0, 3600.0, 86400.0, 2592000.0, 31622400.0);
    for (const auto unit : {OutputUnit::mj_m2, OutputUnit::kwh_m2}) {
        const double most = period_s / 16 / joules_of(unit);
        const double quantum = quantum_of(layer(LayerId::direct), unit, period_s);
        CHECK(quantum <= most);
        CHECK(2 * quantum > most);
        CHECK(std::exp2(std::round(std::log2(quantum))) == quantum);
    }
}

TEST_CASE("standard_name_of: sums have names of their own, or none", "[tables][vector]") {
    // CF standard name table.
    CHECK(standard_name_of(layer(LayerId::net_shortwave), OutputUnit::w_m2) ==
          "surface_net_downward_shortwave_flux");
    CHECK(standard_name_of(layer(LayerId::net_shortwave), OutputUnit::kwh_m2) ==
          "integral_wrt_time_of_surface_net_downward_shortwave_flux");
    CHECK(standard_name_of(layer(LayerId::diffuse), OutputUnit::mj_m2).empty());
    CHECK(standard_name_of(layer(LayerId::albedo), OutputUnit::mj_m2) == "surface_albedo");
}

TEST_CASE("quality: no two meanings share a bit, sources share the low three",
          "[tables][property]") {
    std::set<std::pair<int, int>> seen;
    std::set<std::string> names;
    unsigned bits = 0;
    for (const auto& row : quality_rows()) {
        CAPTURE(row.name);
        CHECK((row.value & row.mask) == row.value);
        CHECK(seen.emplace(row.mask, row.value).second);
        CHECK(names.insert(row.name).second);
        if (row.mask == quality::source_mask) continue;
        CHECK((row.mask & (row.mask - 1)) == 0);
        CHECK((row.mask & (bits | quality::source_mask)) == 0);
        bits |= row.mask;
    }
}

TEST_CASE("quality_meanings: one source and all that was seen", "[tables][property]") {
    CHECK(quality_meanings(0) == std::vector<std::string>{"no_surface"});
    CHECK(quality_meanings(quality::filled | quality::cloud | quality::cirrus) ==
          std::vector<std::string>{"filled", "cloud", "cirrus"});
    CHECK(quality_meanings(quality::class_table | quality::no_elevation) ==
          std::vector<std::string>{"class_table", "no_elevation"});
}
