#include "sunbudget/base/time.hpp"

#include <catch2/catch.hpp>
#include <cstdlib>
#include <ctime>
#include <numbers>

#include "sunbudget/base/error.hpp"
#include "support/vectors.hpp"

using namespace sunbudget;
using Catch::Matchers::Contains;

namespace {
UtcSeconds utc(const char* text) {
    return resolve(parse_instant(text), Zone(), 0);
}
double hours_of(const Zone& zone, const CivilDate& date) {
    return (zone.day_start(next_day(date)) - zone.day_start(date)) / 3600;
}
}  // namespace

TEST_CASE("civil_from_days: inverts days_from_civil on every day of 1000 years",
          "[base][property]") {
    CivilDate date{1600, 1, 1};
    long wrong = 0;
    for (long days = days_from_civil(date); date.year < 2600; ++days) {
        if (days_from_civil(date) != days || civil_from_days(days) != date || !is_valid(date))
            ++wrong;
        const bool month_ends = date.day == days_in_month(date.year, date.month);
        date = !month_ends       ? CivilDate{date.year, date.month, date.day + 1}
               : date.month < 12 ? CivilDate{date.year, date.month + 1, 1}
                                 : CivilDate{date.year + 1, 1, 1};
    }
    CHECK(wrong == 0);
    CHECK(days_from_civil({1970, 1, 1}) == 0);
}

TEST_CASE("parse_instant: agrees with published Julian days", "[base][vector]") {
    const auto table = test::read_table("vectors/julian_day.csv");
    for (std::size_t i = 0; i < table.rows.size(); ++i) {
        CAPTURE(table.cell(i, "time"));
        // 1970-01-01T00:00Z is Julian day 2440587.5.
        CHECK(utc(table.cell(i, "time").c_str()) / 86400 + 2440587.5 ==
              table.number(i, "julian_day"));
    }
}

TEST_CASE("day_of_year: counts the leap day", "[base]") {
    CHECK(day_of_year({2025, 1, 1}) == 1);
    CHECK(day_of_year({2025, 12, 31}) == 365);
    CHECK(day_of_year({2024, 12, 31}) == 366);
    CHECK(day_of_year({2100, 3, 1}) == 60);
}

TEST_CASE("parse_date: takes one form and only days that exist", "[base][edge]") {
    CHECK(parse_date("2024-02-29") == CivilDate{2024, 2, 29});
    CHECK(format_date({987, 6, 5}) == "0987-06-05");
    for (const auto* bad : {"2025-02-29", "2025-13-01", "2025-00-10", "2025-04-31", "2025-4-1",
                            "2025/04/01", "25-04-01", "2025-04-01 ", "", "2025-06-+1"}) {
        CAPTURE(bad);
        CHECK_FALSE(parse_date(bad));
    }
}

TEST_CASE("parse_instant: an offset, Z, seconds and 24:00 are understood", "[base]") {
    CHECK(format_utc(utc("2025-06-21T12:00-07:00")) == "2025-06-21T19:00:00Z");
    CHECK(format_utc(utc("2025-06-21T12:00:30Z")) == "2025-06-21T12:00:30Z");
    CHECK(format_utc(utc("2025-12-31 24:00Z")) == "2026-01-01T00:00:00Z");
    CHECK(utc("1970-01-01T00:00:00.25Z") == 0.25);
    CHECK(utc("1969-12-31T23:59:59Z") == -1);
    CHECK_FALSE(parse_instant("2025-06-21T12:00").offset_s);
    CHECK(parse_instant("2025-06-21T12:00+05:45").offset_s == 20700.0);
    // 2001-09-09T01:46:40Z is POSIX second 1e9, a well-known round number (common practice).
    CHECK(utc("2001-09-09T01:46:40Z") == 1e9);
}

TEST_CASE("parse_instant: impossible and foreign forms are refused", "[base][edge]") {
    for (const auto* bad :
         {"2025-06-21", "2025-02-30T12:00Z", "2025-06-21T24:01Z", "2025-06-21T12:60Z",
          "2025-06-21T23:59:60Z", "2025-06-21T12:00+25:00", "2025-06-21T12:00 UTC",
          "2025-06-21T1200Z", "2025-06-21T12:00:1Z", "2025-06-21T12:00:Z", "2025-06-21T12:00z",
          "2025-06-21T-1:00Z", "2025-06-21T12:00:00,5Z", ""}) {
        CAPTURE(bad);
        CHECK_THROWS_AS(parse_instant(bad), Error);
    }
    CHECK_THROWS_WITH(parse_instant("2025-02-30T12:00Z"), Contains("no such day"));
}

TEST_CASE("format_utc: rounds to the nearest second across midnight", "[base][edge]") {
    CHECK(format_utc(86399.6) == "1970-01-02T00:00:00Z");
    CHECK(format_utc(-0.4) == "1970-01-01T00:00:00Z");
    CHECK(format_utc(-86400) == "1969-12-31T00:00:00Z");
}

TEST_CASE("Zone: knows five kinds and suggests the nearest name", "[base]") {
    CHECK(Zone::parse("utc").name() == "UTC");
    CHECK(Zone::parse("-07:00").kind() == ZoneKind::offset);
    CHECK(Zone::parse("Europe/Berlin").kind() == ZoneKind::iana);
    CHECK(Zone::parse("solar-true").is_solar());
    CHECK_THROWS_WITH(Zone::parse("Europe/Berln"), Contains("did you mean \"Europe/Berlin\"?"));
    CHECK_THROWS_WITH(Zone::parse("solar-maen"), Contains("did you mean \"solar-mean\"?"));
    CHECK_THROWS_WITH(Zone::parse("+25:00"), Contains("no offset"));
    CHECK_THROWS_WITH(Zone::parse("../../etc/passwd"), Contains("no time zone is called"));
}

TEST_CASE("Zone: a fixed offset and an IANA zone give the instant", "[base]") {
    CHECK(Zone::parse("-07:00").to_utc({2025, 6, 21}, 43200) == utc("2025-06-21T19:00Z"));
    const auto denver = Zone::parse("America/Denver");
    CHECK(denver.to_utc({2025, 6, 21}, 43200) == utc("2025-06-21T18:00Z"));
    CHECK(denver.to_utc({2025, 12, 21}, 43200) == utc("2025-12-21T19:00Z"));
    CHECK(denver.to_utc({2025, 12, 21}, 0.5) == utc("2025-12-21T07:00:00.5Z"));
}

TEST_CASE("Zone: days last 23, 24 or 25 hours where clocks change", "[base][edge]") {
    const auto berlin = Zone::parse("Europe/Berlin");
    CHECK(hours_of(berlin, {2025, 3, 30}) == 23);
    CHECK(hours_of(berlin, {2025, 10, 26}) == 25);
    CHECK(hours_of(berlin, {2025, 7, 1}) == 24);
    CHECK(hours_of(Zone::parse("solar-mean"), {2025, 3, 30}) == 24);
}

TEST_CASE("Zone: a day whose midnight is skipped or doubled starts at its first instant",
          "[base][edge]") {
    // Brazil moved its clocks on at midnight until 2018, Cuba moves them back from 01:00 (tz
    // database).
    const auto sao_paulo = Zone::parse("America/Sao_Paulo");
    CHECK(format_utc(sao_paulo.day_start({2018, 11, 4})) == "2018-11-04T03:00:00Z");
    CHECK(hours_of(sao_paulo, {2018, 11, 4}) == 23);
    const auto havana = Zone::parse("America/Havana");
    CHECK(format_utc(havana.day_start({2023, 11, 5})) == "2023-11-05T04:00:00Z");
    CHECK(hours_of(havana, {2023, 11, 5}) == 25);
    // Samoa had no 30 December 2011.
    CHECK(hours_of(Zone::parse("Pacific/Apia"), {2011, 12, 30}) == 0);
}

TEST_CASE("Zone: a skipped or doubled local time is refused with the way to write it",
          "[base][edge]") {
    const auto berlin = Zone::parse("Europe/Berlin");
    CHECK_THROWS_WITH(berlin.to_utc({2025, 3, 30}, 9000),
                      Contains("does not exist") && Contains("2025-03-30T02:30:00+01:00"));
    CHECK_THROWS_WITH(berlin.to_utc({2025, 10, 26}, 9000),
                      Contains("twice") && Contains("2025-10-26T02:30:00+02:00 is the first"));
    CHECK(resolve(parse_instant("2025-10-26T02:30+01:00"), berlin, 0) == utc("2025-10-26T01:30Z"));
}

TEST_CASE("Zone: mean solar time follows the longitude", "[base]") {
    const auto solar = Zone::parse("solar-mean");
    const double quarter = std::numbers::pi / 2;
    CHECK(solar.to_utc({2025, 6, 21}, 43200, quarter) == utc("2025-06-21T06:00Z"));
    CHECK(solar.to_utc({2025, 6, 21}, 43200, -quarter) == utc("2025-06-21T18:00Z"));
}

TEST_CASE("Zone: local undoes to_utc", "[base][property]") {
    const auto* name =
        GENERATE("UTC", "+05:45", "America/St_Johns", "Australia/Lord_Howe", "solar-mean");
    const auto zone = Zone::parse(name);
    const double longitude_rad = 1.1;
    const double t = GENERATE(take(50, random(-2e9, 4e9)));
    CAPTURE(name, t);
    const auto local = zone.local(t, longitude_rad);
    CHECK(local.seconds_of_day >= 0);
    CHECK(local.seconds_of_day < 86400);
    double back = 0;
    try {
        back = zone.to_utc(local.date, local.seconds_of_day, longitude_rad);
    } catch (const Error&) {  // shown twice: the doubled hour itself
        back = t;
    }
    CHECK(std::abs(back - t) < 1e-5);  // doubles near 4e9 are 5e-7 apart
}

TEST_CASE("Zone: the machine's own zone plays no part", "[base][edge]") {
    const auto in_denver = [] {
        return Zone::parse("America/Denver").to_utc({2025, 6, 21}, 43200);
    };
    const auto before = in_denver();
    setenv("TZ", "Asia/Tokyo", 1);
    tzset();
    CHECK(in_denver() == before);
    CHECK(utc("2025-06-21T12:00-07:00") == 1750532400.0);
    unsetenv("TZ");
    tzset();
}
