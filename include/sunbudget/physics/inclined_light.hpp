#pragma once

#include <span>

#include "sunbudget/physics/sky_view.hpp"

namespace sunbudget {

/// Light that comes with the sun, on a row of inclined pixels.
///
/// Shadows are worked out once for a reference place; the light of open ground is known at each pixel.
/// With f the share of the sunlit time that the pixel is in the sun, n its normal, S the shaded sum of
/// the reference place, V its vector without shadows and P the pixel's own:
///
///     k (S - f n_up V_up) + f n_up P_up + f (n_east (P_east - k V_east) + n_north (P_north - k V_north)),  k = P_up / V_up
///
/// which is S where the places agree, 0 in full shadow, and P_up exactly on open level ground.
struct SunlightRow {
    std::span<const float> shaded;                        ///< S
    std::span<const float> hours;                         ///< in the sun
    float whole_east = 0, whole_north = 0, whole_up = 0;  ///< V
    float whole_hours = 0;
    std::span<const float> east, north, up;  ///< P, each pixel's own
};

/// shape   rows of one length
/// units   those of P, per m2 of the pixel's own plane
/// nodata  NaN in any row gives NaN; never below 0
/// accuracy where the reference is 10 km away: the first order in the sun's shift is exact, what is left
///         is how shadows themselves would move
void sunlight(const SunlightRow& row, const NormalRow& normal, std::span<float> out) noexcept;

/// Sky light on a row of inclined pixels: circumsolar as sunlight() gives it, the isotropic rest times
/// the sky view, the rim of the sky times sin(slope) and the share of the unobstructed view left.
///
/// in      sky_view; diffuse (all of it) and rim on open level ground; circumsolar_up: the open level
///         part of the circumsolar light
/// shape   rows of one length
/// out     exactly `diffuse` on open level ground; never below 0
struct SkyLightRow {
    std::span<const float> sky_view, diffuse, rim, circumsolar, circumsolar_up;
};
void skylight(const SkyLightRow& row, std::span<const float> normal_up,
              std::span<float> out) noexcept;

/// Light sent up by the ground in view: (1 - sky view) * albedo seen * global on open level ground.
void light_from_ground(std::span<const float> sky_view, std::span<const float> albedo_seen,
                       std::span<const float> direct_open, std::span<const float> diffuse_open,
                       std::span<float> out) noexcept;

/// Share of the sunlit time in the sun times the open ground's own: hours / whole_hours * open.
void time_in_sun(std::span<const float> hours, float whole_hours, std::span<const float> open,
                 std::span<float> out) noexcept;

/// Adds the light that goes to and fro between ground and sky to the sky's light on level ground.
///
/// in      `once` global over black ground times the sky's albedo, `twice` the same times its square; as
///         means over a period their ratio is the sky's albedo weighted by the light, which leaves the
///         sum a + a s + a s^2 ... right to its third term
/// shape   rows of equal length
/// nodata  NaN in the albedo or the light gives NaN
/// source  geometric series of diffuse reflections, as in Bird & Hulstrom 1981
void add_ground_and_sky(std::span<const float> ground_albedo, std::span<const float> once,
                        std::span<const float> twice, std::span<float> diffuse_w_m2) noexcept;

}  // namespace sunbudget
