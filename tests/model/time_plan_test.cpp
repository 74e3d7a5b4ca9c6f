#include "sunbudget/model/time_plan.hpp"

#include <catch2/catch.hpp>
#include <numbers>

#include "sunbudget/base/units.hpp"
#include "sunbudget/physics/sun.hpp"

using namespace sunbudget;

namespace {
std::vector<std::string> names(const std::vector<Period>& periods) {
    std::vector<std::string> list;
    for (const auto& period : periods) list.push_back(period.name);
    return list;
}
using Names = std::vector<std::string>;
}  // namespace

TEST_CASE("periods_of: whole months, seasons and years go by name, parts by their days",
          "[model]") {
    const Zone utc;
    CHECK(names(periods_of({2025, 1, 1}, {2025, 12, 31}, Totals::month, {}, utc)).size() == 12);
    CHECK(names(periods_of({2025, 6, 10}, {2025, 8, 31}, Totals::month, {}, utc)) ==
          Names{"2025-06-10 to 2025-06-30", "2025-07", "2025-08"});
    CHECK(names(periods_of({2024, 12, 1}, {2025, 9, 1}, Totals::season, {}, utc)) ==
          Names{"2024-12 to 2025-02", "2025-03 to 2025-05", "2025-06 to 2025-08", "2025-09-01"});
    CHECK(names(periods_of({2025, 1, 1}, {2025, 12, 31}, Totals::season, {}, utc)) ==
          Names{"2025-01-01 to 2025-02-28", "2025-03 to 2025-05", "2025-06 to 2025-08",
                "2025-09 to 2025-11", "2025-12-01 to 2025-12-31"});
    CHECK(names(periods_of({2024, 2, 28}, {2024, 3, 1}, Totals::day, {}, utc)) ==
          Names{"2024-02-28", "2024-02-29", "2024-03-01"});
    CHECK(names(periods_of({2024, 1, 1}, {2025, 12, 31}, Totals::year, {}, utc)) ==
          Names{"2024", "2025"});
    CHECK(names(periods_of({2025, 7, 1}, {2025, 7, 1}, Totals::whole, {}, utc)) ==
          Names{"2025-07-01"});
}

TEST_CASE("periods_of: durations count the window's hours, and clock changes", "[model]") {
    const Zone utc;
    CHECK(periods_of({2024, 2, 1}, {2024, 2, 29}, Totals::month, {}, utc)[0].duration_s ==
          29 * 86400.0);
    CHECK(periods_of({2025, 7, 1}, {2025, 7, 10}, Totals::whole, {12, 17}, utc)[0].duration_s ==
          10 * 5 * 3600.0);
    const auto berlin = Zone::parse("Europe/Berlin");
    // Clocks went forward on 2025-03-30 and back on 2025-10-26 (EU directive 2000/84/EC).
    CHECK(periods_of({2025, 3, 30}, {2025, 3, 30}, Totals::day, {}, berlin)[0].duration_s ==
          23 * 3600.0);
    CHECK(periods_of({2025, 10, 26}, {2025, 10, 26}, Totals::day, {}, berlin)[0].duration_s ==
          25 * 3600.0);
    CHECK(periods_of({2025, 10, 26}, {2025, 10, 26}, Totals::day, {12, 17}, berlin)[0].duration_s ==
          5 * 3600.0);
}

TEST_CASE("span_of: solar days follow the longitude, civil days do not", "[model]") {
    const DayPart day{{2025, 6, 1}, 0, 86400};
    const double east = std::numbers::pi / 2;
    CHECK(span_of(day, Zone::parse("solar-mean"), east).begin ==
          span_of(day, Zone(), east).begin - 6 * 3600);
    CHECK(span_of(day, Zone::parse("Europe/Berlin"), east).begin ==
          span_of(day, Zone(), 0).begin - 2 * 3600);
    // Early November the sun is 16.4 minutes ahead of the mean (Meeus, Astronomical Algorithms, ch. 28).
    const DayPart november{{2025, 11, 3}, 0, 86400};
    const double ahead = span_of(november, Zone::parse("solar-mean"), 0).begin -
                         span_of(november, Zone::parse("solar-true"), 0).begin;
    CHECK(ahead == Approx(16.4 * 60).margin(6));
}

TEST_CASE("span_of: a window that a clock change swallows keeps its distance from midnight",
          "[model][edge]") {
    const auto berlin = Zone::parse("Europe/Berlin");
    const auto span = span_of({{2025, 3, 30}, 2.5 * 3600, 12 * 3600}, berlin, 0);
    CHECK(span.begin == berlin.day_start({2025, 3, 30}) + 2.5 * 3600);
    CHECK(span.end == berlin.to_utc({2025, 3, 30}, 12 * 3600));
}

TEST_CASE("with_mid_month_days: takes Klein's days, whose sun stands as he gives it",
          "[model][vector]") {
    // Klein 1977, Solar Energy 19, 325-329: day of the year and declination in degrees, one decimal.
    constexpr std::pair<int, double> klein[] = {
        {17, -20.9}, {47, -13.0}, {75, -2.4}, {105, 9.4},  {135, 18.8},  {162, 23.1},
        {198, 21.2}, {228, 13.5}, {258, 2.2}, {288, -9.6}, {318, -18.9}, {344, -23.0}};
    const auto year = with_mid_month_days(
        periods_of({2025, 1, 1}, {2025, 12, 31}, Totals::whole, {}, Zone::parse("UTC")).front());
    REQUIRE(year.days.size() == 12);
    const auto before = days_from_civil({2024, 12, 31});
    double all = 0;
    for (std::size_t m = 0; m < 12; ++m) {
        CAPTURE(m);
        const auto day = days_from_civil(year.days[m].date) - before;
        CHECK(day == klein[m].first);
        // His declination is Cooper's, up to 1.1 degrees from the true one (in September).
        const auto sun =
            sun_state(static_cast<double>(days_from_civil(year.days[m].date)) * seconds_per_day +
                      seconds_per_day / 2);
        CHECK(deg_from_rad(sun.declination_rad) == Approx(klein[m].second).margin(1.1).epsilon(0));
        all += year.days[m].weight;
    }
    CHECK(all == 365);
}

TEST_CASE("periods_of: hours of the clock, cut at the daily window", "[model][property]") {
    const auto utc = Zone::parse("UTC");
    const auto day = periods_of({2025, 6, 20}, {2025, 6, 21}, Totals::hour, {}, utc);
    REQUIRE(day.size() == 48);
    CHECK(day[0].name == "2025-06-20T00:00");
    CHECK(day[47].name == "2025-06-21T23:00");
    for (const auto& hour : day) CHECK(hour.duration_s == 3600);
    const auto part = periods_of({2025, 6, 20}, {2025, 6, 20}, Totals::hour, {6.5, 8}, utc);
    REQUIRE(part.size() == 2);
    CHECK(part[0].name == "2025-06-20T06:30");
    CHECK(part[1].duration_s == 1800);
}
