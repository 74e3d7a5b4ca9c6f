#include "sunbudget/physics/cloudy_sky.hpp"

#include <catch2/catch.hpp>
#include <cmath>
#include <vector>

#include "sunbudget/base/units.hpp"
#include "support/vectors.hpp"

namespace sunbudget {

TEST_CASE("clouds and the split agree with the published formulas' values", "[physics][vector]") {
    const auto table = test::read_table("vectors/cloud_split.csv");
    for (std::size_t i = 0; i < table.rows.size(); ++i) {
        const auto& quantity = table.cell(i, "quantity");
        const double argument = table.number(i, "argument");
        CAPTURE(quantity, argument);
        const double found = quantity == "kasten_index" ? kasten_czeplak1980_index(argument / 8)
                             : quantity == "kasten_diffuse"
                                 ? kasten_czeplak1980_diffuse_share(argument / 8)
                                 : erbs1982_hourly(argument);
        CHECK(found == Approx(table.number(i, "value")).margin(1e-5));
    }
    CHECK(table.rows.size() == 27);
}

TEST_CASE("angstrom_prescott: FAO-56 example 10, 220 h of sunshine at Rio de Janeiro in May",
          "[physics][vector]") {
    // Ra 25.1, N 10.9, n 7.1 = 220/31, Rs 14.5 MJ m-2 day-1 (Allen et al. 1998, example 10). Half a digit of
    // Rs is 0.05, half a digit of Ra and of N another 0.03 and 0.04.
    CHECK(angstrom_prescott(220.0 / 31 / 10.9) * 25.1 == Approx(14.5).margin(0.12));
    // Example 11 divides by Rso = 0.75 Ra, that is, n = N: 18.8.
    CHECK(angstrom_prescott(1) * 25.1 == Approx(18.8).margin(0.05));
}

TEST_CASE("cloud shares: global is what the index says, whatever the clear sky's parts",
          "[physics][property]") {
    const double cloud = GENERATE(range(0.0, 1.01, 0.125));
    const double direct = GENERATE(0.0, 300.0, 800.0), diffuse = GENERATE(20.0, 120.0);
    CAPTURE(cloud, direct, diffuse);
    const auto global = [&](const LightShare& share) {
        return share.beam * direct + share.diffuse * diffuse + share.scattered * direct;
    };
    const double clear = direct + diffuse;
    CHECK(global(cloud_at_an_hour(cloud)) == Approx(kasten_czeplak1980_index(cloud) * clear));
    CHECK(global(cloud_over_a_period(cloud)) == Approx((1 - 0.75 * cloud) * clear));
    CHECK(global(clear_sky_index(cloud)) == Approx(cloud * clear).margin(1e-9));
    CHECK(global(clear_sky_index(1 + cloud)) == Approx((1 + cloud) * clear));
    CHECK(cloud_at_an_hour(cloud).beam >= 0);
}

TEST_CASE("cloud shares: none gives the clear sky, a closed cover no beam", "[physics][edge]") {
    CHECK(cloud_at_an_hour(0) == LightShare{1, 1, 0});
    CHECK(cloud_over_a_period(0) == LightShare{1, 1, 0});
    CHECK(clear_sky_index(1) == LightShare{1, 1, 0});
    CHECK(cloud_at_an_hour(1) == LightShare{0, 0.25, 0.25});
    CHECK(cloud_over_a_period(1) == LightShare{0, 0.25, 0.25});
    CHECK(clear_sky_index(0) == LightShare{0, 0, 0});
    CHECK(std::isnan(cloud_at_an_hour(NAN).beam));
}

TEST_CASE("the hourly law on a period's mean cloud would give 27, 49 and 64 % too much",
          "[physics][property]") {
    const auto too_much = [](double n) { return kasten_czeplak1980_index(n) / (1 - 0.75 * n) - 1; };
    // The figures that make the mixture the rule, to the digits they are stated with.
    CHECK(too_much(0.3) == Approx(0.27).margin(0.02));
    CHECK(too_much(0.5) == Approx(0.49).margin(0.02));
    CHECK(too_much(0.7) == Approx(0.64).margin(0.03));
}

TEST_CASE("dim_row: level open ground gets the index's share, closed covers no beam",
          "[physics][property]") {
    const std::vector<float> index{0.0F, 0.2F, 0.25F, 0.5F, 0.8F, 1.0F, 1.1F, NAN};
    const std::vector<float> open_direct(index.size(), 500.0F), open_diffuse(index.size(), 100.0F);
    auto direct = open_direct, diffuse = open_diffuse;
    std::vector<float> reflected(index.size(), 12.0F);
    dim_row({index, open_direct, open_diffuse, {}, direct, diffuse, reflected}, 0.25);
    for (std::size_t i = 0; i + 1 < index.size(); ++i) {
        CAPTURE(index[i]);
        // Floats of some hundred W m-2 are good to 3e-5.
        CHECK(direct[i] + diffuse[i] == Approx(index[i] * 600).margin(1e-3));
        CHECK(reflected[i] == Approx(index[i] * 12).margin(1e-4));
        if (index[i] <= 0.25F) CHECK(direct[i] == 0);
    }
    CHECK(direct[5] == 500);
    CHECK(diffuse[5] == 100);
    CHECK(std::isnan(direct.back()));
    CHECK(std::isnan(diffuse.back()));
    CHECK(std::isnan(reflected.back()));
    // Half the sky in view: the overcast's light is halved, the clear sky's share is as it came.
    std::vector<float> view(1, 0.5F), one(1, 0.625F), b(1, 0.0F), d(1, 30.0F);
    dim_row(
        {one, std::span(open_direct).first(1), std::span(open_diffuse).first(1), view, b, d, {}},
        0.25);
    CHECK(d[0] == Approx(0.5 * 30 + 0.5 * 0.5 * 0.25 * 600));
}

TEST_CASE("erbs: daily and monthly shares are continuous and fall from all to little",
          "[physics][property]") {
    const double sunset_rad = rad_from_deg(GENERATE(70.0, 100.0));
    double last = 1;
    for (double clearness = 0; clearness <= 0.8; clearness += 0.01) {
        const double share = erbs1982_daily(clearness, sunset_rad);
        CAPTURE(clearness, sunset_rad, share);
        CHECK(share > 0.1);
        CHECK(share < 1.01);
        CHECK(std::abs(share - last) < 0.04);
        last = share;
        const double month = erbs1982_monthly(clearness, sunset_rad);
        CHECK(month > 0.1);
        CHECK(month < 0.75);
    }
}

TEST_CASE(
    "hourly_diffuse: clear hours take the clear sky's share, the beam is never cleaner than clean "
    "air",
    "[physics][edge]") {
    // global, extraterrestrial, clear direct and diffuse, clean direct
    CHECK(hourly_diffuse_w_m2({820, 1100, 700, 100, 760}) == Approx(820.0 * 100 / 800));
    CHECK(hourly_diffuse_w_m2({760, 1100, 700, 100, 760}) ==
          Approx(760 * (0.5 * 100 / 800 + 0.5 * erbs1982_hourly(760.0 / 1100))));
    CHECK(hourly_diffuse_w_m2({550, 1100, 700, 100, 760}) == Approx(550 * erbs1982_hourly(0.5)));
    CHECK(hourly_diffuse_w_m2({1000, 1100, 700, 100, 760}) ==
          Approx(240));                                      // 1000 less the cleanest beam
    CHECK(hourly_diffuse_w_m2({5, 0, 0, 0, 0}) == 5);        // light before sunrise
    CHECK(hourly_diffuse_w_m2({-3, 100, 50, 20, 60}) == 0);  // a sensor's zero at low sun
    CHECK(daily_diffuse_w_m2({200, 400, 180, 40, 210}, rad_from_deg(95)) ==
          Approx(200 * erbs1982_daily(0.5, rad_from_deg(95))));
}

}  // namespace sunbudget
