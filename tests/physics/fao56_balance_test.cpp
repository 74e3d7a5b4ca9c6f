#include "sunbudget/physics/fao56_balance.hpp"

#include <catch2/catch.hpp>

#include "sunbudget/base/units.hpp"
#include "sunbudget/physics/fao56.hpp"
#include "support/vectors.hpp"

using namespace sunbudget;
using namespace sunbudget::test;

namespace {

/// Half a unit of the last printed digit.
Approx printed(double value, double digit) {
    return Approx(value).margin(digit / 2).epsilon(0);
}
double deg_min(double degrees, double minutes) {
    return rad_from_deg(degrees + minutes / 60);
}
double clear_sky(double height_m, double extraterrestrial) {
    return fao56_clear_share(height_m) * extraterrestrial;
}

}  // namespace

TEST_CASE("fao56_emission: reproduces Table 2.8", "[physics][vector]") {
    const auto table = read_table("vectors/fao56_table_2_8_sigma_t4.csv");
    CHECK(table.rows.size() == 96);
    for (std::size_t i = 0; i < table.rows.size(); ++i)
        CHECK(fao56_emission_mj_m2_day(table.number(i, "t_c")) ==
              Approx(table.number(i, "sigma_t4_mj_m2_day")).margin(0.006).epsilon(0));
}

TEST_CASE("fao56: examples 10 to 12, Rio de Janeiro in May", "[physics][vector]") {
    // Example 11 prints the latitude once as -22.70 for -22.90, and in its last line 38.7 and 35.7 for 38.8 and
    // 35.8; example 12 cites equation 39 for 38, and its line of evaporation multiplies 7.7.
    const double latitude = -deg_min(22, 54);
    const double ra = fao56_extraterrestrial_mj_m2_day(135, latitude);
    const double rs = fao56_sunshine_radiation(220.0 / 31, fao56_daylight_h(135, latitude), ra);
    CHECK(rs == printed(14.5, 0.1));
    const double rso = 0.75 * ra;
    CHECK(rso == printed(18.8, 0.1));
    CHECK(fao56_emission_mj_m2_day(25.1) == printed(38.8, 0.1));
    CHECK(fao56_emission_mj_m2_day(19.1) == printed(35.8, 0.1));
    CHECK(rs / rso == printed(0.77, 0.01));
    const double rnl = fao56_net_longwave_mj_m2_day(19.1, 25.1, 2.1, rs / rso);
    CHECK(rnl == printed(3.5, 0.1));
    CHECK(fao56_net_radiation(rs, 0) == printed(11.1, 0.1));
    CHECK(fao56_net_radiation(rs, rnl) == printed(7.6, 0.1));
}

TEST_CASE("fao56: example 16, Bangkok in April from temperatures alone", "[physics][vector]") {
    // The text prints the latitude of +13.73 deg as -0.24 rad, and subtracts 2.9 where it printed 3.0.
    const double ra = fao56_extraterrestrial_mj_m2_day(105, deg_min(13, 44));
    const double rs = fao56_temperature_radiation(25.6, 34.8, ra, 0.19);
    const double rso = clear_sky(2, ra);
    const double rnl = fao56_net_longwave_mj_m2_day(25.6, 34.8, 2.85, rs / rso);
    CHECK(ra == printed(38.1, 0.1));
    CHECK(rs == printed(21.9, 0.1));
    CHECK(rso == printed(28.5, 0.1));
    CHECK(fao56_net_radiation(rs, 0) == printed(16.9, 0.1));
    CHECK(rnl == printed(3.0, 0.1));
    CHECK(fao56_net_radiation(rs, rnl) == printed(13.9, 0.1));
}

TEST_CASE("fao56: example 17, Bangkok in April", "[physics][vector]") {
    const double ra = fao56_extraterrestrial_mj_m2_day(105, deg_min(13, 44));
    const double rs = fao56_sunshine_radiation(8.5, fao56_daylight_h(105, deg_min(13, 44)), ra);
    const double rso = clear_sky(2, ra);
    const double rnl = fao56_net_longwave_mj_m2_day(25.6, 34.8, 2.85, rs / rso);
    CHECK(rs == printed(22.65, 0.01));
    CHECK(rso ==
          Approx(28.54).margin(0.006).epsilon(0));  // 28.545: the paper multiplies rounded numbers
    CHECK(rs / rso == printed(0.79, 0.01));
    CHECK(fao56_net_radiation(rs, 0) == printed(17.44, 0.01));
    CHECK(fao56_emission_mj_m2_day(34.8) == printed(44.10, 0.01));
    CHECK(fao56_emission_mj_m2_day(25.6) == printed(39.06, 0.01));
    CHECK(rnl == printed(3.11, 0.01));
    CHECK(fao56_net_radiation(rs, rnl) == printed(14.33, 0.01));
}

TEST_CASE("fao56: example 18, Uccle on 6 July", "[physics][vector]") {
    // The line of n/N divides by 16.3 where N is 16.1.
    const double ra = fao56_extraterrestrial_mj_m2_day(187, deg_min(50, 48));
    const double daylight_h = fao56_daylight_h(187, deg_min(50, 48));
    const double rs = fao56_sunshine_radiation(9.25, daylight_h, ra);
    const double rso = clear_sky(100, ra);
    const double ea = fao56_vapour_pressure_kpa(12.3, 21.5, 84, 63);
    const double rnl = fao56_net_longwave_mj_m2_day(12.3, 21.5, ea, rs / rso);
    CHECK(fao56_saturation_kpa(21.5) == printed(2.564, 0.001));
    CHECK(fao56_saturation_kpa(12.3) == printed(1.431, 0.001));
    CHECK(ea == printed(1.409, 0.001));
    CHECK(9.25 / daylight_h == printed(0.57, 0.01));
    CHECK(rs == printed(22.07, 0.01));
    CHECK(rso == printed(30.90, 0.01));
    CHECK(rs / rso == printed(0.71, 0.01));
    CHECK(fao56_net_radiation(rs, 0) == Approx(17.00).margin(0.006).epsilon(0));  // 16.995
    CHECK(fao56_emission_mj_m2_day(21.5) == printed(36.96, 0.01));
    CHECK(fao56_emission_mj_m2_day(12.3) == printed(32.56, 0.01));
    CHECK(rnl == printed(3.71, 0.01));
    CHECK(fao56_net_radiation(rs, rnl) == printed(13.28, 0.01));
}

TEST_CASE("fao56: example 19, an afternoon hour at N'Diaye", "[physics][vector]") {
    const double latitude = deg_min(16, 13);
    CHECK(latitude == printed(0.2830, 1e-4));
    CHECK(fao56_seasonal_correction_h(274) == printed(0.1889, 1e-4));
    const double angle = fao56_hour_angle_rad(14.5, 15, 16.25, 274);
    CHECK(angle == printed(0.682, 0.001));
    const double ra = fao56_extraterrestrial_mj_m2_h(274, latitude, angle);
    const double rso = clear_sky(8, ra), rs = 2.450;
    const double ea = 0.52 * fao56_saturation_kpa(38);
    const double rnl = fao56_net_longwave_mj_m2_h(38, ea, rs / rso);
    CHECK(ra == printed(3.543, 0.001));
    CHECK(rso == printed(2.658, 0.001));
    CHECK(rs / rso == printed(0.922, 0.001));
    CHECK(fao56_net_radiation(rs, 0) == Approx(1.887).margin(6e-4).epsilon(0));  // 1.8865
    CHECK(fao56_emission_mj_m2_h(38) == printed(1.915, 0.001));
    CHECK(rnl == printed(0.137, 0.001));
    CHECK(fao56_net_radiation(rs, rnl) ==
          Approx(1.749).margin(0.001).epsilon(0));  // the paper's roundings add up
}

TEST_CASE("fao56: example 19, a night hour at N'Diaye", "[physics][vector]") {
    const double angle = fao56_hour_angle_rad(2.5, 15, 16.25, 274);
    CHECK(angle == printed(-2.46, 0.01));
    // The bare equation gives -3.75 with the sun below the horizon.
    CHECK(fao56_extraterrestrial_mj_m2_h(274, deg_min(16, 13), angle) == 0);
    const double ea = 0.90 * fao56_saturation_kpa(28);
    CHECK(ea == printed(3.402, 0.001));
    CHECK(fao56_emission_mj_m2_h(28) == printed(1.681, 0.001));
    const double rnl = fao56_net_longwave_mj_m2_h(28, ea, 0.8);
    CHECK(rnl == printed(0.100, 0.001));
    CHECK(fao56_net_radiation(0, rnl) == printed(-0.100, 0.001));
}

TEST_CASE("fao56: more light than a clear sky gives counts as a clear sky", "[physics][edge]") {
    CHECK(fao56_net_longwave_mj_m2_day(10, 20, 1, 1.3) ==
          fao56_net_longwave_mj_m2_day(10, 20, 1, 1));
    CHECK(fao56_net_longwave_mj_m2_h(10, 1, 1.3) == fao56_net_longwave_mj_m2_h(10, 1, 1));
}

TEST_CASE("asce2005: as FAO-56 between its limits, and held at them", "[physics][property]") {
    // Its sigma differs by 4.901 to 4.903, its hourly one by 2.042 to 2.043; below a relative sunlight of 0.3 the
    // cloud term stays at 0.055.
    for (const double relative : {0.4, 0.7, 1.0}) {
        CHECK(asce2005_net_longwave_mj_m2_day(10, 20, 1, relative) /
                  fao56_net_longwave_mj_m2_day(10, 20, 1, relative) ==
              Approx(4.901 / 4.903).epsilon(1e-12));
        CHECK(asce2005_net_longwave_mj_m2_h(15, 1, relative) /
                  fao56_net_longwave_mj_m2_h(15, 1, relative) ==
              Approx(2.042 / 2.043).epsilon(1e-12));
    }
    CHECK(asce2005_net_longwave_mj_m2_day(10, 20, 1, 0) ==
          asce2005_net_longwave_mj_m2_day(10, 20, 1, 0.3));
    CHECK(asce2005_net_longwave_mj_m2_day(10, 20, 1, 0) > 0);
    CHECK(asce2005_net_longwave_mj_m2_h(15, 1, 2) == asce2005_net_longwave_mj_m2_h(15, 1, 1));
}
