#pragma once

#include <span>

namespace sunbudget {

// Longwave of a surface. All rows of a call have the same length (asserted); a result may be one of the
// inputs; NaN in any input gives NaN out; fluxes in W m-2 (or all in J m-2) for each m2 of the surface.

/// What comes down on inclined or hemmed-in ground: sky_view * sky + (1 - sky_view) * surroundings.
void longwave_on_surface(std::span<const float> sky_view, std::span<const float> sky,
                         std::span<const float> surroundings, std::span<float> down) noexcept;

/// What the surface sends up, its own and what it reflects: emissivity * emission + (1 - emissivity) * down.
/// `emission` is that of a black body at the surface's temperature, sigma T^4, or its mean over a period.
void longwave_up(std::span<const float> emissivity, std::span<const float> emission,
                 std::span<const float> down, std::span<float> up) noexcept;

/// Down less up: emissivity * (down - emission).
void net_longwave(std::span<const float> emissivity, std::span<const float> emission,
                  std::span<const float> down, std::span<float> net) noexcept;

/// Emissivity from red and near-infrared surface reflectance: bare soil below an NDVI of 0.2, full plant
/// cover above 0.5, a mixture between.
///
/// in      reflectance, not both 0
/// source  Sobrino, Jimenez-Munoz & Paolini, Remote Sens. Environ. 90, 2004, 434-440; the term of the red
///         band of bare soil (0.98 - 0.042 red) is from memory and stands for the thermal band of the sensor,
///         not the whole spectrum
void emissivity_from_ndvi(std::span<const float> red, std::span<const float> nir,
                          std::span<float> emissivity) noexcept;

/// Steady temperature of a dry, opaque surface whose absorbed light leaves as longwave and by the air:
/// absorbed = emissivity * (sigma Ts^4 - longwave_down) + exchange * (Ts - air).
///
/// in      absorbed_w_m2      shortwave the surface keeps, >= 0
///         emissivity         0..1
///         longwave_down_w_m2 >= 0
///         air_k
///         exchange_w_m2_k    > 0: heat the air takes for each K of difference
/// out     K
/// errors  none; NaN in gives NaN out
/// source  ASTM E1980-11 for the balance and the three coefficients of exchange; steady state only: roofs
///         store heat, and water that evaporates cools (a growing field is 30 K colder than this)
[[nodiscard]] double balanced_temperature_k(double absorbed_w_m2, double emissivity,
                                            double longwave_down_w_m2, double air_k,
                                            double exchange_w_m2_k) noexcept;
/// The same for a row of pixels.
///
/// errors  float: within 0.001 K of the above for absorbed up to 1400 and down up to 500 W m-2, air 230..330 K
void balanced_temperature(std::span<const float> absorbed_w_m2, std::span<const float> emissivity,
                          std::span<const float> longwave_down_w_m2, std::span<const float> air_k,
                          float exchange_w_m2_k, std::span<float> temperature_k) noexcept;

/// The three cases of wind of ASTM E1980: below 2, 2 to 6, 6 to 10 m/s.
enum class Wind { low, medium, high };
/// The case of a wind; above 10 m/s, beyond the standard, it is high.
///
/// in      wind_m_s  >= 0
[[nodiscard]] Wind wind_case(double wind_m_s) noexcept;
/// 5, 12, 30 W m-2 K-1.
[[nodiscard]] double heat_exchange_w_m2_k(Wind wind) noexcept;

/// Solar reflectance index: 0 for the standard's black surface (albedo 0.05, emissivity 0.90), 100 for its
/// white one (0.80, 0.90), by their temperatures at 1000 W m-2, air at 310 K and a sky of 300 K.
///
/// in      albedo 0..1, emissivity above 0.1 (the standard's scope), ground flatter than 9.5 deg
/// source  ASTM E1980-11, iterated (its closed form is within 1.8 up to an albedo of 0.85)
[[nodiscard]] double solar_reflectance_index(double albedo, double emissivity, Wind wind) noexcept;
/// nodata  NaN in either input, or an emissivity of 0.1 or less, gives NaN out
/// errors  float: within 0.01 of the above
void solar_reflectance_index(std::span<const float> albedo, std::span<const float> emissivity,
                             Wind wind, std::span<float> index) noexcept;

}  // namespace sunbudget
