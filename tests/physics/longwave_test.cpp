#include "sunbudget/physics/longwave.hpp"

#include <array>
#include <catch2/catch.hpp>
#include <cmath>
#include <limits>
#include <string>
#include <vector>

#include "reference/longwave.hpp"
#include "sunbudget/physics/humidity.hpp"
#include "support/vectors.hpp"

using namespace sunbudget;
using namespace sunbudget::test;

namespace {

using F = LongwaveFormula;
using C = LongwaveCloud;
using Row = std::vector<float>;
constexpr float nodata = std::numeric_limits<float>::quiet_NaN();

struct NamedFormula {
    const char* name;
    F formula;
};
constexpr std::array formulas{NamedFormula{"dilley-obrien1998", F::dilley_obrien1998},
                              NamedFormula{"prata1996", F::prata1996},
                              NamedFormula{"brutsaert1975", F::brutsaert1975},
                              NamedFormula{"brunt1932", F::brunt1932},
                              NamedFormula{"swinbank1963", F::swinbank1963},
                              NamedFormula{"idso-jackson1969", F::idso_jackson1969},
                              NamedFormula{"idso1981", F::idso1981},
                              NamedFormula{"angstrom1918", F::angstrom1918},
                              NamedFormula{"satterlund1979", F::satterlund1979},
                              NamedFormula{"konzelmann1994", F::konzelmann1994},
                              NamedFormula{"maykut-church1973", F::maykut_church1973}};

F formula_named(const std::string& name) {
    for (const auto& row : formulas)
        if (name == row.name) return row.formula;
    throw std::runtime_error("no formula " + name);
}

C law_named(const std::string& name) {
    constexpr std::array laws{"unsworth-monteith1975", "crawford-duchon1999",
                              "sugita-brutsaert1993", "maykut-church1973", "jacobs1978"};
    for (std::size_t i = 0; i < laws.size(); ++i)
        if (name == laws[i]) return static_cast<C>(i);
    throw std::runtime_error("no law " + name);
}

}  // namespace

TEST_CASE("clear_longwave: every formula's worked value", "[physics][vector]") {
    const auto table = read_table("vectors/longwave_clear.csv");
    REQUIRE(table.rows.size() == formulas.size());
    const double black = black_body_w_m2(293.15);
    for (std::size_t i = 0; i < table.rows.size(); ++i) {
        CAPTURE(table.rows[i][0]);
        const double flux = clear_longwave_w_m2(formula_named(table.rows[i][0]), 293.15, 15);
        CHECK(flux == Approx(table.number(i, "flux_w_m2")).margin(0.002).epsilon(0));
        if (!table.cell(i, "emissivity").empty())
            CHECK(flux / black == Approx(table.number(i, "emissivity")).margin(1e-6).epsilon(0));
    }
}

TEST_CASE("black_body: worked values", "[physics][vector]") {
    const auto table = read_table("vectors/black_body.csv");
    REQUIRE(table.rows.size() == 4);
    for (std::size_t i = 0; i < table.rows.size(); ++i)
        CHECK(black_body_w_m2(table.number(i, "t_k")) ==
              Approx(table.number(i, "flux_w_m2")).margin(1e-4).epsilon(0));
}

TEST_CASE("cloud_terms: every law's worked values over a clear sky after Brutsaert",
          "[physics][vector]") {
    const auto table = read_table("vectors/longwave_cloud.csv");
    REQUIRE(table.rows.size() == 25);
    const double clear =
        clear_longwave_w_m2(F::brutsaert1975, 293.15, 15) / black_body_w_m2(293.15);
    for (std::size_t i = 0; i < table.rows.size(); ++i) {
        CAPTURE(table.rows[i][0], table.rows[i][1]);
        const auto terms = cloud_terms(law_named(table.rows[i][0]), table.number(i, "cloud"));
        CHECK(terms.factor * clear + terms.added ==
              Approx(table.number(i, "emissivity")).margin(1e-6).epsilon(0));
    }
}

TEST_CASE("cloudy_longwave: never more than a black body at the air's temperature",
          "[physics][edge]") {
    // Jacobs' law gives an emissivity of 1.022 here.
    const double clear = clear_longwave_w_m2(F::brutsaert1975, 293.15, 15);
    CHECK(cloudy_longwave_w_m2(clear, 293.15, cloud_terms(C::jacobs1978, 1)) ==
          black_body_w_m2(293.15));
    CHECK(cloudy_longwave_w_m2(clear, 293.15, {}) == clear);
}

TEST_CASE("cloud_number: what clouds take of the sun, within 0 and 1", "[physics][property]") {
    CHECK(cloud_number(800, 800) == 0);
    CHECK(cloud_number(200, 800) == 0.75);
    CHECK(cloud_number(900, 800) == 0);  // brighter than clear: light from the clouds' edges
    CHECK(cloud_number(-3, 800) == 1);   // a pyranometer's offset
}

TEST_CASE("clear_longwave: a row agrees with the papers in double precision",
          "[physics][differential]") {
    // Ten or so float operations on fluxes below 500 W m-2, of which one unit in the last place is 3e-5.
    const auto formula = GENERATE(from_range(formulas));
    CAPTURE(formula.name);
    Row t, e;
    for (float kelvin = 200; kelvin <= 330; kelvin += 2.3F)
        for (float hpa = 0.05F; hpa < 60; hpa *= 1.4F) {
            t.push_back(kelvin);
            e.push_back(hpa);
        }
    Row out(t.size());
    clear_longwave(formula.formula, t, e, out);
    double worst = 0, worst_double = 0;
    for (std::size_t i = 0; i < out.size(); ++i) {
        const double reference = clear_longwave_reference(formula.formula, t[i], e[i]);
        // Idso's term has no bound: 60 hPa at 200 K is no air, and a relative error there.
        const double scale = std::max(1.0, reference / 500);
        worst = std::max(worst, std::abs(static_cast<double>(out[i]) - reference) / scale);
        worst_double = std::max(
            worst_double,
            std::abs(clear_longwave_w_m2(formula.formula, t[i], e[i]) - reference) / scale);
    }
    CHECK(worst < 0.002);
    CHECK(worst_double < 1e-9);
}

TEST_CASE("clear_longwave: nodata in either input is nodata out under every formula",
          "[physics][edge]") {
    const auto formula = GENERATE(from_range(formulas));
    CAPTURE(formula.name);
    const Row t{290, nodata, 290}, e{10, 10, nodata};
    Row out(3);
    clear_longwave(formula.formula, t, e, out);
    CHECK(out[0] == Approx(clear_longwave_w_m2(formula.formula, 290, 10)).epsilon(1e-5));
    CHECK(std::isnan(out[1]));
    CHECK(std::isnan(out[2]));
}

TEST_CASE("clear_longwave: dry air still radiates, and more vapour never less",
          "[physics][property]") {
    for (const auto& [name, formula] : formulas) {
        CAPTURE(name);
        const Row t(3, 280.0F), e{0, 5, 20};
        Row out(3);
        clear_longwave(formula, t, e, out);
        CHECK(std::isfinite(out[0]));
        CHECK(out[0] <= out[1]);
        CHECK(out[1] <= out[2]);
    }
}

TEST_CASE(
    "cloudy_longwave: a share for each pixel agrees with single values, and what is no share gives "
    "none",
    "[physics][differential]") {
    const auto law = GENERATE(C::unsworth_monteith1975, C::sugita_brutsaert1993, C::jacobs1978);
    const std::vector<float> t{285, 285, 285, 285, 285, 285},
        share{0, 0.25F, 1, -0.01F, 1.01F, std::numeric_limits<float>::quiet_NaN()};
    std::vector<float> flux(t.size(), 280);
    cloudy_longwave(law, t, share, flux);
    for (std::size_t i = 0; i < 3; ++i)  // one rounding to float below 400 W m-2
        CHECK(flux[i] == Approx(cloudy_longwave_w_m2(280, 285, cloud_terms(law, share[i])))
                             .margin(2e-5)
                             .epsilon(0));
    for (std::size_t i = 3; i < t.size(); ++i) CHECK(std::isnan(flux[i]));
}

TEST_CASE("cloudy_longwave: a row agrees with single values", "[physics][differential]") {
    Row t, flux;
    for (float kelvin = 230; kelvin < 320; kelvin += 1.7F) {
        t.push_back(kelvin);
        flux.push_back(0.8F * static_cast<float>(black_body_w_m2(kelvin)));
    }
    const auto terms = cloud_terms(C::jacobs1978, GENERATE(0.0, 0.4, 1.0));
    const Row clear = flux;
    cloudy_longwave(t, terms, flux);
    for (std::size_t i = 0; i < t.size(); ++i)  // five float operations on less than 600 W m-2
        CHECK(flux[i] ==
              Approx(cloudy_longwave_w_m2(clear[i], t[i], terms)).margin(3e-4).epsilon(0));
}

TEST_CASE("saturation_vapour_pressure: reproduces FAO-56 Table 2.3", "[physics][vector]") {
    const auto table = read_table("vectors/saturation_pressure.csv");
    REQUIRE(table.rows.size() == 9);
    for (std::size_t i = 0; i < table.rows.size(); ++i)
        CHECK(saturation_vapour_pressure_hpa(table.number(i, "t_c") + 273.15) / 10 ==
              Approx(table.number(i, "es_kpa")).margin(6e-4).epsilon(0));
}

TEST_CASE("saturation_vapour_pressure: a row agrees with single values",
          "[physics][differential]") {
    // The exponent reaches -40 and has 24 bits; exp makes a relative error of that absolute one.
    Row t{nodata}, out(132);
    for (float k = 200; k <= 330; ++k) t.push_back(k);
    saturation_vapour_pressure(t, out);
    CHECK(std::isnan(out[0]));
    for (std::size_t i = 1; i < t.size(); ++i)
        CHECK(out[i] == Approx(saturation_vapour_pressure_hpa(t[i])).epsilon(1e-5));
}

TEST_CASE("dew_point: the inverse of saturation, and near FAO-56 eq. 3-11", "[physics][property]") {
    for (double k = 235; k < 320; k += 0.9) {
        const double e = saturation_vapour_pressure_hpa(k);
        CHECK(dew_point_k(e) == Approx(k).margin(1e-9).epsilon(0));
        // The paper's rounded constants: (116.91 + 237.3 ln ea) / (16.78 - ln ea), ea in kPa.
        const double x = std::log(e / 10);
        CHECK(dew_point_k(e) - 273.15 ==
              Approx((116.91 + 237.3 * x) / (16.78 - x)).margin(0.02).epsilon(0));
    }
}

TEST_CASE("air_at_height: colder by the lapse, as humid as before", "[physics][property]") {
    const Air valley{293.15, 0.6 * saturation_vapour_pressure_hpa(293.15)};
    const auto peak = air_at_height(valley, 1000, 0.0065);
    CHECK(peak.temperature_k == Approx(286.65).epsilon(1e-14));
    CHECK(peak.vapour_pressure_hpa / saturation_vapour_pressure_hpa(peak.temperature_k) ==
          Approx(0.6).epsilon(1e-14));
    const auto back = air_at_height(peak, -1000, 0.0065);
    CHECK(back.vapour_pressure_hpa == Approx(valley.vapour_pressure_hpa).epsilon(1e-14));
    CHECK(air_at_height(valley, 200, -0.01).temperature_k ==
          Approx(295.15).epsilon(1e-14));  // an inversion
}

TEST_CASE("pressure_at_height: the standard atmosphere's at 1000 m", "[physics][vector]") {
    // ISO 2533:1975 prints 898.76 hPa; the mean temperature stands for the power law: 0.1 hPa.
    CHECK(pressure_at_height_hpa(1013.25, 288.15, 1000, 0.0065) ==
          Approx(898.76).margin(0.1).epsilon(0));
    CHECK(pressure_at_height_hpa(900, 280, 0, 0.0065) == 900);
}
