// The published solar position algorithm against its own report, and our sun against both.
#include <catch2/catch.hpp>
#include <cmath>
#include <map>
#include <random>

#include "reference/spa.hpp"
#include "sunbudget/base/text.hpp"
#include "sunbudget/physics/sun_day.hpp"
#include "sunbudget/physics/sun_place.hpp"
#include "support/vectors.hpp"

using namespace sunbudget;
using namespace sunbudget::test;

namespace {

// The worked example of Table A5.1.
constexpr SpaPlace golden{39.742476, -105.1786, 1830.14};
constexpr double example_jd = 2452930.312847, example_delta_t_s = 67;
// 2003-10-17 12:30:30 in zone -7 h is 19:30:30 UT; the report prints the Julian day to 1e-6 only.
const UtcSeconds example_utc = resolve(parse_instant("2003-10-17T19:30:30Z"), Zone(), 0);
const double exact_jd = 2440587.5 + example_utc / 86400;

double degrees_apart(double a, double b) {
    return std::abs(std::remainder(a - b, 360.0));
}

double clock_s(const std::string& text) {  // "18:46:04.97"
    const auto parts = split(text, ':');
    return 3600 * parse_number(parts[0]).value() + 60 * parse_number(parts[1]).value() +
           parse_number(parts[2]).value();
}

std::map<std::string, double> example_values() {
    static const Spa spa;
    const auto s = spa.sun(exact_jd, example_delta_t_s);
    const auto v = Spa::view(s, golden, 820, 11);
    const double jc = (exact_jd - 2451545) / 36525, jce = jc + example_delta_t_s / 86400 / 36525;
    std::map<std::string, double> values{
        {"JD", exact_jd},
        {"L", s.l_deg},
        {"B", s.b_deg},
        {"R (Earth-Sun distance)", s.r_au},
        {"Theta (geocentric longitude)", s.theta_deg},
        {"beta (geocentric latitude)", s.beta_deg},
        {"delta psi", s.dpsi_deg},
        {"delta epsilon", s.deps_deg},
        {"epsilon (true obliquity)", s.obliquity_deg},
        {"lambda (apparent longitude)", s.lambda_deg},
        {"alpha (geocentric right ascension)", s.alpha_deg},
        {"delta (geocentric declination)", s.delta_deg},
        {"H (local hour angle)", v.hour_angle_deg},
        {"H prime (topocentric hour angle)", v.hour_angle_prime_deg},
        {"alpha prime (topocentric)", v.alpha_prime_deg},
        {"delta prime (topocentric)", v.delta_prime_deg},
        {"zenith (refracted)", v.zenith_deg},
        {"azimuth (from north, eastward)", v.azimuth_deg},
        {"incidence on slope 30 rotated -10 from south (west positive)",
         spa_incidence_deg(v, 30, -10)},
        {"M (sun mean longitude)", s.mean_longitude_deg},
        {"equation of time", s.equation_of_time_min},
        {"Julian century", jc},
        {"Julian ephemeris day", exact_jd + example_delta_t_s / 86400},
        {"Julian ephemeris century", jce},
        {"Julian ephemeris millennium", jce / 10},
        {"X0 mean elongation of moon", s.x_deg[0]},
        {"X1 mean anomaly of sun", s.x_deg[1]},
        {"X2 mean anomaly of moon", s.x_deg[2]},
        {"X3 argument of latitude of moon", s.x_deg[3]},
        {"X4 ascending node of moon", s.x_deg[4]},
        {"mean obliquity", s.mean_obliquity_arcsec},
        {"aberration correction", s.aberration_deg},
        {"mean sidereal time at Greenwich", s.mean_sidereal_deg},
        {"apparent sidereal time at Greenwich", s.sidereal_deg},
        {"equatorial horizontal parallax", v.parallax_deg},
        {"parallax in right ascension", v.dalpha_deg},
        {"topocentric elevation without refraction", v.elevation_deg},
        {"refraction correction", v.refraction_deg},
        {"topocentric elevation", v.elevation_deg + v.refraction_deg},
        {"azimuth from south, westward", v.azimuth_south_deg}};
    for (int k = 0; k < 6; ++k) values["L" + std::to_string(k)] = s.series_l[k];
    for (int k = 0; k < 2; ++k) values["B" + std::to_string(k)] = s.series_b[k];
    for (int k = 0; k < 5; ++k) values["R" + std::to_string(k)] = s.series_r[k];
    return values;
}

}  // namespace

TEST_CASE("Spa: prints every figure of the report's worked example", "[reference][vector]") {
    const auto table = read_table("vectors/spa_example.csv");
    const auto values = example_values();
    std::size_t checked = 0;
    for (std::size_t i = 0; i < table.rows.size(); ++i) {
        const auto& quantity = table.cell(i, "quantity");
        CAPTURE(quantity, table.cell(i, "value"));
        if (table.cell(i, "unit") == "UT hh:mm:ss") continue;  // the next test
        REQUIRE(values.contains(quantity));
        CHECK(values.at(quantity) ==
              Approx(table.number(i, "value")).margin(table.number(i, "tolerance")).epsilon(0));
        ++checked;
    }
    CHECK(checked == values.size());
}

TEST_CASE("sun_day: agrees with the report's sunrise, transit and sunset", "[physics][vector]") {
    const auto table = read_table("vectors/spa_example.csv");
    const Spa spa;
    const double midnight_utc = example_utc - clock_s("19:30:30");
    const auto reference =
        spa.day(2440587.5 + midnight_utc / 86400, example_delta_t_s, golden, -0.8333);
    // The report looks at the UT day of its example, in which the sun sets (at 17 h local time of
    // the day before) before it rises.
    const double begin = midnight_utc;
    const SunTrack track(begin, begin + 86400);
    const auto day = sun_day(track, begin, begin + 86400, rad_from_deg(golden.latitude_deg),
                             rad_from_deg(golden.longitude_deg), almanac_horizon_rad);
    const std::map<std::string, std::pair<double, double>> found{
        {"sun transit", {reference.transit, day.transit.value()}},
        {"sunrise", {reference.sunrise, day.sunrise.value()}},
        {"sunset", {reference.sunset, day.sunset.value()}}};
    int checked = 0;
    for (std::size_t i = 0; i < table.rows.size(); ++i) {
        if (table.cell(i, "unit") != "UT hh:mm:ss") continue;
        const auto& [spa_fraction, ours] = found.at(table.cell(i, "quantity"));
        const double printed_s = clock_s(table.cell(i, "value"));
        CAPTURE(table.cell(i, "quantity"), printed_s, spa_fraction * 86400, ours - midnight_utc);
        CHECK(std::abs(spa_fraction * 86400 - printed_s) < table.number(i, "tolerance"));
        // The report's own times come from one correction step and sun places of its day's
        // midnight.
        CHECK(std::abs(ours - midnight_utc - printed_s) < table.number(i, "tolerance"));
        ++checked;
    }
    CHECK(checked == 3);
}

TEST_CASE("horizontal: within 3e-4 deg of the report's worked example", "[physics][vector]") {
    // 3e-4 deg is the report's stated uncertainty.
    const auto sun = sun_state(example_utc);
    const auto view = horizontal(sun, rad_from_deg(golden.latitude_deg),
                                 rad_from_deg(golden.longitude_deg), golden.height_m);
    const double apparent_rad =
        view.elevation_rad + refraction(view.elevation_rad, 820, k_from_celsius(11));
    CHECK(90 - deg_from_rad(apparent_rad) == Approx(50.11162).margin(3e-4));
    CHECK(deg_from_rad(view.azimuth_rad) == Approx(194.34024).margin(3e-4));
    CHECK(deg_from_rad(sun.declination_rad) == Approx(-9.31434).margin(3e-4));
    CHECK(sun.distance_au == Approx(0.9965422974).margin(1e-5));
    CHECK(equation_of_time_s(sun, example_utc) / 60 == Approx(14.641503).margin(0.005));
}

TEST_CASE("horizontal: within 5e-4 deg of the published series at 10,000 places and times",
          "[physics][differential]") {
    const Spa spa;
    std::mt19937_64 random(2024);
    // ERFA's leap seconds end in 2017: TT - UTC stays 69.184 s from there on.
    std::uniform_real_distribution<double> instants(1483228800.0 + 86400, 2208988800.0);
    std::uniform_real_distribution<double> sines(-1, 1), longitudes(-180, 180), heights(0, 5000);
    double worst_zenith = 0, worst_azimuth = 0;
    for (int i = 0; i < 10000; ++i) {
        const double t = instants(random);
        const SpaPlace place{deg_from_rad(std::asin(sines(random))), longitudes(random),
                             heights(random)};
        const auto theirs = Spa::view(spa.sun(2440587.5 + t / 86400, 69.184), place, 0, 10);
        const auto ours = horizontal(sun_state(t), rad_from_deg(place.latitude_deg),
                                     rad_from_deg(place.longitude_deg), place.height_m);
        const double elevation_deg = deg_from_rad(ours.elevation_rad);
        worst_zenith = std::max(worst_zenith, std::abs(elevation_deg - theirs.elevation_deg));
        // As an angle on the sky: at the zenith itself azimuth means nothing.
        worst_azimuth = std::max(
            worst_azimuth, std::cos(ours.elevation_rad) *
                               degrees_apart(deg_from_rad(ours.azimuth_rad), theirs.azimuth_deg));
    }
    CAPTURE(worst_zenith, worst_azimuth);
    CHECK(worst_zenith < 5e-4);
    CHECK(worst_azimuth < 5e-4);
}
