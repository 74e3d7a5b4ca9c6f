#pragma once

#include <span>

namespace sunbudget {

/// Pressure of water vapour in saturated air, over water at every temperature.
///
/// in      temperature_k  above 36 K, where the formula has its pole
/// errors  none; NaN in gives NaN out
/// source  Tetens' form as FAO-56 (1998) eq. 11 has it
[[nodiscard]] double saturation_vapour_pressure_hpa(double temperature_k) noexcept;
/// The same for a row of pixels.
///
/// shape   two rows of the same length, which may be one
/// nodata  NaN through
/// errors  float: within 1e-5 of the above from 200 to 330 K
void saturation_vapour_pressure(std::span<const float> temperature_k,
                                std::span<float> pressure_hpa) noexcept;

/// The temperature at which air of that vapour pressure is saturated: the exact inverse of the above.
///
/// in      vapour_pressure_hpa  > 0
[[nodiscard]] double dew_point_k(double vapour_pressure_hpa) noexcept;

/// Air at one place.
struct Air {
    double temperature_k = 0;
    double vapour_pressure_hpa = 0;
};

/// The same air at another height: temperature by the lapse, relative humidity kept.
///
/// in      rise_m        upwards, from where `air` was measured
///         lapse_k_m     how much colder for each metre up; negative in an inversion
/// errors  none; NaN in gives NaN out
/// source  common practice; 6.5 K/km is the standard atmosphere's (ISO 2533:1975)
[[nodiscard]] Air air_at_height(const Air& air, double rise_m, double lapse_k_m) noexcept;

/// Pressure at another height, through a column of the mean temperature of both ends.
///
/// source  hypsometric equation, gravity 9.80665 m s-2, dry air 287.05 J kg-1 K-1
[[nodiscard]] double pressure_at_height_hpa(double pressure_hpa, double temperature_k,
                                            double rise_m, double lapse_k_m) noexcept;

}  // namespace sunbudget
