#include "sunbudget/physics/integrate.hpp"

#include <catch2/catch.hpp>
#include <cmath>
#include <numbers>

#include "sunbudget/physics/air_mass.hpp"

using namespace sunbudget;

namespace {

UtcSeconds utc(const std::string& text) {
    return resolve(parse_instant(text), Zone(), 0);
}

/// A sun whose declination and distance stand still: the closed form's own.
struct FrozenSun {
    double declination_rad;
    double distance_au;
    [[nodiscard]] SunState at(UtcSeconds t) const {
        const double turn = t / 86400 - std::floor(t / 86400);
        return {declination_rad,
                std::fmod(2 * std::numbers::pi * (turn + 0.5), 2 * std::numbers::pi), distance_au};
    }
};

/// So far away that it has no parallax, which the closed form leaves out too.
constexpr double far_away_au = 1e6;

ClearSky no_air(UtcSeconds, double e0_w_m2, double) {
    return {e0_w_m2, 0};
}
ClearSky clean_air(UtcSeconds, double e0_w_m2, double elevation_rad) {
    return esra2000(e0_w_m2, elevation_rad, 3, 1);
}

double frozen_ratio(double latitude_deg, double declination_deg, double step_s) {
    const double lat = rad_from_deg(latitude_deg), dec = rad_from_deg(declination_deg);
    const auto totals =
        light_totals(FrozenSun{dec, far_away_au}, 0, 86400, step_s, lat, 0, no_air, 1361);
    return totals.direct_j_m2 /
           daily_extraterrestrial_j_m2(extraterrestrial_normal(far_away_au, 1361), lat, dec);
}

}  // namespace

TEST_CASE("light_totals: within 0.05 % of the closed form under a frozen sun, poles included",
          "[physics][property]") {
    const double latitude_deg = GENERATE(range(-90.0, 90.1, 7.5));
    const double declination_deg = GENERATE(-23.44, -10.0, 0.3, 15.0, 23.44);
    const double ws =
        sunset_hour_angle_rad(rad_from_deg(latitude_deg), rad_from_deg(declination_deg));
    CAPTURE(latitude_deg, declination_deg, ws);
    if (ws == 0) {
        const auto night = light_totals(FrozenSun{rad_from_deg(declination_deg), far_away_au}, 0,
                                        86400, 600, rad_from_deg(latitude_deg), 0, no_air);
        CHECK(night.sunlit_s == 0);
        CHECK(night.direct_j_m2 == 0);
    } else {
        CHECK(frozen_ratio(latitude_deg, declination_deg, 600) == Approx(1).epsilon(5e-4));
    }
}

TEST_CASE("light_totals: the shortest polar days are summed as well as long ones",
          "[physics][edge]") {
    // From 3 minutes of sun to 3 hours: the whole day falls into one step, or a few.
    const double short_of_night_deg = GENERATE(0.001, 0.01, 0.1, 1.0, 5.0);
    const double step_s = GENERATE(600.0, 3600.0, 10800.0);
    const double latitude_deg = 90 - 23.44 - short_of_night_deg;
    CAPTURE(latitude_deg, step_s);
    CHECK(frozen_ratio(latitude_deg, -23.44, step_s) == Approx(1).epsilon(5e-4));
    CHECK(frozen_ratio(-latitude_deg, 23.44, step_s) == Approx(1).epsilon(5e-4));
}

TEST_CASE(
    "light_totals: within 0.05 % of the closed form under the real sun, 0.06 MJ beyond 60 deg",
    "[physics][property]") {
    const double latitude_deg = GENERATE(range(-90.0, 90.1, 10.0));
    const auto* date = GENERATE("2024-01-15", "2024-03-20", "2024-05-05", "2024-06-20",
                                "2024-08-30", "2024-11-10");
    const double lat = rad_from_deg(latitude_deg);
    const double begin = utc(std::string(date) + "T00:00Z");
    const SunTrack track(begin, begin + 86400);
    const double ours = light_totals(track, begin, begin + 86400, 600, lat, 0, no_air).direct_j_m2;
    const auto noon = track.at(begin + 43200);
    const double closed = daily_extraterrestrial_j_m2(extraterrestrial_normal(noon.distance_au),
                                                      lat, noon.declination_rad);
    CAPTURE(latitude_deg, date, ours, closed);
    if (std::abs(latitude_deg) <= 60)
        CHECK(ours == Approx(closed).epsilon(5e-4));
    else
        CHECK(ours == Approx(closed).margin(0.06e6).epsilon(0));
}

TEST_CASE("light_totals: a clear day's total is smooth in the step", "[physics][property]") {
    const double latitude_deg = GENERATE(0.0, 45.0, 64.0);
    const double begin = utc("2025-02-10T00:00Z");
    const SunTrack track(begin, begin + 86400);
    const auto total_at = [&](double step_s) {
        const auto t = light_totals(track, begin, begin + 86400, step_s, rad_from_deg(latitude_deg),
                                    0.3, clean_air);
        return t.direct_j_m2 + t.diffuse_j_m2;
    };
    const double fine = total_at(20);
    double before = fine;
    for (double step_s = 60; step_s <= 900; step_s += 7) {
        const double total = total_at(step_s);
        CAPTURE(latitude_deg, step_s);
        CHECK(total == Approx(fine).epsilon(1e-3));
        // A change in the number of cuts shows as 2e-4 at most (0.5 / 32^2 with air that bends the
        // curve less); without the split at sunrise and sunset neighbours jump by 5e-4 (0
        // N), 1.3e-3 (45 N) and 4.5e-3 (64 N), computed here.
        CHECK(total == Approx(before).epsilon(2e-4));
        before = total;
    }
}

TEST_CASE("light_totals: parts of a day add up to the day", "[physics][property]") {
    const double begin = utc("2025-06-01T00:00Z");
    const SunTrack track(begin, begin + 86400);
    const double cut = begin + 600 * GENERATE(10, 37, 77, 118);
    const double lat = rad_from_deg(50), lon = 0.2;
    const auto whole = light_totals(track, begin, begin + 86400, 600, lat, lon, clean_air);
    const auto first = light_totals(track, begin, cut, 600, lat, lon, clean_air);
    const auto second = light_totals(track, cut, begin + 86400, 600, lat, lon, clean_air);
    CHECK(first.sunlit_s + second.sunlit_s == Approx(whole.sunlit_s).margin(1e-3));
    CHECK(first.direct_j_m2 + second.direct_j_m2 == Approx(whole.direct_j_m2).epsilon(5e-4));
    CHECK(first.diffuse_j_m2 + second.diffuse_j_m2 == Approx(whole.diffuse_j_m2).epsilon(5e-4));
}

TEST_CASE("for_each_sunlit_step: the pieces are the sunlit time, in order and without gaps",
          "[physics][property]") {
    const double latitude_deg = GENERATE(-89.0, -66.4, 10.0, 66.6, 80.0);
    const double step_s = GENERATE(60.0, 600.0, 3600.0, 86400.0);
    const double begin = utc("2025-03-05T07:11:00Z"), end = begin + 40 * 86400.0;
    const SunTrack track(begin, end);
    const double lat = rad_from_deg(latitude_deg);
    double expected_s = 0, sum_s = 0, last = begin;
    for (const auto& span : sunlit_spans(track, begin, end, lat, 1.0))
        expected_s += span.end - span.begin;
    bool ordered = true;
    for_each_sunlit_step(track, begin, end, step_s, lat, 1.0, [&](const SunSample& sample) {
        ordered = ordered && sample.utc - sample.duration_s / 2 > last - 1e-3 &&
                  sample.sin_elevation > 0 && sample.duration_s <= step_s * (1 + 1e-9);
        last = sample.utc + sample.duration_s / 2;
        sum_s += sample.duration_s;
    });
    CAPTURE(latitude_deg, step_s);
    CHECK(ordered);
    CHECK(sum_s ==
          Approx(expected_s).margin(0.01));  // pieces of under 0.1 ms at sunrise may be dark
}
