#pragma once

namespace sunbudget {

/// One moment's sun and sky over open level ground.
struct SkyLight {
    double beam_normal_w_m2 = 0;
    double diffuse_w_m2 = 0;                  ///< on the horizontal
    double extraterrestrial_normal_w_m2 = 0;  ///< > 0
    double zenith_rad = 0;                    ///< of the sun, without refraction
};

/// The sky's light in the parts that terrain treats differently.
///
/// circumsolar_normal  comes from around the sun: times max(0, cos incidence), and shaded with the
/// beam isotropic           times the sky view horizon             times the sine of the slope; may
/// be negative (a darker rim of the sky).
///                     Dropped behind an obstruction: times the share of the horizon that is open
/// At slope 0 the three add up to the diffuse irradiance exactly, as long as the sun stands 5
/// degrees or more above the horizon; below, the circumsolar part is held to cos 85 deg.
struct SkyParts {
    double circumsolar_normal_w_m2 = 0;
    double isotropic_w_m2 = 0;
    double horizon_w_m2 = 0;
};

/// Diffuse irradiance on an inclined plane under the open sky.
/// in      cos_incidence of the sun on it (below 0: behind it), slope_rad [0, pi]
/// units   W m-2 per m2 of the plane
[[nodiscard]] double tilted_diffuse_w_m2(const SkyParts& parts, double cos_incidence,
                                         double slope_rad) noexcept;

/// All from the whole sky alike. source: Liu & Jordan 1963, Solar Energy 7, 53-74
[[nodiscard]] SkyParts sky_liu_jordan1963(const SkyLight& light) noexcept;

/// The share beam / extraterrestrial comes from around the sun, the rest from the whole sky alike.
/// source: Hay & Davies 1980, Proc. First Canadian Solar Radiation Data Workshop
[[nodiscard]] SkyParts sky_hay_davies1980(const SkyLight& light) noexcept;

/// Circumsolar light and a brighter or darker rim by the clearness and brightness of the sky, with
/// the authors' eight bins for all sites.
///
/// in      air_mass relative, of the sun (the authors use Kasten 1966)
/// nodata  no diffuse light gives no parts
/// source  Perez, Ineichen, Seals, Michalsky & Stewart 1990, Solar Energy 44, 271-289, table 6 in
/// the
///         seven decimals of the authors' code -> transposition.csv
[[nodiscard]] SkyParts sky_perez1990(const SkyLight& light, double air_mass) noexcept;

/// What the last model works with, for tests and for who wants to see it. bin counts from 1.
struct PerezState {
    double clearness = 1;   ///< epsilon
    double brightness = 0;  ///< Delta
    int bin = 1;
    double circumsolar = 0;  ///< F1
    double horizon = 0;      ///< F2
};
[[nodiscard]] PerezState perez1990_state(const SkyLight& light, double air_mass) noexcept;

}  // namespace sunbudget
