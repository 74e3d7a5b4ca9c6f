#include <algorithm>
#include <cmath>

#include "sunbudget/physics/clear_sky.hpp"

namespace sunbudget {

namespace {

/// Ineichen & Perez 2002: how light dims with height, for the molecules and for the haze.
struct HeightFactors {
    double fh1, fh2;
    explicit HeightFactors(double height_m) noexcept
        : fh1(std::exp(-height_m / 8000)), fh2(std::exp(-height_m / 1250)) {}
};

}  // namespace

// Coefficients of Ineichen & Perez 2002 in the next two functions.
IneichenGlobal ineichen_perez2002_global(double absolute_air_mass, double linke_turbidity,
                                         double height_m) noexcept {
    const HeightFactors f(height_m);
    const double cg1 = 5.09e-5 * height_m + 0.868;
    const double cg2 = 3.92e-5 * height_m + 0.0387;
    const double dimming = cg2 * (f.fh1 + f.fh2 * (linke_turbidity - 1));
    // Where the derivative of -dimming AM + 0.01 AM^1.8 is zero.
    const double clearest_m = std::pow(dimming / 0.018, 1 / 0.8);
    const double m = std::min(absolute_air_mass, clearest_m);
    return {cg1 * std::exp(-dimming * absolute_air_mass),
            cg1 * std::exp(-dimming * m + 0.01 * std::pow(m, 1.8))};
}

ClearSky ineichen_perez2002(double extraterrestrial_normal_w_m2, double elevation_rad,
                            double absolute_air_mass, double linke_turbidity,
                            double height_m) noexcept {
    if (elevation_rad <= 0) return {0, 0};
    const double sine = std::sin(elevation_rad);
    const double fh1 = HeightFactors(height_m).fh1;
    const auto global = ineichen_perez2002_global(absolute_air_mass, linke_turbidity, height_m);
    const double through =
        (0.664 + 0.163 / fh1) * std::exp(-0.09 * absolute_air_mass * (linke_turbidity - 1));
    const double most =
        global.enhanced * (1 - (0.1 - 0.2 * std::exp(-linke_turbidity)) / (0.1 + 0.882 / fh1));
    const double beam = std::min(through, most);
    return {extraterrestrial_normal_w_m2 * beam,
            extraterrestrial_normal_w_m2 * sine * (global.enhanced - beam)};
}

double asce2005_water_mm(double vapour_pressure_kpa, double pressure_kpa) noexcept {
    return 0.14 * vapour_pressure_kpa * pressure_kpa + 2.1;
}

ClearIndices asce2005_indices(double sin_elevation, double pressure_kpa, double vapour_pressure_kpa,
                              double turbidity_coefficient) noexcept {
    const double water_mm = asce2005_water_mm(vapour_pressure_kpa, pressure_kpa);
    const double beam =
        0.98 * std::exp(-0.00146 * pressure_kpa / (turbidity_coefficient * sin_elevation) -
                        0.075 * std::pow(water_mm / sin_elevation, 0.4));
    return {beam, beam >= 0.15 ? 0.35 - 0.36 * beam : 0.18 + 0.82 * beam};
}

ClearSky asce2005(double extraterrestrial_normal_w_m2, double elevation_rad, double pressure_kpa,
                  double vapour_pressure_kpa, double turbidity_coefficient) noexcept {
    if (elevation_rad <= 0) return {0, 0};
    const double sine = std::sin(elevation_rad);
    const auto k = asce2005_indices(sine, pressure_kpa, vapour_pressure_kpa, turbidity_coefficient);
    return {extraterrestrial_normal_w_m2 * k.beam, extraterrestrial_normal_w_m2 * sine * k.diffuse};
}

}  // namespace sunbudget
