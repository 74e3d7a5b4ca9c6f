// Geometry of the sun and of slopes against worked examples of a textbook.
#include <catch2/catch.hpp>
#include <cmath>
#include <numbers>

#include "sunbudget/base/units.hpp"
#include "sunbudget/physics/sun_day.hpp"
#include "sunbudget/physics/sun_place.hpp"
#include "support/vectors.hpp"

using namespace sunbudget;

namespace {

// Duffie & Beckman, Solar Engineering of Thermal Processes (values remembered and recomputed with plain
// double precision): the sun's declination after Cooper 1969, angles in degrees, azimuths from south.
double cooper_deg(int day) {
    return 23.45 * std::sin(rad_from_deg(360.0 * (284 + day) / 365));
}

/// The sun of a declination and hour angle from a place on the Greenwich meridian. So far away that
/// parallax, which the book leaves out, does nothing.
Horizontal sun_over(double latitude_deg, double declination_deg, double hour_angle_deg) {
    SunState sun{};
    sun.declination_rad = rad_from_deg(declination_deg);
    sun.greenwich_hour_angle_rad = rad_from_deg(hour_angle_deg);
    sun.distance_au = 1e6;
    return horizontal(sun, rad_from_deg(latitude_deg), 0);
}
double zenith_deg(const Horizontal& sun) {
    return 90 - deg_from_rad(sun.elevation_rad);
}
double from_south_deg(const Horizontal& sun) {
    return deg_from_rad(sun.azimuth_rad) - 180;
}

double cos_incidence(const Horizontal& sun, double slope_deg, double slope_from_south_deg) {
    const double slope = rad_from_deg(slope_deg),
                 turn = sun.azimuth_rad - std::numbers::pi - rad_from_deg(slope_from_south_deg);
    return std::sin(sun.elevation_rad) * std::cos(slope) +
           std::cos(sun.elevation_rad) * std::sin(slope) * std::cos(turn);
}

Approx within(double value, double margin) {
    return Approx(value).margin(margin).epsilon(0);
}

}  // namespace

TEST_CASE("horizontal: agrees with the textbook's sun angles", "[physics][vector]") {
    // Margins: the printed digit, which carries the book's hand rounding.
    CHECK(cooper_deg(44) == within(-14, 0.1));  // ex. 1.6.1
    const auto morning = sun_over(43, -14, -22.5);
    CHECK(cos_incidence(morning, 45, 15) == within(0.817, 5e-4));  // ex. 1.6.1
    CHECK(deg_from_rad(std::acos(cos_incidence(morning, 45, 15))) == within(35.2, 0.1));
    CHECK(zenith_deg(sun_over(43, -14, -37.5)) == within(66.5, 0.1));  // ex. 1.6.2
    CHECK(from_south_deg(sun_over(43, -14, -37.5)) == within(-40.0, 0.15));
    CHECK(zenith_deg(sun_over(43, 23.1, 97.5)) == within(79.6, 0.1));
    CHECK(from_south_deg(sun_over(43, 23.1, 97.5)) == within(112.0, 0.1));
    const auto afternoon = sun_over(43, -2.4, 60);
    CHECK(zenith_deg(afternoon) == within(70.3, 0.05));  // ex. 1.6.3
    CHECK(from_south_deg(afternoon) == within(66.8, 0.05));
    const double profile_rad = std::atan(std::tan(afternoon.elevation_rad) /
                                         std::cos(rad_from_deg(from_south_deg(afternoon) - 25)));
    CHECK(deg_from_rad(profile_rad) == within(25.7, 0.1));
    CHECK(deg_from_rad(sunset_hour_angle_rad(rad_from_deg(43), rad_from_deg(-2.4))) ==
          within(87.8, 0.05));
}

TEST_CASE("cos of incidence over that on the level: agrees with the textbook's ratios",
          "[physics][vector]") {
    const auto ratio = [](const Horizontal& sun, double slope_deg, double turn_deg) {
        return cos_incidence(sun, slope_deg, turn_deg) / std::sin(sun.elevation_rad);
    };
    CHECK(ratio(sun_over(43, -14, -22.5), 45, 15) == within(1.66, 0.01));  // ex. 1.8.1
    CHECK(ratio(sun_over(40, -13, -37.5), 30, 0) == within(1.61, 0.01));   // ex. 1.8.2
    // Row transposition-137: a plane tilted by the latitude, at an equinox, has 1 / cos latitude at every hour.
    for (const double hour_angle_deg : {-75.0, -20.0, 0.0, 50.0})
        CHECK(ratio(sun_over(37, 0, hour_angle_deg), 37, 0) ==
              Approx(1 / std::cos(rad_from_deg(37))).epsilon(1e-9));
}

TEST_CASE("daily_extraterrestrial: agrees with the textbook's days", "[physics][vector]") {
    const auto day_mj_m2 = [](int day, double latitude_deg) {
        const double outside_w_m2 = 1367 * (1 + 0.033 * std::cos(rad_from_deg(360.0 * day / 365)));
        return daily_extraterrestrial_j_m2(outside_w_m2, rad_from_deg(latitude_deg),
                                           rad_from_deg(cooper_deg(day))) /
               1e6;
    };
    CHECK(day_mj_m2(105, 43) == within(33.8, 0.05));    // ex. 1.10.1
    CHECK(day_mj_m2(246, 38.6) == within(33.0, 0.35));  // ex. 2.11.1, read from a chart
    CHECK(day_mj_m2(162, 43) == within(41.8, 0.05));    // ex. 2.12.1
}
