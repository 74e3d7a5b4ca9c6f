#include "sunbudget/physics/surface_balance.hpp"

#include <array>
#include <cassert>
#include <cmath>
#include <limits>

#include "sunbudget/base/simd.hpp"
#include "sunbudget/base/units.hpp"

namespace sunbudget {

namespace {

SUNBUDGET_CLONES void down_row(std::size_t n, const float* view, const float* sky,
                               const float* ground, float* out) noexcept {
    for (std::size_t i = 0; i < n; ++i) out[i] = view[i] * sky[i] + (1 - view[i]) * ground[i];
}
SUNBUDGET_CLONES void up_row(std::size_t n, const float* eps, const float* emission,
                             const float* down, float* out) noexcept {
    for (std::size_t i = 0; i < n; ++i) out[i] = eps[i] * emission[i] + (1 - eps[i]) * down[i];
}
SUNBUDGET_CLONES void net_row(std::size_t n, const float* eps, const float* emission,
                              const float* down, float* out) noexcept {
    for (std::size_t i = 0; i < n; ++i) out[i] = eps[i] * (down[i] - emission[i]);
}

// Sobrino et al. 2004: thresholds of the NDVI, and the emissivities of soil, mixture and plants.
SUNBUDGET_CLONES void ndvi_row(std::size_t n, const float* red, const float* nir,
                               float* out) noexcept {
    constexpr float soil_below = 0.2F, plants_above = 0.5F;
    for (std::size_t i = 0; i < n; ++i) {
        const float ndvi = (nir[i] - red[i]) / (nir[i] + red[i]);
        const float part = (ndvi - soil_below) / (plants_above - soil_below);
        const float mixed = 0.004F * part * part + 0.986F;
        const float soil = 0.98F - 0.042F * red[i];
        float value = ndvi > plants_above ? 0.99F : mixed;
        value = ndvi < soil_below ? soil : value;
        out[i] = value;
    }
}

/// One step of Newton's method on a function that rises and bends upwards: after the first step it comes
/// down on the root from above.
template <class R>
R closer(R t, R emissivity, R gain, R exchange) noexcept {
    const R cube = static_cast<R>(stefan_boltzmann_w_m2_k4) * emissivity * t * t * t;
    return t - (cube * t + exchange * t - gain) / (4 * cube + exchange);
}

// From here no surface on Earth needs more steps than these (see the test): 8 in float, 40 in double.
constexpr double first_guess_k = 330;

SUNBUDGET_CLONES void balance_row(std::size_t n, const float* absorbed, const float* eps,
                                  const float* down, const float* air, float exchange,
                                  float* out) noexcept {
    constexpr int steps = 8;
    for (std::size_t i = 0; i < n; ++i) {
        const float gain = absorbed[i] + eps[i] * down[i] + exchange * air[i];
        float t = static_cast<float>(first_guess_k);
        for (int step = 0; step < steps; ++step) t = closer(t, eps[i], gain, exchange);
        out[i] = t;
    }
}

// ASTM E1980-11: the conditions, the two reference surfaces, the coefficients of heat exchange, the scope.
constexpr double standard_sun_w_m2 = 1000;
constexpr double standard_air_k = 310;
constexpr double standard_sky_k = 300;
constexpr double reference_emissivity = 0.90;
constexpr double black_albedo = 0.05, white_albedo = 0.80;
constexpr float least_emissivity = 0.1F;
constexpr std::array exchange_w_m2_k{5.0, 12.0, 30.0};

double standard_sky_w_m2() noexcept {
    return stefan_boltzmann_w_m2_k4 * standard_sky_k * standard_sky_k * standard_sky_k *
           standard_sky_k;
}
double standard_temperature_k(double albedo, double emissivity, Wind wind) noexcept {
    return balanced_temperature_k((1 - albedo) * standard_sun_w_m2, emissivity, standard_sky_w_m2(),
                                  standard_air_k, heat_exchange_w_m2_k(wind));
}

SUNBUDGET_CLONES void index_row(std::size_t n, const float* albedo, const float* eps, float sun,
                                float sky, float air, float exchange, float black_k, float scale,
                                float* out) noexcept {
    constexpr int steps = 8;
    constexpr float none = std::numeric_limits<float>::quiet_NaN();
    for (std::size_t i = 0; i < n; ++i) {
        const float gain = (1 - albedo[i]) * sun + eps[i] * sky + exchange * air;
        float t = static_cast<float>(first_guess_k);
        for (int step = 0; step < steps; ++step) t = closer(t, eps[i], gain, exchange);
        out[i] = eps[i] > least_emissivity ? (black_k - t) * scale : none;
    }
}

}  // namespace

void longwave_on_surface(std::span<const float> sky_view, std::span<const float> sky,
                         std::span<const float> surroundings, std::span<float> down) noexcept {
    assert(sky_view.size() == down.size() && sky.size() == down.size() &&
           surroundings.size() == down.size());
    down_row(down.size(), sky_view.data(), sky.data(), surroundings.data(), down.data());
}

void longwave_up(std::span<const float> emissivity, std::span<const float> emission,
                 std::span<const float> down, std::span<float> up) noexcept {
    assert(emissivity.size() == up.size() && emission.size() == up.size() &&
           down.size() == up.size());
    up_row(up.size(), emissivity.data(), emission.data(), down.data(), up.data());
}

void net_longwave(std::span<const float> emissivity, std::span<const float> emission,
                  std::span<const float> down, std::span<float> net) noexcept {
    assert(emissivity.size() == net.size() && emission.size() == net.size() &&
           down.size() == net.size());
    net_row(net.size(), emissivity.data(), emission.data(), down.data(), net.data());
}

void emissivity_from_ndvi(std::span<const float> red, std::span<const float> nir,
                          std::span<float> emissivity) noexcept {
    assert(red.size() == emissivity.size() && nir.size() == emissivity.size());
    ndvi_row(emissivity.size(), red.data(), nir.data(), emissivity.data());
}

double balanced_temperature_k(double absorbed_w_m2, double emissivity, double longwave_down_w_m2,
                              double air_k, double exchange) noexcept {
    constexpr int steps = 40;
    const double gain = absorbed_w_m2 + emissivity * longwave_down_w_m2 + exchange * air_k;
    double t = first_guess_k;
    for (int step = 0; step < steps; ++step) t = closer(t, emissivity, gain, exchange);
    return t;
}

void balanced_temperature(std::span<const float> absorbed_w_m2, std::span<const float> emissivity,
                          std::span<const float> longwave_down_w_m2, std::span<const float> air_k,
                          float exchange, std::span<float> temperature_k) noexcept {
    assert(absorbed_w_m2.size() == temperature_k.size() &&
           emissivity.size() == temperature_k.size());
    assert(longwave_down_w_m2.size() == temperature_k.size() &&
           air_k.size() == temperature_k.size());
    balance_row(temperature_k.size(), absorbed_w_m2.data(), emissivity.data(),
                longwave_down_w_m2.data(), air_k.data(), exchange, temperature_k.data());
}

Wind wind_case(double wind_m_s) noexcept {
    if (wind_m_s < 2) return Wind::low;
    return wind_m_s < 6 ? Wind::medium : Wind::high;
}

double heat_exchange_w_m2_k(Wind wind) noexcept {
    return exchange_w_m2_k[static_cast<std::size_t>(wind)];
}

double solar_reflectance_index(double albedo, double emissivity, Wind wind) noexcept {
    const double black_k = standard_temperature_k(black_albedo, reference_emissivity, wind);
    const double white_k = standard_temperature_k(white_albedo, reference_emissivity, wind);
    return 100 * (black_k - standard_temperature_k(albedo, emissivity, wind)) / (black_k - white_k);
}

void solar_reflectance_index(std::span<const float> albedo, std::span<const float> emissivity,
                             Wind wind, std::span<float> index) noexcept {
    assert(albedo.size() == index.size() && emissivity.size() == index.size());
    const double black_k = standard_temperature_k(black_albedo, reference_emissivity, wind);
    const double white_k = standard_temperature_k(white_albedo, reference_emissivity, wind);
    index_row(index.size(), albedo.data(), emissivity.data(), static_cast<float>(standard_sun_w_m2),
              static_cast<float>(standard_sky_w_m2()), static_cast<float>(standard_air_k),
              static_cast<float>(heat_exchange_w_m2_k(wind)), static_cast<float>(black_k),
              static_cast<float>(100 / (black_k - white_k)), index.data());
}

}  // namespace sunbudget
