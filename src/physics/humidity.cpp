#include "sunbudget/physics/humidity.hpp"

#include <cassert>
#include <cmath>

#include "float_math.hpp"
#include "sunbudget/base/simd.hpp"

namespace sunbudget {

namespace {
// FAO-56 (1998) eq. 11, in hPa.
constexpr double at_freezing_hpa = 6.108;
constexpr double slope = 17.27;
constexpr double pole_celsius = -237.3;
constexpr double freezing_k = 273.15;

SUNBUDGET_CLONES void saturation_row(std::size_t n, const float* t, float* out) noexcept {
    for (std::size_t i = 0; i < n; ++i) {
        const float celsius = t[i] - static_cast<float>(freezing_k);
        out[i] = static_cast<float>(at_freezing_hpa) *
                 exp_of(static_cast<float>(slope) * celsius /
                        (celsius - static_cast<float>(pole_celsius)));
    }
}
}  // namespace

double saturation_vapour_pressure_hpa(double temperature_k) noexcept {
    const double celsius = temperature_k - freezing_k;
    return at_freezing_hpa * std::exp(slope * celsius / (celsius - pole_celsius));
}

void saturation_vapour_pressure(std::span<const float> temperature_k,
                                std::span<float> pressure_hpa) noexcept {
    assert(temperature_k.size() == pressure_hpa.size());
    saturation_row(pressure_hpa.size(), temperature_k.data(), pressure_hpa.data());
}

double dew_point_k(double vapour_pressure_hpa) noexcept {
    const double x = std::log(vapour_pressure_hpa / at_freezing_hpa);
    return freezing_k - pole_celsius * x / (slope - x);
}

Air air_at_height(const Air& air, double rise_m, double lapse_k_m) noexcept {
    const double there_k = air.temperature_k - lapse_k_m * rise_m;
    const double share =
        saturation_vapour_pressure_hpa(there_k) / saturation_vapour_pressure_hpa(air.temperature_k);
    return {there_k, air.vapour_pressure_hpa * share};
}

double pressure_at_height_hpa(double pressure_hpa, double temperature_k, double rise_m,
                              double lapse_k_m) noexcept {
    constexpr double gravity_m_s2 = 9.80665;
    constexpr double dry_air_j_kg_k = 287.05;
    const double mean_k = temperature_k - lapse_k_m * rise_m / 2;
    return pressure_hpa * std::exp(-gravity_m_s2 * rise_m / (dry_air_j_kg_k * mean_k));
}

}  // namespace sunbudget
