#pragma once

#include <string>
#include <vector>

/// The solar position algorithm of Reda & Andreas (NREL/TP-560-34302, rev. 2008; Solar Energy 76,
/// 2004, 577-589), straight from its equations and term tables: slow, and kept apart from the
/// program's own chain through ERFA so that each checks the other. Degrees throughout, as in the
/// report.
namespace sunbudget::test {

struct SpaPlace {
    double latitude_deg, longitude_deg, height_m;
};

/// Everything that Table A5.1 of the report prints, and the intermediates behind it.
struct SpaSun {
    double series_l[6], series_b[2], series_r[5];  ///< sums, 1e-8 rad and 1e-8 au
    double l_deg, b_deg, r_au;
    double theta_deg, beta_deg;
    double x_deg[5], dpsi_deg, deps_deg, mean_obliquity_arcsec, obliquity_deg;
    double aberration_deg, lambda_deg;
    double mean_sidereal_deg, sidereal_deg;
    double alpha_deg, delta_deg;
    double mean_longitude_deg, equation_of_time_min;
};

struct SpaView {
    double hour_angle_deg, parallax_deg, dalpha_deg, alpha_prime_deg, delta_prime_deg,
        hour_angle_prime_deg;
    double elevation_deg, refraction_deg, zenith_deg, azimuth_deg, azimuth_south_deg;
};

struct SpaDay {  ///< fractions of the UT day, [0, 1)
    double transit, sunrise, sunset;
};

class Spa {
  public:
    /// Reads testdata/vectors/spa_earth_terms.csv and spa_nutation_terms.csv.
    Spa();

    /// jd: Julian day of UT1; delta_t_s = TT - UT1.
    [[nodiscard]] SpaSun sun(double jd, double delta_t_s) const;
    /// Refraction is left out (0) where pressure_hpa is 0.
    [[nodiscard]] static SpaView view(const SpaSun& sun, const SpaPlace& place, double pressure_hpa,
                                      double temperature_celsius);
    /// jd_midnight: Julian day of 0 h UT.
    [[nodiscard]] SpaDay day(double jd_midnight, double delta_t_s, const SpaPlace& place,
                             double threshold_deg) const;

  private:
    struct EarthTerm {
        double a, b, c;
    };
    struct NutationTerm {
        double y[5], a, b, c, d;
    };
    [[nodiscard]] double sum(const std::string& series, double jme) const;

    std::vector<std::pair<std::string, EarthTerm>> earth_;
    std::vector<NutationTerm> nutation_;
};

/// Angle between the sun and the normal of a slope rotated from south, west positive (eq. 47).
[[nodiscard]] double spa_incidence_deg(const SpaView& view, double slope_deg, double rotation_deg);

}  // namespace sunbudget::test
