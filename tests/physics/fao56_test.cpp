#include "sunbudget/physics/fao56.hpp"

#include <array>
#include <catch2/catch.hpp>

#include "sunbudget/base/units.hpp"
#include "sunbudget/physics/sun_day.hpp"
#include "support/vectors.hpp"

using namespace sunbudget;
using namespace sunbudget::test;

namespace {

// Days of the year of the 15th of each month, by which the paper's tables were made.
constexpr std::array mid_month{15, 46, 74, 105, 135, 166, 196, 227, 258, 288, 319, 349};

/// Calls check(latitude_rad, day, printed) for every cell that is not empty, and counts them.
template <typename Check>
int for_each_cell(const char* file, Check&& check) {
    const auto table = read_table(file);
    int cells = 0;
    for (std::size_t i = 0; i < table.rows.size(); ++i)
        for (std::size_t month = 0; month < 12; ++month) {
            if (table.rows[i].at(month + 1).empty()) continue;
            CAPTURE(table.rows[i][0], month + 1);
            check(rad_from_deg(table.number(i, table.columns[0])), mid_month[month],
                  table.number(i, table.columns[month + 1]));
            ++cells;
        }
    return cells;
}

}  // namespace

TEST_CASE("fao56_extraterrestrial: reproduces Table 2.6", "[physics][vector]") {
    // 0.15 MJ m-2 day-1: the printed table's own rounding of what went into it; 0.04 rms.
    double squares = 0;
    const int cells =
        for_each_cell("vectors/fao56_table_2_6_ra.csv", [&](double lat, int day, double printed) {
            const double ours = fao56_extraterrestrial_mj_m2_day(day, lat);
            CHECK(ours == Approx(printed).margin(0.15).epsilon(0));
            squares += (ours - printed) * (ours - printed);
        });
    CHECK(cells == 791);  // 66 latitudes, one cell left out
    CHECK(squares / cells < 0.05 * 0.05);
}

TEST_CASE("fao56_daylight: reproduces Table 2.7", "[physics][vector]") {
    // Half a printed digit, and 0.03 h of rounding in the table's own declination.
    const int cells = for_each_cell(
        "vectors/fao56_table_2_7_daylight.csv", [](double lat, int day, double printed) {
            CHECK(fao56_daylight_h(day, lat) == Approx(printed).margin(0.08).epsilon(0));
        });
    CHECK(cells == 71 * 12);
}

TEST_CASE("fao56: reproduces the paper's worked examples", "[physics][vector]") {
    // FAO-56 (1998), half a unit of the last printed digit. Example 16 prints Bangkok's latitude as
    // -0.24 rad, a misprint for +13.73 deg.
    CHECK(fao56_inverse_distance(246) == Approx(0.985).margin(5e-4));  // ex. 8
    CHECK(fao56_declination_rad(246) == Approx(0.120).margin(5e-4));   // ex. 8
    CHECK(sunset_hour_angle_rad(rad_from_deg(-20), fao56_declination_rad(246)) ==
          Approx(1.527).margin(5e-4));
    CHECK(fao56_extraterrestrial_mj_m2_day(246, rad_from_deg(-20)) ==
          Approx(32.2).margin(0.05));                                              // ex. 8
    CHECK(fao56_daylight_h(246, rad_from_deg(-20)) == Approx(11.7).margin(0.05));  // ex. 9
    CHECK(fao56_extraterrestrial_mj_m2_day(135, rad_from_deg(-22.9)) ==
          Approx(25.1).margin(0.05));                                                // ex. 10
    CHECK(fao56_daylight_h(135, rad_from_deg(-22.9)) == Approx(10.9).margin(0.05));  // ex. 10
    CHECK(fao56_extraterrestrial_mj_m2_day(196, rad_from_deg(45 + 43 / 60.0)) ==
          Approx(40.6).margin(0.05));  // 15
    CHECK(fao56_extraterrestrial_mj_m2_day(105, rad_from_deg(13 + 44 / 60.0)) ==
          Approx(38.06).margin(0.005));  // 17
    CHECK(fao56_daylight_h(105, rad_from_deg(13 + 44 / 60.0)) ==
          Approx(12.31).margin(0.005));  // ex. 17
    CHECK(fao56_extraterrestrial_mj_m2_day(187, rad_from_deg(50.8)) ==
          Approx(41.09).margin(0.005));                                             // ex. 18
    CHECK(fao56_daylight_h(187, rad_from_deg(50.8)) == Approx(16.1).margin(0.05));  // ex. 18
    CHECK(fao56_inverse_distance(274) == Approx(1.0001).margin(5e-5));              // ex. 19
    CHECK(fao56_declination_rad(274) == Approx(-0.0753).margin(5e-5));              // ex. 19
}

TEST_CASE("fao56: polar day and night are 24 and 0 hours", "[physics][edge]") {
    CHECK(fao56_daylight_h(172, rad_from_deg(80)) == Approx(24).epsilon(1e-15));
    CHECK(fao56_daylight_h(355, rad_from_deg(80)) == 0);
    CHECK(fao56_extraterrestrial_mj_m2_day(355, rad_from_deg(80)) == 0);
}
