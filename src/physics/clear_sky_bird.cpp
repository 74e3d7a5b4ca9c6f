#include <cmath>

#include "sunbudget/physics/air_mass.hpp"
#include "sunbudget/physics/clear_sky.hpp"

namespace sunbudget {

// All coefficients: Bird & Hulstrom 1981, SERI/TR-642-761.
namespace {

constexpr double forward_scattering = 0.84;  // Ba
constexpr double absorptance = 0.1;          // K1

double ozone_transmittance(double x) noexcept {
    return 1 - 0.1611 * x * std::pow(1 + 139.48 * x, -0.3035) -
           0.002715 * x / (1 + 0.044 * x + 0.0003 * x * x);
}

double water_transmittance(double x) noexcept {
    return 1 - 2.4959 * x / (std::pow(1 + 79.034 * x, 0.6828) + 6.385 * x);
}

double aerosol_transmittance(double depth, double air_mass) noexcept {
    return std::exp(-std::pow(depth, 0.873) * (1 + depth - std::pow(depth, 0.7088)) *
                    std::pow(air_mass, 0.9108));
}

}  // namespace

BirdPath bird_hulstrom1981_path(double elevation_rad, const BirdAir& air,
                                double pressure_ratio) noexcept {
    BirdPath path{};
    const double m = relative_air_mass_kasten1966(elevation_rad);
    const double mp = m * pressure_ratio;
    path.air_mass = m;
    path.rayleigh = std::exp(-0.0903 * std::pow(mp, 0.84) * (1 + mp - std::pow(mp, 1.01)));
    path.ozone = ozone_transmittance(air.ozone_atm_cm * m);
    path.gases = std::exp(-0.0127 * std::pow(mp, 0.26));
    path.water = water_transmittance(air.water_cm * m);
    path.aerosol = aerosol_transmittance(0.2758 * air.aerosol380 + 0.35 * air.aerosol500, m);
    path.aerosol_absorption = 1 - absorptance * (1 - m + std::pow(m, 1.06)) * (1 - path.aerosol);
    path.sky_albedo =
        0.0685 + (1 - forward_scattering) * (1 - path.aerosol / path.aerosol_absorption);
    return path;
}

BirdSky bird_hulstrom1981(double extraterrestrial_normal_w_m2, double elevation_rad,
                          const BirdAir& air, double pressure_ratio) noexcept {
    if (elevation_rad <= 0) return {0, 0, 0};
    const auto t = bird_hulstrom1981_path(elevation_rad, air, pressure_ratio);
    const double absorbed = t.ozone * t.gases * t.water;
    const double scattered =
        0.5 * (1 - t.rayleigh) + forward_scattering * (1 - t.aerosol / t.aerosol_absorption);
    const double sky = 0.79 * absorbed * t.aerosol_absorption * scattered /
                       (1 - t.air_mass + std::pow(t.air_mass, 1.02));
    return {extraterrestrial_normal_w_m2 * 0.9662 * t.rayleigh * absorbed * t.aerosol,
            extraterrestrial_normal_w_m2 * std::sin(elevation_rad) * sky, t.sky_albedo};
}

}  // namespace sunbudget
