#include "sunbudget/model/measured_sky.hpp"

#include <catch2/catch.hpp>
#include <cmath>
#include <functional>

#include "sunbudget/base/error.hpp"
#include "sunbudget/base/units.hpp"
#include "sunbudget/model/light.hpp"
#include "sunbudget/physics/air_mass.hpp"
#include "sunbudget/physics/sun.hpp"
#include "sunbudget/physics/sun_place.hpp"

namespace sunbudget {

namespace {

using Catch::Matchers::Contains;

const Station berlin{rad_from_deg(52.5), rad_from_deg(13.4), 50};
constexpr double hour_s = 3600;

TimePlan plan_of(const CivilDate& from, const CivilDate& to, Totals totals = Totals::whole) {
    TimePlan times;
    times.zone = Zone::parse("solar-mean");
    times.periods = periods_of(from, to, totals, {}, times.zone);
    return times;
}

Sky under(const MeasuredSky& measured) {
    Sky sky;
    sky.measured = measured.shares;
    return sky;
}

/// A record that has, interval by interval, what `share` leaves of the clear sky over the station.
WeatherRecord record_of(const TimePlan& times, double interval_s,
                        const std::function<LightShare(long)>& share) {
    WeatherRecord record;
    record.interval_s = interval_s;
    for (const auto quantity : {Weather::global, Weather::beam, Weather::diffuse})
        record.columns[static_cast<std::size_t>(quantity)] = {};
    const auto first =
        times.zone.day_start(times.periods.front().days.front().date, berlin.longitude_rad);
    const auto last =
        times.zone.day_start(next_day(times.periods.back().days.back().date), berlin.longitude_rad);
    const SunTrack track(first - hour_s, last + hour_s);
    long number = 0;
    for (double begin = first; begin < last - 1; begin += interval_s, ++number) {
        constexpr double step_s = 60;
        double beam = 0, direct = 0, diffuse = 0;
        for (double at = step_s / 2; at < interval_s; at += step_s) {
            const auto sun = track.at(begin + at);
            const double sine = sin_elevation(sun, berlin.latitude_rad, berlin.longitude_rad);
            if (sine <= 0) continue;
            const auto clear = sky_moment(
                Sky(), {begin + at, 6, extraterrestrial_normal(sun.distance_au), std::asin(sine),
                        berlin.height_m, pressure_ratio(berlin.height_m)});
            beam += clear.beam_normal_w_m2 * step_s / interval_s;
            direct += clear.beam_normal_w_m2 * sine * step_s / interval_s;
            diffuse += clear.diffuse_w_m2 * step_s / interval_s;
        }
        const auto s = share(number);
        record.intervals.push_back({begin, begin + interval_s});
        record.columns[static_cast<std::size_t>(Weather::beam)].push_back(s.beam * beam);
        record.columns[static_cast<std::size_t>(Weather::diffuse)].push_back(s.diffuse * diffuse);
        record.columns[static_cast<std::size_t>(Weather::global)].push_back(s.beam * direct +
                                                                            s.diffuse * diffuse);
    }
    return record;
}

double mean_of(std::span<const double> values) {
    double sum = 0;
    for (const double value : values) sum += value;
    return sum / static_cast<double>(values.size());
}

void empty(WeatherRecord& record, std::size_t first, std::size_t count) {
    for (auto& column : record.columns)
        for (std::size_t i = first; i < first + count && i < column.size(); ++i) column[i] = NAN;
}

OpenLight over_station(const TimePlan& times, const Sky& sky, std::size_t band = 0) {
    return PointLight(times, sky)
        .at(band, berlin.latitude_rad, berlin.longitude_rad, berlin.height_m);
}

/// Cloud that comes and goes.
LightShare changing(long number) {
    return {0.2 + 0.15 * static_cast<double>(number % 5), 1 + 0.3 * static_cast<double>(number % 3),
            0};
}

}  // namespace

TEST_CASE("light shares: means over borders and gaps, the nearer end beyond", "[model][measured]") {
    const LightShares shares(
        {{{0, 100}, {1, 0, 0}}, {{100, 200}, {0, 1, 0}}, {{300, 400}, {0.5, 0, 1}}});
    CHECK(shares.over(50, 50) == LightShare{1, 0, 0});
    CHECK(shares.over(-1000, -900) == LightShare{1, 0, 0});
    CHECK(shares.over(900, 1000) == LightShare{0.5, 0, 1});
    CHECK(shares.over(50, 150).beam == Approx(0.5));
    CHECK(shares.over(50, 150).diffuse == Approx(0.5));
    CHECK(shares.over(75, 350).beam ==
          Approx((25 * 1 + 150 * 0 + 100 * 0.5) / 275));  // the gap is shared at 250
    CHECK(shares.over(-100, 500).scattered == Approx(250.0 / 600));
    const std::vector<LightShares::Piece> one{{{0, 1}, {0.5, 0.5, 0}}};
    CHECK(LightShares(one).over(-5, 7) == LightShare{0.5, 0.5, 0});
}

TEST_CASE("measured sky: at the station the day's sums are the record's", "[model][measured]") {
    const double interval_s = GENERATE(3600.0, 600.0);
    const double step_s = GENERATE(600.0, 1800.0);
    auto times = plan_of({2025, 6, 20}, {2025, 6, 21});
    times.step_s = step_s;
    const auto record = record_of(times, interval_s, changing);
    const auto measured = measured_sky(record, berlin, Sky(), times, false);
    const auto light = over_station(times, under(measured));
    CAPTURE(interval_s, step_s);
    // Both sides sum the clear sky by the midpoint rule; cloud changes between the steps' middles.
    CHECK(light.diffuse_w_m2 == Approx(mean_of(record.values(Weather::diffuse))).epsilon(2e-3));
    CHECK(light.direct_w_m2() + light.diffuse_w_m2 ==
          Approx(mean_of(record.values(Weather::global))).epsilon(2e-3));
    CHECK(measured.report.days == 2);
    CHECK(measured.report.gap_h == 0);
    CHECK(measured.report.closure.intervals > 10);
    CHECK(std::abs(measured.report.closure.difference_mean_w_m2) <
          0.02 * measured.report.closure.global_mean_w_m2);
    CHECK_FALSE(measured.thin[0]);
}

TEST_CASE("measured sky: the clear sky's own record changes nothing, anywhere",
          "[model][measured]") {
    const auto times = plan_of({2025, 3, 20}, {2025, 3, 20});
    const auto measured = measured_sky(record_of(times, hour_s, [](long) { return LightShare{}; }),
                                       berlin, Sky(), times, false);
    for (const double height_m : {50.0, 2000.0}) {
        const auto real = PointLight(times, under(measured))
                              .at(0, berlin.latitude_rad, berlin.longitude_rad, height_m);
        const auto clear =
            PointLight(times, Sky()).at(0, berlin.latitude_rad, berlin.longitude_rad, height_m);
        CHECK(real.direct_w_m2() ==
              Approx(clear.direct_w_m2()).epsilon(3e-3));  // 10 minutes here, 5 there
        CHECK(real.diffuse_w_m2 == Approx(clear.diffuse_w_m2).epsilon(3e-3));
    }
}

TEST_CASE("measured sky: each part follows from the other two", "[model][measured]") {
    const auto times = plan_of({2025, 6, 20}, {2025, 6, 20});
    const auto whole = record_of(times, hour_s, changing);
    const auto all = over_station(times, under(measured_sky(whole, berlin, Sky(), times, false)));
    for (const auto left_out : {Weather::global, Weather::beam, Weather::diffuse}) {
        auto record = whole;
        record.columns[static_cast<std::size_t>(left_out)].clear();
        const auto light =
            over_station(times, under(measured_sky(record, berlin, Sky(), times, false)));
        CAPTURE(static_cast<int>(left_out));
        CHECK(light.direct_w_m2() == Approx(all.direct_w_m2()).epsilon(0.01));
        CHECK(light.diffuse_w_m2 == Approx(all.diffuse_w_m2).epsilon(0.01));
    }
}

TEST_CASE("measured sky: global alone keeps its sum, by the hour, shorter, and by the day",
          "[model][measured]") {
    const double interval_s = GENERATE(600.0, 3600.0, 86400.0);
    const auto times = plan_of({2025, 6, 20}, {2025, 6, 21});
    auto record = record_of(times, interval_s, [](long n) {
        return LightShare{n % 2 == 0 ? 0.4 : 0.5, 1.3, 0};
    });
    record.columns[static_cast<std::size_t>(Weather::beam)].clear();
    record.columns[static_cast<std::size_t>(Weather::diffuse)].clear();
    const auto measured = measured_sky(record, berlin, Sky(), times, false);
    const auto light = over_station(times, under(measured));
    CAPTURE(interval_s);
    CHECK(light.direct_w_m2() + light.diffuse_w_m2 ==
          Approx(mean_of(record.values(Weather::global))).epsilon(2e-3));
    CHECK(measured.report.split_intervals > 1);
    CHECK(light.diffuse_w_m2 >
          0.3 * light.direct_w_m2());  // half the beam and more sky than the clear one's
}

TEST_CASE(
    "measured sky: small gaps take their day's mean and are told; thin days and months have no "
    "data",
    "[model][measured]") {
    const auto times = plan_of({2025, 6, 1}, {2025, 6, 10}, Totals::whole);
    const auto whole = record_of(times, hour_s, [](long) { return LightShare{0.5, 1.5, 0}; });
    const auto full = over_station(times, under(measured_sky(whole, berlin, Sky(), times, false)));

    auto record = whole;
    empty(record, 8, 1);  // an hour of the morning
    const auto gap = measured_sky(record, berlin, Sky(), times, false);
    CHECK(gap.report.days_with_gaps == 1);
    CHECK(gap.report.days_missing == 0);
    CHECK(gap.report.gap_h == Approx(1).margin(1e-3));
    CHECK(gap.report.first_gaps.size() == 1);
    CHECK(over_station(times, under(gap)).direct_w_m2() ==
          Approx(full.direct_w_m2()).epsilon(1e-3));
    CHECK_THROWS_WITH(measured_sky(record, berlin, Sky(), times, true),
                      Contains("no light was measured from 2025-06-01T"));

    empty(record, 9, 4);  // now a third of that day's light is gone: it is missing
    empty(record, 24, 24);
    const auto two_days = measured_sky(record, berlin, Sky(), times, false);
    CHECK(two_days.report.days_missing == 2);
    CHECK_FALSE(two_days.thin[0]);  // eight of ten are there
    CHECK(over_station(times, under(two_days)).direct_w_m2() ==
          Approx(full.direct_w_m2()).epsilon(1e-3));

    empty(record, 48, 24);
    CHECK_THROWS_WITH(measured_sky(record, berlin, Sky(), times, false),
                      Contains("too few of the run's days: 3 of 10"));
    const auto by_day = measured_sky(record, berlin, Sky(),
                                     plan_of({2025, 6, 1}, {2025, 6, 10}, Totals::day), false);
    CHECK(by_day.thin ==
          std::vector<bool>{true, true, true, false, false, false, false, false, false, false});
}

TEST_CASE("measured sky: a month that the record does not reach is missing", "[model][measured]") {
    const auto times = plan_of({2025, 5, 30}, {2025, 6, 2}, Totals::month);
    const auto record = record_of(plan_of({2025, 6, 1}, {2025, 6, 2}), hour_s, changing);
    CHECK(measured_sky(record, berlin, Sky(), times, false).thin == std::vector<bool>{true, false});
    // As one period it is missing too: June's days cannot stand for May's.
    CHECK_THROWS_AS(
        measured_sky(record, berlin, Sky(), plan_of({2025, 5, 30}, {2025, 6, 2}), false), Error);
}

TEST_CASE("measured sky: cloud by the hour, and in long rows as a mean", "[model][measured]") {
    const auto times = plan_of({2025, 6, 20}, {2025, 6, 20});
    auto record = record_of(times, hour_s, changing);
    for (const auto quantity : {Weather::global, Weather::beam, Weather::diffuse})
        record.columns[static_cast<std::size_t>(quantity)].clear();
    auto& cloud = record.columns[static_cast<std::size_t>(Weather::cloud)];
    const auto clear = over_station(times, Sky());
    const double clear_global = clear.direct_w_m2() + clear.diffuse_w_m2;
    const auto global = [&](const WeatherRecord& r) {
        const auto light = over_station(times, under(measured_sky(r, berlin, Sky(), times, false)));
        return light.direct_w_m2() + light.diffuse_w_m2;
    };
    cloud.assign(24, 0.0);
    CHECK(global(record) == Approx(clear_global));
    cloud.assign(24, 0.5);
    CHECK(global(record) == Approx(clear_global * kasten_czeplak1980_index(0.5)));
    cloud.assign(24, 1.0);
    CHECK(global(record) == Approx(clear_global * 0.25));
    record.intervals = {{record.intervals.front().begin, record.intervals.back().end}};
    cloud.assign(1, 0.5);
    CHECK(global(record) == Approx(clear_global * (1 - 0.75 * 0.5)));
    CHECK(has_light(record));
    cloud.clear();
    CHECK_FALSE(has_light(record));
}

TEST_CASE("measured sky: an instant takes its interval's value and needs one",
          "[model][measured]") {
    const auto day = plan_of({2025, 6, 20}, {2025, 6, 20});
    auto record = record_of(day, hour_s, [](long n) {
        return LightShare{n == 12 ? 0.25 : 0.75, 1, 0};
    });
    TimePlan noon;
    noon.zone = day.zone;
    noon.instant = day.zone.to_utc({2025, 6, 20}, 12.5 * hour_s, berlin.longitude_rad);
    const auto light = over_station(noon, under(measured_sky(record, berlin, Sky(), noon, false)));
    CHECK(light.direct_w_m2() == Approx(0.25 * over_station(noon, Sky()).direct_w_m2())
                                     .epsilon(2e-3));  // 1 minute there, 5 here
    empty(record, 12, 1);
    CHECK_THROWS_AS(measured_sky(record, berlin, Sky(), noon, false), Error);
}

TEST_CASE("mean cloud: the mixture's sum, and its parts add up on level ground",
          "[model][measured]") {
    const auto times = plan_of({2025, 6, 1}, {2025, 6, 1});
    const auto clear = over_station(times, Sky());
    for (const auto model :
         {DiffuseModel::liu_jordan1963, DiffuseModel::hay_davies1980, DiffuseModel::perez1990}) {
        Sky sky;
        sky.diffuse = model;
        sky.mean_cloud.emplace().fill(cloud_over_a_period(0.6));
        const auto light = over_station(times, sky);
        CHECK(light.direct_w_m2() == Approx(0.4 * clear.direct_w_m2()));
        CHECK(light.direct_w_m2() + light.diffuse_w_m2 ==
              Approx((1 - 0.75 * 0.6) * (clear.direct_w_m2() + clear.diffuse_w_m2)));
        const auto moment = sky_moment(sky, {0, 6, 1361, rad_from_deg(40), 0, 1});
        CHECK(tilted_diffuse_w_m2(moment.parts, std::sin(rad_from_deg(40)), 0) ==
              Approx(moment.diffuse_w_m2));
    }
}

}  // namespace sunbudget
