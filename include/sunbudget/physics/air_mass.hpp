#pragma once

namespace sunbudget {

/// Relative optical air mass: the slant path through the air over the vertical one, at sea level.
///
/// in      elevation_rad apparent (with refraction), above -6 deg
/// out     0.9997 at the zenith (not 1: the formula's own), 37.92 at the horizon
/// errors  none; NaN in gives NaN out
/// source  Kasten & Young 1989, Applied Optics 28, 4735-4738
[[nodiscard]] double relative_air_mass(double apparent_elevation_rad) noexcept;

/// The older form that Bird & Hulstrom (1981) use, with their exponent -1.25 (others print -1.253).
///
/// in      elevation_rad, above -3.8 deg
/// source  Kasten 1966, Archiv fuer Meteorologie B 14, 206-223
[[nodiscard]] double relative_air_mass_kasten1966(double elevation_rad) noexcept;

/// Air pressure at a height over that at sea level: exp(-height / 8434.5 m).
/// source  Rigollier, Bauer & Wald 2000, Solar Energy 68, 33-48
[[nodiscard]] double pressure_ratio(double height_m) noexcept;

}  // namespace sunbudget
