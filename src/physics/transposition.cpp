#include "sunbudget/physics/transposition.hpp"

#include <algorithm>
#include <array>
#include <cmath>
#include <cstddef>

namespace sunbudget {

namespace {

/// Perez et al. 1990 divide by no less than this, and Hay & Davies need such a floor as well.
constexpr double least_cos_zenith = 0.08715574274765817;  // cos 85 deg

/// Perez et al. 1990, epsilon with the zenith angle in radians.
constexpr double kappa = 1.041;

/// Upper ends of the clearness bins 1 to 7, Perez et al. 1990, table 1.
constexpr std::array<double, 7> bin_ends{1.065, 1.230, 1.500, 1.950, 2.800, 4.500, 6.200};

struct Coefficients {
    double f11, f12, f13, f21, f22, f23;
};

/// Perez et al. 1990, table 6 (all sites), decimals of the authors' code.
constexpr std::array<Coefficients, 8> all_sites{{
    {-0.0083117, 0.5877285, -0.0620636, -0.0596012, 0.0721249, -0.0220216},
    {0.1299457, 0.6825954, -0.1513752, -0.0189325, 0.0659650, -0.0288748},
    {0.3296958, 0.4868735, -0.2210958, 0.0554140, -0.0639588, -0.0260542},
    {0.5682053, 0.1874525, -0.2951290, 0.1088631, -0.1519229, -0.0139754},
    {0.8730280, -0.3920403, -0.3616149, 0.2255647, -0.4620442, 0.0012448},
    {1.1326077, -1.2367284, -0.4118494, 0.2877813, -0.8230357, 0.0558651},
    {1.0601591, -1.5999137, -0.3589221, 0.2642124, -1.1272340, 0.1310694},
    {0.6777470, -0.3272588, -0.2504286, 0.1561313, -1.3765031, 0.2506212},
}};

/// `share` of the diffuse light comes from around the sun.
SkyParts around_the_sun(const SkyLight& light, double share) noexcept {
    const double cos_zenith = std::max(std::cos(light.zenith_rad), least_cos_zenith);
    return {light.diffuse_w_m2 * share / cos_zenith, light.diffuse_w_m2 * (1 - share), 0};
}

}  // namespace

double tilted_diffuse_w_m2(const SkyParts& parts, double cos_incidence, double slope_rad) noexcept {
    return parts.circumsolar_normal_w_m2 * std::max(0.0, cos_incidence) +
           parts.isotropic_w_m2 * (1 + std::cos(slope_rad)) / 2 +
           parts.horizon_w_m2 * std::sin(slope_rad);
}

SkyParts sky_liu_jordan1963(const SkyLight& light) noexcept {
    return {0, light.diffuse_w_m2, 0};
}

SkyParts sky_hay_davies1980(const SkyLight& light) noexcept {
    return around_the_sun(light, light.beam_normal_w_m2 / light.extraterrestrial_normal_w_m2);
}

PerezState perez1990_state(const SkyLight& light, double air_mass) noexcept {
    const double z = light.zenith_rad;
    const double bend = kappa * z * z * z;
    PerezState state;
    state.clearness =
        ((light.diffuse_w_m2 + light.beam_normal_w_m2) / light.diffuse_w_m2 + bend) / (1 + bend);
    state.brightness = light.diffuse_w_m2 * air_mass / light.extraterrestrial_normal_w_m2;
    const auto end = std::upper_bound(bin_ends.begin(), bin_ends.end(), state.clearness);
    const auto bin = static_cast<std::size_t>(end - bin_ends.begin());
    state.bin = static_cast<int>(bin) + 1;
    const auto& f = all_sites[bin];
    state.circumsolar = std::max(0.0, f.f11 + f.f12 * state.brightness + f.f13 * z);
    state.horizon = f.f21 + f.f22 * state.brightness + f.f23 * z;
    return state;
}

SkyParts sky_perez1990(const SkyLight& light, double air_mass) noexcept {
    if (light.diffuse_w_m2 == 0) return {};
    const auto state = perez1990_state(light, air_mass);
    auto parts = around_the_sun(light, state.circumsolar);
    parts.horizon_w_m2 = light.diffuse_w_m2 * state.horizon;
    return parts;
}

}  // namespace sunbudget
