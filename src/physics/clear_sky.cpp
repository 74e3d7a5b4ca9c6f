#include "sunbudget/physics/clear_sky.hpp"

#include <cmath>

#include "sunbudget/physics/air_mass.hpp"

namespace sunbudget {

// All coefficients: Rigollier, Bauer & Wald 2000, with the equation they stand in named in words.
namespace {

/// Apparent minus true elevation, rad.
double esra_refraction(double g) noexcept {
    return 0.061359 * (0.1594 + g * (1.1230 + g * 0.065656)) / (1 + g * (28.9344 + g * 277.3971));
}

/// Rayleigh optical depth of clean dry air per air mass (Kasten 1996).
double rayleigh_depth(double m) noexcept {
    if (m > 20) return 1 / (10.4 + 0.718 * m);
    return 1 / (6.6296 + m * (1.7513 + m * (-0.1202 + m * (0.0065 + m * -0.00013))));
}

/// Diffuse light over extraterrestrial: transmission at the zenith times an angular function of sin
/// h.
double diffuse_share(double sin_h, double tl) noexcept {
    const double zenith = -0.015843 + tl * (0.030543 + tl * 0.0003797);
    double a0 = 0.26463 + tl * (-0.061581 + tl * 0.0031408);
    if (a0 * zenith < 0.002) a0 = 0.002 / zenith;
    const double a1 = 2.0402 + tl * (0.018945 + tl * -0.011161);
    const double a2 = -1.3025 + tl * (0.039231 + tl * 0.0085079);
    return zenith * (a0 + sin_h * (a1 + sin_h * a2));
}

}  // namespace

double esra2000_air_mass(double elevation_rad, double pressure_ratio) noexcept {
    return pressure_ratio * relative_air_mass(elevation_rad + esra_refraction(elevation_rad));
}

ClearSky esra2000(double extraterrestrial_normal_w_m2, double elevation_rad, double linke_turbidity,
                  double pressure_ratio) noexcept {
    if (elevation_rad <= 0) return {0, 0};
    const double m = esra2000_air_mass(elevation_rad, pressure_ratio);
    const double beam = std::exp(-0.8662 * linke_turbidity * m * rayleigh_depth(m));
    return {extraterrestrial_normal_w_m2 * beam,
            extraterrestrial_normal_w_m2 * diffuse_share(std::sin(elevation_rad), linke_turbidity)};
}

}  // namespace sunbudget
