#include "sunbudget/physics/sun_day.hpp"

#include <catch2/catch.hpp>
#include <cmath>
#include <numbers>

#include "sunbudget/physics/sun_place.hpp"
#include "support/vectors.hpp"

using namespace sunbudget;
using namespace sunbudget::test;

namespace {

UtcSeconds utc(const std::string& text) {
    return resolve(parse_instant(text), Zone(), 0);
}

SunDay day_at(const std::string& date, double latitude_deg, double longitude_deg,
              double threshold_rad) {
    const double begin = utc(date + "T00:00Z");
    const SunTrack track(begin, begin + 86400);
    return sun_day(track, begin, begin + 86400, rad_from_deg(latitude_deg),
                   rad_from_deg(longitude_deg), threshold_rad);
}

}  // namespace

TEST_CASE("spans_above_zero: finds passages that graze", "[physics][edge]") {
    // One turn a day; above zero for a few minutes, or below, between two samples.
    const double level = GENERATE(-0.99999, 0.99999);
    const auto wave = [=](UtcSeconds t) {
        return std::sin(2 * std::numbers::pi * (t - 1234) / 86400) - level;
    };
    const double lit_s = std::acos(level) / std::numbers::pi * 86400;
    const auto spans = spans_above_zero(wave, 0, 86400);
    double total_s = 0;
    for (const auto& span : spans) total_s += span.end - span.begin;
    CHECK(total_s ==
          Approx(lit_s).margin(0.2));  // 0.1 ms at each end, and heights of 1e-7 missed at the turn
    CHECK(spans.size() == (level > 0 ? 1u : 2u));
}

TEST_CASE("spans_above_zero: a span that is wholly lit or dark is one or none", "[physics][edge]") {
    const auto wave = [](double level) {
        return [=](UtcSeconds t) { return std::sin(2 * std::numbers::pi * t / 86400) - level; };
    };
    const auto lit = spans_above_zero(wave(-1.0001), 100, 90000);
    REQUIRE(lit.size() == 1);
    CHECK(lit[0].begin == 100);
    CHECK(lit[0].end == 90000);
    CHECK(spans_above_zero(wave(1.0001), 100, 90000).empty());
}

TEST_CASE("sun_day: polar day, polar night and a sunset before sunrise are told apart",
          "[physics][edge]") {
    const auto summer = day_at("2025-06-21", 78.22, 15.63, geometric_horizon_rad);
    CHECK(summer.always_up);
    CHECK(summer.day_length_s == 86400);
    CHECK_FALSE(summer.sunrise);
    CHECK(summer.transit);
    const auto winter = day_at("2025-12-21", 78.22, 15.63, almanac_horizon_rad);
    CHECK(winter.always_down);
    CHECK(winter.day_length_s == 0);
    // At 180 W the UTC day starts in the middle of daylight.
    const auto split = day_at("2025-03-25", 40, -179, geometric_horizon_rad);
    REQUIRE(split.sunrise);
    REQUIRE(split.sunset);
    CHECK(*split.sunset < *split.sunrise);
    CHECK_FALSE(split.always_up);
    CHECK(split.day_length_s == Approx(12.2 * 3600).margin(600));
}

TEST_CASE("sun_day: spans shorter or longer than a day keep their own transit", "[physics][edge]") {
    const double begin = utc("2025-06-01T02:00Z");
    const SunTrack track(begin, begin + 90000);
    const auto transit_within = [&](double hours) {
        return sun_day(track, begin, begin + hours * 3600, rad_from_deg(50), 0).transit;
    };
    CHECK_FALSE(transit_within(6));
    CHECK_FALSE(transit_within(9.5));
    REQUIRE(transit_within(25));
    CHECK(*transit_within(25) == *transit_within(11));
    // A span that starts just after a transit has the next one, up to 30 s off a mean day later.
    const double after = *transit_within(25) + 0.5;
    const SunTrack next(after, after + 86460);
    const auto second = sun_day(next, after, after + 86460, rad_from_deg(50), 0).transit;
    REQUIRE(second);
    CHECK(*second - after == Approx(86400).margin(31));
}

TEST_CASE("sun_day: day and night are twelve hours everywhere at an equinox",
          "[physics][property]") {
    const double latitude_deg = GENERATE(range(-85.0, 86.0, 10.0));
    const auto day = day_at("2024-03-20", latitude_deg, 0, geometric_horizon_rad);
    CAPTURE(latitude_deg, day.day_length_s);
    // The declination is within 0.2 deg of 0 all day: 8 minutes per degree and tangent of latitude.
    const double slack_s = 0.2 * 480 * std::abs(std::tan(rad_from_deg(latitude_deg))) + 30;
    CHECK(day.day_length_s == Approx(43200).margin(slack_s));
}

TEST_CASE("sun_day: the sun is on the threshold at both ends and on the meridian at transit",
          "[physics][property]") {
    const double latitude_deg = GENERATE(take(8, random(-65.0, 65.0)));
    const double longitude_deg = GENERATE(take(3, random(-180.0, 180.0)));
    const double threshold_rad = GENERATE(geometric_horizon_rad, almanac_horizon_rad);
    CAPTURE(latitude_deg, longitude_deg, threshold_rad);
    const double begin = utc("2025-10-07T00:00Z");
    const SunTrack track(begin, begin + 86400);
    const double lat = rad_from_deg(latitude_deg), lon = rad_from_deg(longitude_deg);
    const auto day = sun_day(track, begin, begin + 86400, lat, lon, threshold_rad);
    REQUIRE(day.sunrise);
    REQUIRE(day.sunset);
    const auto height_rad = [&](UtcSeconds t) {
        return std::asin(dot(sun_direction(sun_state(t)), up_direction(lat, lon)));
    };
    // 0.1 ms of time are 7e-9 rad of the sun's path.
    CHECK(height_rad(*day.sunrise) == Approx(threshold_rad).margin(2e-8));
    CHECK(height_rad(*day.sunset) == Approx(threshold_rad).margin(2e-8));
    const double hour_angle_rad = track.at(day.transit.value()).greenwich_hour_angle_rad + lon;
    CHECK(std::abs(std::remainder(hour_angle_rad, 2 * std::numbers::pi)) < 1e-9);
}

TEST_CASE("sun_day: noon height at 40 N on the June solstice is 73.5 degrees",
          "[physics][property]") {
    // Common practice; geocentric, to the printed digit.
    const auto day = day_at("2024-06-20", 40, 0, geometric_horizon_rad);
    const double sine = sin_elevation(sun_state(day.transit.value()), rad_from_deg(40), 0);
    CHECK(deg_from_rad(std::asin(sine)) == Approx(73.5).margin(0.1));
}

TEST_CASE("daily_extraterrestrial: agrees with Duffie & Beckman's table of H0",
          "[physics][vector]") {
    // Table 1.10.1 with its own constant 1367, Klein's mean days and Cooper's declination
    // (eq. 1.6.1). 0.45 MJ m-2 is the spread of a table computed in single precision about its
    // formula; polar equinox months are not the mean day's value there and are left out.
    constexpr int mean_days[] = {17, 47, 75, 105, 135, 162, 198, 228, 258, 288, 318, 344};
    const auto table = read_table("vectors/duffie_table_1_10_1_h0.csv");
    for (std::size_t i = 0; i < table.rows.size(); ++i) {
        const double latitude_deg = table.number(i, "latitude_deg_north_positive");
        if (std::abs(latitude_deg) > 60) continue;
        for (std::size_t month = 0; month < 12; ++month) {
            const int n = mean_days[month];
            const double declination_rad =
                rad_from_deg(23.45 * std::sin(2 * std::numbers::pi * (284 + n) / 365));
            const double e0 = 1367 * (1 + 0.033 * std::cos(2 * std::numbers::pi * n / 365));
            const double ours =
                daily_extraterrestrial_j_m2(e0, rad_from_deg(latitude_deg), declination_rad) / 1e6;
            CAPTURE(latitude_deg, month, ours);
            CHECK(ours ==
                  Approx(table.number(i, table.columns[month + 1])).margin(0.45).epsilon(0));
        }
    }
}
