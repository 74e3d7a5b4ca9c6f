// The sun's place and its hours against ephemerides.
#include <erfa.h>
#include <catch2/catch.hpp>
#include <cmath>
#include <functional>
#include <numbers>

#include "sunbudget/physics/sun_day.hpp"
#include "sunbudget/physics/sun_place.hpp"
#include "support/vectors.hpp"

using namespace sunbudget;
using namespace sunbudget::test;

namespace {

UtcSeconds utc(const std::string& text) {
    return resolve(parse_instant(text), Zone(), 0);
}

double right_ascension_rad(const SunState& sun, UtcSeconds t) {
    const double days = t / 86400;
    const double sidereal_rad = eraGst06a(2440587.5, days, 2440587.5, days + 69.184 / 86400);
    return eraAnp(sidereal_rad - sun.greenwich_hour_angle_rad);
}

/// Apparent ecliptic longitude of date.
double longitude_deg(UtcSeconds t) {
    const auto sun = sun_state(t);
    const double a = right_ascension_rad(sun, t);
    double dpsi = 0, deps = 0;
    eraNut06a(2440587.5, t / 86400, &dpsi, &deps);
    const double e = eraObl06(2440587.5, t / 86400) + deps;
    return deg_from_rad(std::atan2(
        std::sin(a) * std::cos(e) + std::tan(sun.declination_rad) * std::sin(e), std::cos(a)));
}

/// Bisection of a function that changes sign once within half a day of t.
UtcSeconds zero_near(UtcSeconds t, const std::function<double(UtcSeconds)>& f) {
    UtcSeconds a = t - 43200, b = t + 43200;
    const bool rising = f(b) > 0;
    REQUIRE((f(a) > 0) != rising);
    while (b - a > 1) ((f((a + b) / 2) > 0) == rising ? b : a) = (a + b) / 2;
    return a;
}

double degrees_apart(double a, double b) {
    return std::abs(std::remainder(a - b, 360.0));
}

}  // namespace

TEST_CASE("sun_state: agrees with an ephemeris of 2024", "[physics][vector]") {
    const auto table = read_table("vectors/sun_ephemeris_2024.csv");
    for (std::size_t i = 0; i < table.rows.size(); ++i) {
        const double t = utc(table.cell(i, "time_ut1") + "Z");
        CAPTURE(table.cell(i, "time_ut1"));
        const auto sun = sun_state(t);
        CHECK(deg_from_rad(sun.declination_rad) ==
              Approx(table.number(i, "declination_deg")).margin(1e-4).epsilon(0));
        CHECK(sun.distance_au == Approx(table.number(i, "distance_au")).margin(2e-6).epsilon(0));
        CHECK(degrees_apart(deg_from_rad(right_ascension_rad(sun, t)),
                            table.number(i, "right_ascension_deg")) < 2e-4);
        CHECK(equation_of_time_s(sun, t) / 60 ==
              Approx(table.number(i, "equation_of_time_min")).margin(0.005).epsilon(0));
    }
}

TEST_CASE("sun_state: equinoxes, solstices and the ends of the orbit fall in their minute",
          "[physics][vector]") {
    const auto table = read_table("vectors/sun_seasons_2024.csv");
    for (std::size_t i = 0; i < table.rows.size(); ++i) {
        const auto& event = table.cell(i, "event");
        CAPTURE(event);
        const double t = utc(table.cell(i, "time"));
        const double season_deg = event.starts_with("March")  ? 0
                                  : event.starts_with("June") ? 90
                                  : event.starts_with("Sept") ? 180
                                                              : 270;
        const auto past_season = [&](UtcSeconds x) {
            return std::remainder(longitude_deg(x) - season_deg, 360.0);
        };
        const auto approach = [&](UtcSeconds x) {
            return sun_state(x + 3600).distance_au - sun_state(x - 3600).distance_au;
        };
        const bool of_orbit = event.ends_with("helion 2024");
        const double found = of_orbit ? zero_near(t, approach) : zero_near(t, past_season);
        CHECK(std::abs(found - t) < 60);
    }
}

TEST_CASE("horizontal: agrees with ten places of 2024", "[physics][vector]") {
    const auto table = read_table("vectors/sun_topocentric_2024.csv");
    for (std::size_t i = 0; i < table.rows.size(); ++i) {
        CAPTURE(table.cell(i, "place"));
        const double lat = rad_from_deg(table.number(i, "latitude_deg"));
        const double lon = rad_from_deg(table.number(i, "longitude_deg"));
        const auto sun = sun_state(utc(table.cell(i, "time_ut1") + "Z"));
        const auto view = horizontal(sun, lat, lon, table.number(i, "height_m"));
        const double zenith_deg = table.number(i, "zenith_deg");
        CHECK(90 - deg_from_rad(view.elevation_rad) == Approx(zenith_deg).margin(1e-4).epsilon(0));
        CHECK(90 - deg_from_rad(view.elevation_rad + refraction(view.elevation_rad)) ==
              Approx(table.number(i, "zenith_refracted_deg")).margin(2e-4).epsilon(0));
        CHECK(degrees_apart(deg_from_rad(view.azimuth_rad), table.number(i, "azimuth_deg")) <
              1e-4 / std::sin(rad_from_deg(zenith_deg)));
        CHECK(std::asin(sin_elevation(sun, lat, lon)) ==
              Approx(view.elevation_rad).margin(3e-7).epsilon(0));
    }
}

TEST_CASE("sun_state: agrees with Meeus's examples 25.b and 28.a", "[physics][vector]") {
    // Meeus, Astronomical Algorithms, 2nd ed. 1998: 1992 October 13, 0 h TD, when TT - UTC
    // was 59.184 s.
    const double t = utc("1992-10-13T00:00Z") - 59.184;
    const auto sun = sun_state(t);
    // Complete theory: declination -7 deg 47' 01.74", distance 0.99760853. The frames and nutation
    // of 1980 and 2006 differ by hundredths of an arc second.
    CHECK(deg_from_rad(sun.declination_rad) ==
          Approx(-(7 + 47 / 60.0 + 1.74 / 3600)).margin(0.05 / 3600).epsilon(0));
    CHECK(sun.distance_au == Approx(0.99760853).margin(2e-8).epsilon(0));
    // Truncated series as printed: -7.783871 deg, within the series' error of about an arc second.
    CHECK(deg_from_rad(sun.declination_rad) == Approx(-7.783871).margin(1.0 / 3600).epsilon(0));
    // 28.a: 13 m 42.6 s. UT1 was taken as UTC; the equation changes by 0.01 s in that minute.
    CHECK(equation_of_time_s(sun, t) == Approx(13 * 60 + 42.6).margin(0.3).epsilon(0));
}

TEST_CASE("utc_from_true_solar: at true noon the sun is on the meridian", "[physics][property]") {
    const double longitude_rad = GENERATE(take(5, random(-3.1, 3.1)));
    const long day = GENERATE(take(5, random(10000L, 25000L)));
    CAPTURE(longitude_rad, day);
    const auto zone = Zone::parse("solar-true");
    const double noon =
        utc_from_true_solar(zone.to_utc(civil_from_days(day), 43200, longitude_rad));
    const double hour_angle_rad = std::remainder(
        sun_state(noon).greenwich_hour_angle_rad + longitude_rad, 2 * std::numbers::pi);
    CHECK(std::abs(hour_angle_rad) < 1e-9);  // a double holds such an instant to 3e-11 rad
}
