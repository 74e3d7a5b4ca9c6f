// `sunbudget sun`: instants, tables, forms, mistakes.
#include <fmt/format.h>
#include <catch2/catch.hpp>
#include <nlohmann/json.hpp>

#include <cmath>
#include <map>
#include <sstream>

#include "program.hpp"

using namespace sunbudget::test;
using Catch::Contains;
using Json = nlohmann::ordered_json;

namespace {
std::string sun(std::vector<std::string> arguments) {
    arguments.insert(arguments.begin(), "sun");
    const auto outcome = sunbudget::test::sunbudget(arguments);
    CAPTURE(arguments, outcome.err);
    REQUIRE(outcome.exit_code == 0);
    CHECK(outcome.err.empty());
    return outcome.out;
}
Json json_of(std::vector<std::string> arguments) {
    arguments.emplace_back("--json");
    return Json::parse(sun(std::move(arguments)));
}
std::vector<std::string> keys_of(const Json& object) {
    std::vector<std::string> keys;
    for (const auto& [key, value] : object.items()) keys.push_back(key);
    return keys;
}
const std::vector<std::string> moment_keys{
    "time",        "elevation_deg", "elevation_refracted_deg", "azimuth_deg", "zenith_deg",
    "distance_au", "air_mass",      "extraterrestrial_w_m2",   "beam_w_m2",   "diffuse_w_m2",
    "global_w_m2", "on_slope_w_m2"};
}  // namespace

TEST_CASE("sun: agrees with the worked example of Reda & Andreas", "[cli][vector]") {
    // testdata/vectors/spa_example.csv: 2003-10-17 12:30:30 in zone -7 h, azimuth 194.34024, refracted zenith
    // 50.11162, distance 0.9965422974. The azimuth is good to the algorithm's own 3e-4 deg. The refraction,
    // 0.016 deg, is for the example's 820 hPa and 11 degC, ours for the height's pressure: 3 % at most.
    const auto rows = json_of({"--at", "39.742476,-105.1786", "--height", "1830.14", "--time",
                               "2003-10-17T12:30:30-07:00"});
    REQUIRE(rows.size() == 1);
    const auto& row = rows[0];
    CHECK(keys_of(row) == moment_keys);
    CHECK(row["time"] == "2003-10-17T19:30:30Z");
    CHECK(row["azimuth_deg"].get<double>() == Approx(194.34024).margin(3e-4).epsilon(0));
    CHECK(90 - row["elevation_refracted_deg"].get<double>() ==
          Approx(50.11162).margin(3e-4 + 5e-4).epsilon(0));
    CHECK(row["distance_au"].get<double>() == Approx(0.9965422974).margin(1e-6).epsilon(0));
    CHECK(row["elevation_deg"].get<double>() + row["zenith_deg"].get<double>() ==
          Approx(90).margin(1e-9));
}

TEST_CASE("sun: agrees with an ephemeris at ten places", "[cli][vector]") {
    const auto table = read_table("vectors/sun_topocentric_2024.csv");
    for (std::size_t i = 0; i < table.rows.size(); ++i) {
        const auto place = table.cell(i, "latitude_deg") + "," + table.cell(i, "longitude_deg");
        const auto row = json_of({"--at", place, "--height", table.cell(i, "height_m"), "--time",
                                  table.cell(i, "time_ut1") + "Z"})[0];
        CAPTURE(table.cell(i, "place"));
        const double zenith = table.number(i, "zenith_deg");
        // The table's tolerances; its TT - UT1 differs from ours by 0.02 s, which is nothing here.
        CHECK(row["zenith_deg"].get<double>() == Approx(zenith).margin(1e-4).epsilon(0));
        CHECK(row["azimuth_deg"].get<double>() ==
              Approx(table.number(i, "azimuth_deg"))
                  .margin(1e-4 / std::sin(zenith * M_PI / 180) + 5e-6)
                  .epsilon(0));
    }
}

TEST_CASE("sun: day lengths agree with FAO-56, and a year has a row a day", "[cli][vector]") {
    const auto table = read_table("vectors/fao56_table_2_7_daylight.csv");
    for (const double latitude : {40.0, -30.0, 0.0}) {
        std::map<std::string, double> hours;
        for (const auto& day : json_of({"--at", fmt::format("{},0", latitude), "--from",
                                        "2025-01-01", "--to", "2025-12-31"}))
            hours[day["date"].get<std::string>()] = day["day_length_h"].get<double>();
        CHECK(hours.size() == 365);
        // The table is rounded to 0.1 h; its declination errs by up to 1.1 deg (September), and
        // d(hour angle) = tan(latitude) / sin(hour angle) d(declination), sin > 0.9 here.
        const double margin =
            0.05 + 2.0 / 15 * 1.1 / 0.9 * std::abs(std::tan(latitude * M_PI / 180));
        for (std::size_t i = 0; i < table.rows.size(); ++i)
            for (std::size_t m = 1; m <= 12 && table.number(i, table.columns[0]) == latitude; ++m) {
                CAPTURE(latitude, m);
                CHECK(hours.at(fmt::format("2025-{:02}-15", m)) ==
                      Approx(table.number(i, table.columns[m])).margin(margin).epsilon(0));
            }
    }
}

TEST_CASE("sun: polar day has no sunrise but a length of 24 h, polar night no light",
          "[cli][edge]") {
    const auto day = json_of({"--at", "80,20", "--from", "2025-06-21"})[0];
    CHECK(keys_of(day) ==
          std::vector<std::string>{"date", "sunrise", "transit", "sunset", "sunrise_apparent",
                                   "sunset_apparent", "day_length_h", "transit_elevation_deg",
                                   "extraterrestrial_mj_m2", "direct_mj_m2", "diffuse_mj_m2",
                                   "global_mj_m2", "on_slope_mj_m2"});
    CHECK(day["sunrise"].is_null());
    CHECK(day["sunset"].is_null());
    CHECK(day["day_length_h"] == 24.0);
    CHECK(day["global_mj_m2"].get<double>() > 20);
    const auto night = json_of({"--at", "80,20", "--from", "2025-12-21"})[0];
    CHECK(night["sunrise"].is_null());
    CHECK(night["day_length_h"] == 0.0);
    CHECK(night["global_mj_m2"] == 0.0);
    const auto dark = json_of({"--at", "80,20", "--time", "2025-12-21T12:00Z"})[0];
    CHECK(dark["air_mass"].is_null());
    CHECK(dark["beam_w_m2"] == 0.0);
    for (const auto* pole : {"90,0", "-90,180"})
        CHECK(json_of({"--at", pole, "--from", "2025-03-20", "--to", "2025-03-21"}).size() == 2);
}

TEST_CASE("sun: text, CSV and JSON tell the same", "[cli]") {
    const std::vector<std::string> asked{"--at",       "52.5,13.4", "--from",
                                         "2025-06-21", "--step",    "3 h"};
    const auto rows = json_of(asked);
    REQUIRE(rows.size() == 8);
    auto csv_asked = asked;
    csv_asked.emplace_back("--csv");
    std::istringstream csv(sun(csv_asked)), text(sun(asked));
    std::string csv_line, text_line;
    for (std::size_t line = 0; std::getline(csv, csv_line); ++line) {
        std::vector<std::string> cells, words;
        std::istringstream of_csv(csv_line + ","), of_text;
        for (std::string cell; std::getline(of_csv, cell, ',');) cells.push_back(cell);
        REQUIRE(std::getline(text, text_line));
        of_text.str(text_line);
        for (std::string one; of_text >> one;) words.push_back(one == "-" ? "" : one);
        CHECK(cells == words);
        if (line == 0) {
            CHECK(cells == moment_keys);
            continue;
        }
        std::size_t n = 0;
        for (const auto& [key, value] : rows[line - 1].items()) {
            CHECK(cells[n] == (value.is_null()     ? ""
                               : value.is_string() ? value.get<std::string>()
                                                   : value.dump()));
            ++n;
        }
    }
}

TEST_CASE("sun: zones shift what a clock's time means", "[cli]") {
    const auto time_of = [](const std::string& time, const std::string& zone) {
        return json_of({"--at", "50,30", "--time", time, "--zone", zone})[0]["time"]
            .get<std::string>();
    };
    CHECK(time_of("2025-07-01T12:00", "UTC") == "2025-07-01T12:00:00Z");
    CHECK(time_of("2025-07-01T12:00", "+05:30") == "2025-07-01T06:30:00Z");
    CHECK(time_of("2025-07-01T12:00", "Europe/Berlin") == "2025-07-01T10:00:00Z");
    CHECK(time_of("2025-07-01T12:00", "solar-mean") == "2025-07-01T10:00:00Z");  // 30 deg east
    CHECK(time_of("2025-07-01T12:00-03:00", "Europe/Berlin") == "2025-07-01T15:00:00Z");
    const auto noon =
        json_of({"--at", "50,30", "--time", "2025-07-01T12:00", "--zone", "solar-true"})[0];
    // At true solar noon the sun stands in the south; a clock second is 0.004 deg of hour angle, at most 0.01 of azimuth.
    CHECK(noon["azimuth_deg"].get<double>() == Approx(180).margin(0.02).epsilon(0));
    // The day on which clocks go forward has 23 hours.
    CHECK(json_of(
              {"--at", "50,8", "--from", "2025-03-30", "--step", "1 h", "--zone", "Europe/Berlin"})
              .size() == 23);
}

TEST_CASE("sun: wrong flags are refused with the flag's name", "[cli][edge]") {
    const std::vector<std::pair<std::vector<std::string>, std::string>> wrong{
        {{"--at", "91,0", "--time", "2025-01-01T00:00Z"}, "--at"},
        {{"--at", "50", "--time", "2025-01-01T00:00Z"}, "--at"},
        {{"--at", "nan,8", "--time", "2025-01-01T00:00Z"}, "--at"},
        {{"--at", "50,8"}, "--time"},
        {{"--time", "2025-01-01T00:00Z"}, "--at"},
        {{"--at", "50,8", "--time", "2025-01-01"}, "(--time)"},
        {{"--at", "50,8", "--time", "2025-13-01T00:00"}, "(--time)"},
        {{"--at", "50,8", "--time", "2025-01-01T00:00Z", "--from", "2025-01-01"}, "--from"},
        {{"--at", "50,8", "--from", "2025-02-30"}, "(--from)"},
        {{"--at", "50,8", "--from", "2025-02-20", "--to", "2025-02-10"}, "(--to)"},
        {{"--at", "50,8", "--from", "2025-02-20", "--step", "0 s"}, "(--step)"},
        {{"--at", "50,8", "--from", "1900-01-01", "--to", "2100-01-01", "--step", "1 s"},
         "(--step)"},
        {{"--at", "50,8", "--from", "2025-02-20", "--csv", "--json"}, "--json"},
        {{"--at", "50,8", "--time", "2025-01-01T00:00Z", "--turbidity", "10"}, "(--turbidity)"},
        {{"--at", "50,8", "--time", "2025-01-01T00:00Z", "--height", "high"}, "(--height)"},
        {{"--at", "50,8", "--time", "2025-01-01T00:00", "--zone", "Europe/Berln"},
         "did you mean \"Europe/Berlin\"?"},
        {{"--at", "50,8", "--time", "2025-10-26T02:30", "--zone", "Europe/Berlin"},
         "2025-10-26T02:30:00+02:00 is the first"},
        {{"--at", "50,8", "--time", "2025-03-30T02:30", "--zone", "Europe/Berlin"},
         "does not exist"},
    };
    for (auto [arguments, part] : wrong) {
        arguments.insert(arguments.begin(), "sun");
        const auto outcome = sunbudget::test::sunbudget(arguments);
        CAPTURE(arguments, outcome.err);
        CHECK(outcome.exit_code == 2);
        CHECK(outcome.out.empty());
        CHECK_THAT(outcome.err, Catch::StartsWith("sunbudget: error: ") && Contains(part));
    }
}

TEST_CASE("sun: turbidity outside the usual is used with a warning", "[cli]") {
    const auto outcome = sunbudget::test::sunbudget(
        {"sun", "--at", "50,8", "--time", "2025-06-01T12:00Z", "--turbidity", "8"});
    CHECK(outcome.exit_code == 0);
    CHECK_THAT(outcome.err, Catch::StartsWith("sunbudget: warning: ") && Contains("--turbidity"));
}

TEST_CASE("sun: every clear-sky model answers with its own numbers and refuses those of others",
          "[cli]") {
    const std::vector<std::string> noon{"--at", "40,-105", "--height",
                                        "1600", "--time",  "2025-06-21T12:00-07:00"};
    const auto global = [&](std::vector<std::string> more) {
        auto all = noon;
        all.insert(all.end(), more.begin(), more.end());
        return json_of(all)[0]["global_w_m2"].get<double>();
    };
    for (const auto* model :
         {"esra2000", "bird-hulstrom1981", "ineichen-perez2002", "asce2005", "fao56"})
        CHECK(global({"--model", model}) ==
              Approx(1030).epsilon(0.05));  // as far apart as the models are
    // FAO-56 eq. 37 at 1600 m: 0.782 of the light outside the air, on its own solar constant of 1366.67 W m-2.
    const auto row = [&] {
        auto all = noon;
        all.insert(all.end(), {"--model", "fao56"});
        return json_of(all)[0];
    }();
    const double outside = row["extraterrestrial_w_m2"].get<double>() *
                           std::sin(row["elevation_deg"].get<double>() * M_PI / 180);
    CHECK(row["global_w_m2"].get<double>() ==
          Approx(0.782 * outside * 1366.6667 / 1361).epsilon(1e-4));
    CHECK(global({"--model", "asce2005", "--vapour-pressure", "25"}) <
          global({"--model", "asce2005"}));
    CHECK(global({"--model", "bird-hulstrom1981", "--albedo", "0.8"}) >
          global({"--model", "bird-hulstrom1981"}) * 1.03);
    CHECK(global({"--turbidity", "3,3,3,3,3,6,3,3,3,3,3,3"}) == global({"--turbidity", "6"}));

    const auto refused = [&](std::vector<std::string> more) {
        auto all = noon;
        all.insert(all.begin(), "sun");
        all.insert(all.end(), more.begin(), more.end());
        const auto outcome = sunbudget::test::sunbudget(all);
        CHECK(outcome.exit_code == 2);
        return outcome.err;
    };
    CHECK_THAT(refused({"--model", "fao56", "--turbidity", "3"}),
               Contains("fao56 has no turbidity (--turbidity)"));
    CHECK_THAT(refused({"--model", "asce"}), Contains("asce2005"));
    CHECK_THAT(refused({"--turbidity", "3,4"}), Contains("neither one number nor twelve"));
    CHECK_THAT(refused({"--model", "ineichen-perez2002", "--turbidity", "0.5"}),
               Contains("1 to 9"));
    CHECK_THAT(refused({"--slope", "30"}), Contains("--azimuth"));
}

TEST_CASE(
    "sun: level ground gets the global, a wall that faces the sun gets more, one that turns away "
    "only sky and ground",
    "[cli][property]") {
    const std::vector<std::string> where{"--at", "52,0", "--time", "2025-12-21T12:00Z"};
    const auto row = [&](std::vector<std::string> more) {
        auto all = where;
        all.insert(all.end(), more.begin(), more.end());
        return json_of(all)[0];
    };
    const auto level = row({});
    CHECK(level["on_slope_w_m2"] == level["global_w_m2"]);
    CHECK(row({"--slope", "75", "--azimuth", "180"})["on_slope_w_m2"].get<double>() >
          2 * level["global_w_m2"].get<double>());
    // Liu & Jordan and no ground light: half of the sky is all a north wall has.
    const auto north =
        row({"--slope", "90", "--azimuth", "0", "--diffuse", "liu-jordan1963", "--albedo", "0"});
    CHECK(north["on_slope_w_m2"].get<double>() ==
          Approx(level["diffuse_w_m2"].get<double>() / 2).margin(0.01));
    const auto day = json_of({"--at", "52,0", "--from", "2025-12-21"})[0];
    // The sun lower than 5 degrees has its light from around it spread over the whole sky: level ground still adds up.
    CHECK(day["on_slope_mj_m2"].get<double>() ==
          Approx(day["global_mj_m2"].get<double>()).margin(1e-4));
    CHECK(day["sunrise_apparent"].get<std::string>() < day["sunrise"].get<std::string>());
    CHECK(day["sunset_apparent"].get<std::string>() > day["sunset"].get<std::string>());
}

TEST_CASE("sun: a plot has the day's height, its hours and no line wider than a terminal",
          "[cli]") {
    const auto plot = sun({"--at", "40,-105", "--from", "2025-06-21", "--zone", "solar-mean",
                           "--slope", "30", "--azimuth", "180", "--plot"});
    CHECK_THAT(plot, Contains("1200 |") && Contains("12") && Contains("h, solar-mean") &&
                         Contains("o all light on the slope"));
    std::istringstream lines(plot);
    std::size_t count = 0;
    for (std::string line; std::getline(lines, line); ++count) {
        CAPTURE(line);
        CHECK(line.size() <= 100);
    }
    CHECK(count == 16);
    // Polar night: nothing but the frame.
    const auto dark = sun({"--at", "80,20", "--time", "2025-12-21T12:00Z", "--plot"});
    CHECK(dark.find('#') == dark.rfind('#'));  // the legend's alone
    const auto outcome = sunbudget::test::sunbudget(
        {"sun", "--at", "40,-105", "--from", "2025-06-21", "--to", "2025-06-22", "--plot"});
    CHECK(outcome.exit_code == 2);
    CHECK_THAT(outcome.err, Contains("a plot shows one day"));
}
