#pragma once

#include <cmath>

#include "sunbudget/base/units.hpp"
#include "sunbudget/physics/longwave.hpp"

/// The row kernels of longwave.hpp and surface_balance.hpp in double precision, written from the papers
/// with the library's own functions, one value at a time.
namespace sunbudget::test {

inline double black_body_reference(double t) {
    return stefan_boltzmann_w_m2_k4 * std::pow(t, 4);
}

inline double clear_longwave_reference(LongwaveFormula formula, double t, double e) {
    const double black = black_body_reference(t);
    const double w_cm = 46.5 * e / t;
    switch (formula) {
        case LongwaveFormula::brunt1932:
            return black * (0.52 + 0.065 * std::sqrt(e));
        case LongwaveFormula::swinbank1963:
            return black * 9.365e-6 * t * t;
        case LongwaveFormula::idso_jackson1969:
            return black * (1 - 0.261 * std::exp(-7.77e-4 * std::pow(273 - t, 2)));
        case LongwaveFormula::brutsaert1975:
            return black * 1.24 * std::pow(e / t, 1.0 / 7);
        case LongwaveFormula::idso1981:
            return black * (0.70 + 5.95e-5 * e * std::exp(1500 / t));
        case LongwaveFormula::prata1996:
            return black * (1 - (1 + w_cm) * std::exp(-std::sqrt(1.2 + 3 * w_cm)));
        case LongwaveFormula::dilley_obrien1998:
            return 59.38 + 113.7 * std::pow(t / 273.16, 6) + 96.96 * std::sqrt(10 * w_cm / 25);
        case LongwaveFormula::angstrom1918:
            return black * (0.83 - 0.18 * std::pow(10, -0.067 * e));
        case LongwaveFormula::satterlund1979:
            return black * 1.08 * (1 - std::exp(-std::pow(e, t / 2016)));
        case LongwaveFormula::konzelmann1994:
            return black * (0.23 + 0.484 * std::pow(100 * e / t, 0.125));
        case LongwaveFormula::maykut_church1973:
            break;
    }
    return black * 0.7855;
}

/// By halving: the balance rises with the temperature.
inline double balanced_temperature_reference(double absorbed, double emissivity, double down,
                                             double air, double exchange) {
    double low = 100, high = 1000;
    for (int i = 0; i < 100; ++i) {
        const double t = (low + high) / 2;
        const double left = absorbed + emissivity * down + exchange * (air - t) -
                            emissivity * black_body_reference(t);
        (left > 0 ? low : high) = t;
    }
    return low;
}

}  // namespace sunbudget::test
