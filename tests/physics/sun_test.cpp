#include "sunbudget/physics/sun.hpp"

#include <catch2/catch.hpp>
#include <cmath>
#include <numbers>
#include <random>

#include "sunbudget/physics/sun_place.hpp"
#include "support/vectors.hpp"

using namespace sunbudget;

namespace {

double angle_between(double a_rad, double b_rad) {
    return std::abs(std::remainder(a_rad - b_rad, 2 * std::numbers::pi));
}

UtcSeconds utc(const std::string& text) {
    return resolve(parse_instant(text), Zone(), 0);
}

struct Worst {
    double declination_rad = 0, hour_angle_rad = 0, distance_au = 0;
};

Worst track_against_state(UtcSeconds begin, UtcSeconds end, int count) {
    const SunTrack track(begin, end);
    std::mt19937_64 random(7);
    std::uniform_real_distribution<double> instants(begin, end);
    Worst worst;
    for (int i = 0; i < count; ++i) {
        const double t = instants(random);
        const auto a = track.at(t), b = sun_state(t);
        worst.declination_rad =
            std::max(worst.declination_rad, std::abs(a.declination_rad - b.declination_rad));
        worst.hour_angle_rad =
            std::max(worst.hour_angle_rad,
                     angle_between(a.greenwich_hour_angle_rad, b.greenwich_hour_angle_rad));
        worst.distance_au = std::max(worst.distance_au, std::abs(a.distance_au - b.distance_au));
    }
    return worst;
}

}  // namespace

TEST_CASE("SunTrack: stays within its stated error of sun_state", "[physics][property]") {
    const auto years =
        track_against_state(utc("2017-01-03T00:00Z"), utc("2027-01-01T00:00Z"), 3000);
    CAPTURE(years.declination_rad, years.hour_angle_rad, years.distance_au);
    CHECK(years.declination_rad < 2e-9);
    CHECK(years.hour_angle_rad < 2e-9);
    CHECK(years.distance_au < 1e-9);
}

TEST_CASE("SunTrack: a leap second costs no more than the sun's step there", "[physics][edge]") {
    const auto days = track_against_state(utc("2016-12-30T00:00Z"), utc("2017-01-02T00:00Z"), 500);
    CHECK(days.declination_rad < 3e-7);
    CHECK(days.hour_angle_rad < 3e-7);
}

TEST_CASE("SunTrack: an instant has one value whatever the span", "[physics][property]") {
    const double t = utc("2025-06-21T12:34:56Z");
    const SunTrack narrow(t, t), wide(t - 40 * 86400.0, t + 3e7);
    CHECK(narrow.at(t).declination_rad == wide.at(t).declination_rad);
    CHECK(narrow.at(t).greenwich_hour_angle_rad == wide.at(t).greenwich_hour_angle_rad);
    CHECK(narrow.at(t - 3600).distance_au == wide.at(t - 3600).distance_au);
}

TEST_CASE("sun_state: years before UTC and far ahead are answered", "[physics][edge]") {
    const auto* text = GENERATE("1905-03-01T00:00Z", "1958-07-01T00:00Z", "2099-12-01T00:00Z");
    const auto sun = sun_state(utc(text));
    CHECK(std::abs(sun.declination_rad) < 0.4092);  // the tilt of the axis, 23.44 deg
    CHECK(sun.distance_au > 0.983);
    CHECK(sun.distance_au < 1.017);
}
