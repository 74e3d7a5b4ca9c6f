#pragma once

namespace sunbudget {

/// Light of a cloudless sky at one instant.
struct ClearSky {
    double beam_normal_w_m2;         ///< on a plane facing the sun
    double diffuse_horizontal_w_m2;  ///< from the sky, on a horizontal plane
};

/// Clear sky of the European Solar Radiation Atlas; about 60 ns.
///
/// in      extraterrestrial_normal_w_m2 at the sun's distance; elevation_rad true (refraction is
///         added inside, for the air mass only); linke_turbidity at air mass 2, [1, 9];
///         pressure_ratio to sea level (air_mass.hpp)
/// out     both zero at and below the horizon
/// errors  none; NaN in gives NaN out. Above turbidity 9 the fit of the diffuse light fails (at high
///         sun more haze gives more light in all); callers refuse such values
/// source  Rigollier, Bauer & Wald 2000, Solar Energy 68, 33-48; Rayleigh depth of Kasten 1996,
///         Solar Energy 56, 239-244; air mass of Kasten & Young 1989. The lower limit of A0 Trd is
///         the paper's 0.002. At air mass 20 (elevation 1.6 deg) the paper's two depths leave a step
///         of 0.1 % in the beam; within a degree of the horizon its diffuse light exceeds that
///         outside the air
[[nodiscard]] ClearSky esra2000(double extraterrestrial_normal_w_m2, double elevation_rad,
                                double linke_turbidity, double pressure_ratio) noexcept;

/// Air mass as esra2000 sees it: with the model's own refraction and the pressure ratio.
[[nodiscard]] double esra2000_air_mass(double elevation_rad, double pressure_ratio) noexcept;

}  // namespace sunbudget
