#pragma once

#include <cmath>
#include <vector>

/// The row kernels of shortwave.hpp in double precision, one value at a time.
namespace sunbudget::test {

inline double absorbed_reference(double albedo_direct, double direct, double albedo_diffuse,
                                 double diffuse) {
    return direct - albedo_direct * direct + (diffuse - albedo_diffuse * diffuse);
}

/// The same by finite steps of each input, a hundredth of its uncertainty to either side.
inline double absorbed_uncertainty_reference(double albedo, double albedo_uncertainty, double light,
                                             double light_uncertainty) {
    const auto kept = [](double a, double g) { return absorbed_reference(a, g, a, 0); };
    const double da = albedo_uncertainty / 100, dg = light * light_uncertainty / 100;
    const double by_albedo = (kept(albedo + da, light) - kept(albedo - da, light)) / 2 * 100;
    const double by_light = (kept(albedo, light + dg) - kept(albedo, light - dg)) / 2 * 100;
    return std::hypot(by_albedo, by_light);
}

/// Nearest multiple of the quantum by division and floor; a half goes to the even multiple.
inline double quantised_reference(double value, double quantum) {
    const double below = std::floor(value / quantum);
    const double rest = value / quantum - below;
    const bool up = rest > 0.5 || (rest == 0.5 && std::fmod(below, 2.0) != 0);
    return (below + (up ? 1 : 0)) * quantum;
}

}  // namespace sunbudget::test
