#include "sunbudget/physics/longwave.hpp"

#include <algorithm>
#include <cassert>
#include <cmath>
#include <limits>

#include "float_math.hpp"
#include "sunbudget/base/simd.hpp"
#include "sunbudget/base/units.hpp"

namespace sunbudget {

namespace {

template <class R>
R sigma_t4(R t) noexcept {
    const R square = t * t;
    return static_cast<R>(stefan_boltzmann_w_m2_k4) * square * square;
}

template <class R>
R power_of(R base, double exponent) noexcept {
    return exp_of(static_cast<R>(exponent) * log_of(base));
}

// One function a formula: t in K, e in hPa, out in W m-2. A formula without vapour still asks for it, so
// that a pixel without humidity is nodata under every formula.

template <class R>
R brunt(R t, R e) noexcept {
    return (R(0.52) + R(0.065) * std::sqrt(e)) *
           sigma_t4(t);  // a, b of the 1932 paper for e in hPa
}
template <class R>
R swinbank(R t, R e) noexcept {
    return R(9.365e-6) * t * t * sigma_t4(t) + (e - e);
}
template <class R>
R idso_jackson(R t, R e) noexcept {
    const R d = R(273) - t;  // 273, not 273.15
    return (R(1) - R(0.261) * exp_of(R(-7.77e-4) * d * d)) * sigma_t4(t) + (e - e);
}
template <class R>
R brutsaert(R t, R e) noexcept {
    return R(1.24) * power_of(e / t, 1.0 / 7) * sigma_t4(t);
}
template <class R>
R idso(R t, R e) noexcept {
    return (R(0.70) + R(5.95e-5) * e * exp_of(R(1500) / t)) * sigma_t4(t);
}
template <class R>
R prata(R t, R e) noexcept {
    const R w = R(46.5) * e / t;  // cm of precipitable water; the root covers the whole exponent
    return (R(1) - (R(1) + w) * exp_of(-std::sqrt(R(1.2) + R(3) * w))) * sigma_t4(t);
}
template <class R>
R dilley_obrien(R t, R e) noexcept {
    const R w = R(465) * e / t;  // kg m-2; the common misprint mixes it with cm
    const R x = t / R(273.16);
    const R square = x * x;
    return R(59.38) + R(113.7) * square * square * square + R(96.96) * std::sqrt(w / R(25));
}
template <class R>
R angstrom(R t, R e) noexcept {
    return (R(0.83) - R(0.18) * exp_of(R(-0.067 * 2.302585092994046) * e)) *
           sigma_t4(t);  // 10^(-0.067 e)
}
template <class R>
R satterlund(R t, R e) noexcept {
    return R(1.08) * (R(1) - exp_of(-exp_of(t / R(2016) * log_of(e)))) * sigma_t4(t);  // e^(T/2016)
}
template <class R>
R konzelmann(R t, R e) noexcept {
    return (R(0.23) + R(0.484) * power_of(R(100) * e / t, 1.0 / 8)) * sigma_t4(t);  // e in Pa here
}
template <class R>
R maykut_church(R t, R e) noexcept {
    return R(0.7855) * sigma_t4(t) + (e - e);
}

/// use(function of t and e) with the formula's function. Inlined wherever it stands, so that a row's loop is made
/// once for each formula and CPU: a version for each CPU cannot be made of a template.
template <class Use>
[[gnu::always_inline]] inline auto with_formula(LongwaveFormula formula, Use use) noexcept {
    switch (formula) {
        case LongwaveFormula::dilley_obrien1998:
            return use([](auto t, auto e) { return dilley_obrien(t, e); });
        case LongwaveFormula::prata1996:
            return use([](auto t, auto e) { return prata(t, e); });
        case LongwaveFormula::brutsaert1975:
            return use([](auto t, auto e) { return brutsaert(t, e); });
        case LongwaveFormula::brunt1932:
            return use([](auto t, auto e) { return brunt(t, e); });
        case LongwaveFormula::swinbank1963:
            return use([](auto t, auto e) { return swinbank(t, e); });
        case LongwaveFormula::idso_jackson1969:
            return use([](auto t, auto e) { return idso_jackson(t, e); });
        case LongwaveFormula::idso1981:
            return use([](auto t, auto e) { return idso(t, e); });
        case LongwaveFormula::angstrom1918:
            return use([](auto t, auto e) { return angstrom(t, e); });
        case LongwaveFormula::satterlund1979:
            return use([](auto t, auto e) { return satterlund(t, e); });
        case LongwaveFormula::konzelmann1994:
            return use([](auto t, auto e) { return konzelmann(t, e); });
        case LongwaveFormula::maykut_church1973:
            break;
    }
    return use([](auto t, auto e) { return maykut_church(t, e); });
}

SUNBUDGET_CLONES void clear_row(LongwaveFormula formula, std::size_t n, const float* t,
                                const float* e, float* out) noexcept {
    with_formula(
        formula, [=](auto one) __attribute__((always_inline)) {
            for (std::size_t i = 0; i < n; ++i) out[i] = one(t[i], e[i]);
        });
}

SUNBUDGET_CLONES void cloud_row(std::size_t n, const float* t, float factor, float added,
                                float* flux) noexcept {
    for (std::size_t i = 0; i < n; ++i) {
        const float black = sigma_t4(t[i]);
        const float cloudy = factor * flux[i] + added * black;
        flux[i] = cloudy > black ? black : cloudy;
    }
}

SUNBUDGET_CLONES void black_row(std::size_t n, const float* t, float* flux) noexcept {
    for (std::size_t i = 0; i < n; ++i) flux[i] = sigma_t4(t[i]);
}

}  // namespace

double clear_longwave_w_m2(LongwaveFormula formula, double temperature_k,
                           double vapour_pressure_hpa) noexcept {
    return with_formula(formula, [=](auto one) { return one(temperature_k, vapour_pressure_hpa); });
}

void clear_longwave(LongwaveFormula formula, std::span<const float> temperature_k,
                    std::span<const float> vapour_pressure_hpa,
                    std::span<float> flux_w_m2) noexcept {
    assert(temperature_k.size() == flux_w_m2.size() &&
           vapour_pressure_hpa.size() == flux_w_m2.size());
    clear_row(formula, flux_w_m2.size(), temperature_k.data(), vapour_pressure_hpa.data(),
              flux_w_m2.data());
}

CloudTerms cloud_terms(LongwaveCloud law, double cloud) noexcept {
    switch (law) {
        case LongwaveCloud::unsworth_monteith1975:
            return {1 - 0.84 * cloud, 0.84 * cloud};
        case LongwaveCloud::crawford_duchon1999:
            return {1 - cloud, cloud};
        case LongwaveCloud::sugita_brutsaert1993:
            return {1 + 0.0496 * std::pow(cloud, 2.45), 0};
        case LongwaveCloud::maykut_church1973:
            return {1 + 0.22 * std::pow(cloud, 2.75), 0};
        case LongwaveCloud::jacobs1978:
            break;
    }
    return {1 + 0.26 * cloud, 0};
}

double cloud_number(double global_w_m2, double clear_w_m2) noexcept {
    return std::clamp(1 - global_w_m2 / clear_w_m2, 0.0, 1.0);
}

double cloudy_longwave_w_m2(double clear_w_m2, double temperature_k,
                            const CloudTerms& terms) noexcept {
    const double black = sigma_t4(temperature_k);
    const double cloudy = terms.factor * clear_w_m2 + terms.added * black;
    return cloudy > black ? black : cloudy;
}

void cloudy_longwave(std::span<const float> temperature_k, const CloudTerms& terms,
                     std::span<float> flux_w_m2) noexcept {
    assert(temperature_k.size() == flux_w_m2.size());
    cloud_row(flux_w_m2.size(), temperature_k.data(), static_cast<float>(terms.factor),
              static_cast<float>(terms.added), flux_w_m2.data());
}

void cloudy_longwave(LongwaveCloud law, std::span<const float> temperature_k,
                     std::span<const float> cloud, std::span<float> flux_w_m2) noexcept {
    assert(temperature_k.size() == flux_w_m2.size() && cloud.size() == flux_w_m2.size());
    constexpr double none = std::numeric_limits<double>::quiet_NaN();
    for (std::size_t i = 0; i < flux_w_m2.size(); ++i) {
        const double share = cloud[i] >= 0 && cloud[i] <= 1 ? static_cast<double>(cloud[i]) : none;
        flux_w_m2[i] = static_cast<float>(
            cloudy_longwave_w_m2(static_cast<double>(flux_w_m2[i]),
                                 static_cast<double>(temperature_k[i]), cloud_terms(law, share)));
    }
}

double black_body_w_m2(double temperature_k) noexcept {
    return sigma_t4(temperature_k);
}

void black_body(std::span<const float> temperature_k, std::span<float> flux_w_m2) noexcept {
    assert(temperature_k.size() == flux_w_m2.size());
    black_row(flux_w_m2.size(), temperature_k.data(), flux_w_m2.data());
}

}  // namespace sunbudget
