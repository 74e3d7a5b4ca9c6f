#pragma once

#include <numbers>

namespace sunbudget {

[[nodiscard]] constexpr double rad_from_deg(double deg) noexcept {
    return deg * (std::numbers::pi / 180.0);
}
[[nodiscard]] constexpr double deg_from_rad(double rad) noexcept {
    return rad * (180.0 / std::numbers::pi);
}
[[nodiscard]] constexpr double k_from_celsius(double celsius) noexcept {
    return celsius + 273.15;
}

inline constexpr double seconds_per_day = 86400.0;
/// IAU 2015 Resolution B3; Kopp & Lean 2011, Geophys. Res. Lett. 38, L01706.
inline constexpr double solar_constant_w_m2 = 1361.0;
/// CODATA 2018.
inline constexpr double stefan_boltzmann_w_m2_k4 = 5.670374419e-8;

}  // namespace sunbudget
