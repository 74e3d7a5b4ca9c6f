#include "sunbudget/physics/surface_balance.hpp"

#include <catch2/catch.hpp>
#include <cmath>
#include <limits>
#include <random>
#include <vector>

#include "reference/longwave.hpp"
#include "sunbudget/base/units.hpp"
#include "support/vectors.hpp"

using namespace sunbudget;
using namespace sunbudget::test;

namespace {

using Row = std::vector<float>;
constexpr float nodata = std::numeric_limits<float>::quiet_NaN();

Wind wind_of(double exchange) {
    for (const auto wind : {Wind::low, Wind::medium, Wind::high})
        if (heat_exchange_w_m2_k(wind) == exchange) return wind;
    throw std::runtime_error("no such wind");
}

Row random_row(std::size_t count, float low, float high, unsigned seed) {
    std::mt19937 random(seed);
    std::uniform_real_distribution<float> values(low, high);
    Row row(count);
    for (auto& value : row) value = values(random);
    return row;
}

}  // namespace

TEST_CASE("solar_reflectance_index: the balance of ASTM E1980, one by one and in a row",
          "[physics][vector]") {
    const auto table = read_table("vectors/sri.csv");
    REQUIRE(table.rows.size() == 48);
    for (std::size_t i = 0; i < table.rows.size(); ++i) {
        CAPTURE(i);
        const double a = table.number(i, "reflectance"), eps = table.number(i, "emissivity");
        const auto wind = wind_of(table.number(i, "hc_w_m2_k"));
        const double expected = table.number(i, "sri");
        CHECK(solar_reflectance_index(a, eps, wind) == Approx(expected).margin(0.02).epsilon(0));
        Row out(1);
        solar_reflectance_index(Row{static_cast<float>(a)}, Row{static_cast<float>(eps)}, wind,
                                out);
        CHECK(out[0] == Approx(expected).margin(0.02).epsilon(0));
    }
}

TEST_CASE("wind_case: below 2 m/s, below 6, and above", "[physics][edge]") {
    CHECK(wind_case(0) == Wind::low);
    CHECK(wind_case(1.999) == Wind::low);
    CHECK(wind_case(2) == Wind::medium);
    CHECK(wind_case(5.999) == Wind::medium);
    CHECK(wind_case(6) == Wind::high);
    CHECK(wind_case(25) == Wind::high);
}

TEST_CASE("solar_reflectance_index: the standard's own surfaces are 0 and 100 in every wind",
          "[physics][vector]") {
    const auto wind = GENERATE(Wind::low, Wind::medium, Wind::high);
    CHECK(solar_reflectance_index(0.05, 0.90, wind) == 0);
    CHECK(solar_reflectance_index(0.80, 0.90, wind) == Approx(100).epsilon(1e-14));
}

TEST_CASE("solar_reflectance_index: the published list of roofs", "[physics][vector]") {
    const auto table = read_table("vectors/sri_materials.csv");
    REQUIRE(table.rows.size() == 14);
    for (std::size_t i = 0; i < table.rows.size(); ++i) {
        CAPTURE(table.rows[i][0]);
        const double index = solar_reflectance_index(table.number(i, "reflectance"),
                                                     table.number(i, "emissivity"), Wind::medium);
        CHECK(index == Approx(table.number(i, "iterated")).margin(0.02).epsilon(0));
        if (!table.cell(i, "listed").empty())
            CHECK(index == Approx(table.number(i, "listed")).margin(1).epsilon(0));
    }
}

TEST_CASE(
    "solar_reflectance_index: within 1.8 of the standard's closed form at an emissivity of 0.90",
    "[physics][property]") {
    for (double reflectance = 0.05; reflectance <= 0.85; reflectance += 0.05)
        for (const auto wind : {Wind::low, Wind::medium, Wind::high}) {
            const double eps = 0.90, hc = heat_exchange_w_m2_k(wind);
            const double x = ((1 - reflectance) - 0.029 * eps) * (8.797 + hc) / (9.5205 * eps + hc);
            CHECK(solar_reflectance_index(reflectance, eps, wind) ==
                  Approx(123.97 - 141.35 * x + 9.655 * x * x).margin(1.8).epsilon(0));
        }
}

TEST_CASE("balanced_temperature: the two reference surfaces of ASTM E1980", "[physics][vector]") {
    const auto table = read_table("vectors/sri_temperatures.csv");
    REQUIRE(table.rows.size() == 3);
    const double sky = black_body_reference(300);
    for (std::size_t i = 0; i < table.rows.size(); ++i) {
        const double hc = table.number(i, "hc_w_m2_k");
        CHECK(balanced_temperature_k(950, 0.9, sky, 310, hc) ==
              Approx(table.number(i, "black_k")).margin(0.01).epsilon(0));
        CHECK(balanced_temperature_k(200, 0.9, sky, 310, hc) ==
              Approx(table.number(i, "white_k")).margin(0.01).epsilon(0));
    }
}

TEST_CASE("balanced_temperature: a row agrees with halving in double precision",
          "[physics][differential]") {
    constexpr std::size_t n = 5000;
    const auto absorbed = random_row(n, 0, 1400, 1), eps = random_row(n, 0.03F, 1, 2),
               down = random_row(n, 80, 500, 3), air = random_row(n, 230, 330, 4);
    const float exchange = GENERATE(5.0F, 12.0F, 30.0F);
    Row out(n);
    balanced_temperature(absorbed, eps, down, air, exchange, out);
    double worst = 0, worst_double = 0;
    for (std::size_t i = 0; i < n; ++i) {
        const double reference =
            balanced_temperature_reference(absorbed[i], eps[i], down[i], air[i], exchange);
        worst = std::max(worst, std::abs(static_cast<double>(out[i]) - reference));
        worst_double = std::max(
            worst_double,
            std::abs(balanced_temperature_k(absorbed[i], eps[i], down[i], air[i], exchange) -
                     reference));
    }
    CHECK(
        worst <
        1e-3);  // the gain has 10,000 W m-2 and float 24 bits: 5e-4 W m-2 over 5 W m-2 K-1 and more
    CHECK(worst_double < 1e-9);
}

TEST_CASE("balanced_temperature: nodata in any input is nodata out", "[physics][edge]") {
    Row rows[4] = {{500, 500}, {0.9F, 0.9F}, {350, 350}, {300, 300}};
    rows[GENERATE(0, 1, 2, 3)][1] = nodata;
    Row out(2);
    balanced_temperature(rows[0], rows[1], rows[2], rows[3], 12, out);
    CHECK(out[0] > 300);
    CHECK(std::isnan(out[1]));
}

TEST_CASE("surface longwave: what comes down less what goes up is the net", "[physics][property]") {
    constexpr std::size_t n = 333;
    const auto eps = random_row(n, 0, 1, 5), emission = random_row(n, 100, 800, 6),
               sky = random_row(n, 80, 500, 7), ground = random_row(n, 80, 800, 8),
               view = random_row(n, 0, 1, 9);
    Row down(n), up(n), net(n);
    longwave_on_surface(view, sky, ground, down);
    longwave_up(eps, emission, down, up);
    net_longwave(eps, emission, down, net);
    for (std::size_t i = 0; i < n; ++i) {
        CHECK(down[i] >= std::min(sky[i], ground[i]) - 1e-4F);
        CHECK(down[i] - up[i] ==
              Approx(net[i]).margin(2e-4).epsilon(0));  // three roundings below 800: 3e-5 each
    }
}

TEST_CASE("net_longwave: the worked example", "[physics][vector]") {
    // Emissivity 0.97, 300 K, under a sky after Brutsaert at 293.15 K and 15 hPa: computed from the formulas.
    const Row eps{0.97F}, emission{static_cast<float>(black_body_reference(300))},
        down{static_cast<float>(
            clear_longwave_reference(LongwaveFormula::brutsaert1975, 293.15, 15))};
    Row net(1);
    net_longwave(eps, emission, down, net);
    CHECK(net[0] == Approx(-116.112).margin(0.002).epsilon(0));
}

TEST_CASE("longwave_on_surface: surroundings as warm as the sky change nothing",
          "[physics][property]") {
    const Row view{0, 0.3F, 1}, flux{340, 340, 340};
    Row down(3);
    longwave_on_surface(view, flux, flux, down);
    for (const float value : down) CHECK(value == Approx(340).margin(1e-4).epsilon(0));
}

TEST_CASE("emissivity_from_ndvi: soil, mixture, plants, and nothing from nothing",
          "[physics][vector]") {
    // Sobrino et al. 2004: 0.98 - 0.042 red; 0.004 Pv + 0.986 with Pv = ((NDVI - 0.2)/0.3)^2; 0.99.
    const Row red{0.20F, 0.10F, 0.05F, 0.1F, nodata}, nir{0.22F, 0.2076923F, 0.45F, nodata, 0.3F};
    Row eps(5);
    emissivity_from_ndvi(red, nir, eps);
    CHECK(eps[0] == Approx(0.98 - 0.042 * 0.2).epsilon(1e-6));
    CHECK(eps[1] == Approx(0.004 * 0.25 + 0.986).epsilon(1e-6));  // NDVI 0.35
    CHECK(eps[2] == Approx(0.99).epsilon(1e-6));
    CHECK(std::isnan(eps[3]));
    CHECK(std::isnan(eps[4]));
}
