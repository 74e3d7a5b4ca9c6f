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

/// What the air holds, for bird_hulstrom1981.
struct BirdAir {
    double ozone_atm_cm;
    double water_cm;    ///< precipitable
    double aerosol380;  ///< optical depth at 380 nm
    double aerosol500;  ///< at 500 nm
};

/// What the parts of the air let through on the sun's way, and what the sky throws back.
struct BirdPath {
    double air_mass;  ///< relative, Kasten 1966
    double rayleigh, ozone, gases, water, aerosol;
    double aerosol_absorption;  ///< T_AA, with K1 = 0.1
    double sky_albedo;
};

/// in      elevation_rad true, above 0; pressure_ratio to 1013 hPa
/// errors  none; NaN in gives NaN out
/// source  Bird & Hulstrom 1981, SERI/TR-642-761. The report's printed column of T_AA is publicly
///         said not to follow its own formula; this is the formula
[[nodiscard]] BirdPath bird_hulstrom1981_path(double elevation_rad, const BirdAir& air,
                                              double pressure_ratio) noexcept;

/// Light of a cloudless sky over black ground, with the share of it that the sky throws back.
struct BirdSky {
    double beam_normal_w_m2;
    double diffuse_horizontal_w_m2;  ///< over ground that reflects nothing
    double sky_albedo;
};

/// Beam, scattered light and the sky's albedo by layers of the air; about 300 ns.
///
/// in      as bird_hulstrom1981_path
/// out     all zero at and below the horizon. Over ground of an albedo the light that goes to and
///         fro makes of the global G: G / (1 - albedo * sky_albedo)
/// source  Bird & Hulstrom 1981, forward scattering 0.84
[[nodiscard]] BirdSky bird_hulstrom1981(double extraterrestrial_normal_w_m2, double elevation_rad,
                                        const BirdAir& air, double pressure_ratio) noexcept;

/// Global and beam from turbidity and height.
///
/// in      elevation_rad true; absolute_air_mass relative times pressure (Kasten & Young 1989 at the
///         apparent elevation); linke_turbidity at air mass 2, [1, 9]; height_m above the sea
/// out     both zero at and below the horizon; diffuse never below a tenth of the global or so, as
///         the authors limit the beam
/// errors  none; NaN in gives NaN out
/// source  Ineichen & Perez 2002, Solar Energy 73, 151-157, with the paper's factor
///         exp(0.01 AM^1.8), which much use leaves out. From an air mass of about 10 on that factor
///         would make the air clearer again as the sun sinks (and brighter than outside the air at
///         the horizon): there the transmission is held at its least value
[[nodiscard]] ClearSky ineichen_perez2002(double extraterrestrial_normal_w_m2, double elevation_rad,
                                          double absolute_air_mass, double linke_turbidity,
                                          double height_m) noexcept;

/// The authors' global light over the extraterrestrial, without and with their last factor.
struct IneichenGlobal {
    double plain;
    double enhanced;
};
[[nodiscard]] IneichenGlobal ineichen_perez2002_global(double absolute_air_mass,
                                                       double linke_turbidity,
                                                       double height_m) noexcept;

/// Shares of the extraterrestrial light, on the horizontal.
struct ClearIndices {
    double beam;     ///< KB
    double diffuse;  ///< KD
};

/// Water in the air above a place, mm, from vapour pressure and pressure.
/// source  ASCE-EWRI 2005, app. D
[[nodiscard]] double asce2005_water_mm(double vapour_pressure_kpa, double pressure_kpa) noexcept;

/// in      sin_elevation above 0; turbidity_coefficient 1 for clean air, 0.5 for very turbid
/// errors  none; NaN in gives NaN out. The two branches of KD leave a step of 0.007 at KB 0.15
/// source  ASCE-EWRI 2005, The ASCE Standardized Reference Evapotranspiration Equation, app. D.
///         FAO-56 annex 3 has other numbers in the same places
[[nodiscard]] ClearIndices asce2005_indices(double sin_elevation, double pressure_kpa,
                                            double vapour_pressure_kpa,
                                            double turbidity_coefficient) noexcept;

/// in      extraterrestrial light with the paper's own constant (fao56.hpp)
/// out     both zero at and below the horizon
[[nodiscard]] ClearSky asce2005(double extraterrestrial_normal_w_m2, double elevation_rad,
                                double pressure_kpa, double vapour_pressure_kpa,
                                double turbidity_coefficient) noexcept;

}  // namespace sunbudget
