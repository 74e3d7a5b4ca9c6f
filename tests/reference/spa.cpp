#include "reference/spa.hpp"

#include <cmath>
#include <numbers>

#include "support/vectors.hpp"

namespace sunbudget::test {

namespace {

double rad(double deg) {
    return deg * std::numbers::pi / 180;
}
double deg(double radians) {
    return radians * 180 / std::numbers::pi;
}
double sind(double d) {
    return std::sin(rad(d));
}
double cosd(double d) {
    return std::cos(rad(d));
}
double tand(double d) {
    return std::tan(rad(d));
}
double turn(double d) {
    return d - 360 * std::floor(d / 360);
}

double polynomial(double x, std::initializer_list<double> coefficients) {
    double value = 0, power = 1;
    for (const double c : coefficients) {
        value += c * power;
        power *= x;
    }
    return value;
}

}  // namespace

Spa::Spa() {
    const auto earth = read_table("vectors/spa_earth_terms.csv");
    for (std::size_t i = 0; i < earth.rows.size(); ++i)
        earth_.push_back({earth.cell(i, "series"),
                          {earth.number(i, "A"), earth.number(i, "B"), earth.number(i, "C")}});
    const auto nutation = read_table("vectors/spa_nutation_terms.csv");
    for (std::size_t i = 0; i < nutation.rows.size(); ++i) {
        NutationTerm term{};
        for (int k = 0; k < 5; ++k) term.y[k] = nutation.number(i, "Y" + std::to_string(k));
        term.a = nutation.number(i, "a");
        term.b = nutation.number(i, "b");
        term.c = nutation.number(i, "c");
        term.d = nutation.number(i, "d");
        nutation_.push_back(term);
    }
}

double Spa::sum(const std::string& series, double jme) const {
    double total = 0;
    for (const auto& [name, term] : earth_)
        if (name == series) total += term.a * std::cos(term.b + term.c * jme);
    return total;
}

SpaSun Spa::sun(double jd, double delta_t_s) const {
    SpaSun s{};
    const double jc = (jd - 2451545) / 36525;
    const double jce = (jd + delta_t_s / 86400 - 2451545) / 36525, jme = jce / 10;

    // 3.2: Earth's heliocentric longitude, latitude and radius
    const auto power_sum = [&](const char* letter, double* sums, int count) {
        double value = 0, power = 1;
        for (int k = 0; k < count; ++k, power *= jme) {
            sums[k] = sum(letter + std::to_string(k), jme);
            value += sums[k] * power;
        }
        return value / 1e8;
    };
    s.l_deg = turn(deg(power_sum("L", s.series_l, 6)));
    s.b_deg = deg(power_sum("B", s.series_b, 2));
    s.r_au = power_sum("R", s.series_r, 5);

    // 3.3: seen from the Earth
    s.theta_deg = turn(s.l_deg + 180);
    s.beta_deg = -s.b_deg;

    // 3.4: nutation
    s.x_deg[0] = polynomial(jce, {297.85036, 445267.111480, -0.0019142, 1.0 / 189474});
    s.x_deg[1] = polynomial(jce, {357.52772, 35999.050340, -0.0001603, -1.0 / 300000});
    s.x_deg[2] = polynomial(jce, {134.96298, 477198.867398, 0.0086972, 1.0 / 56250});
    s.x_deg[3] = polynomial(jce, {93.27191, 483202.017538, -0.0036825, 1.0 / 327270});
    s.x_deg[4] = polynomial(jce, {125.04452, -1934.136261, 0.0020708, 1.0 / 450000});
    for (const auto& term : nutation_) {
        double angle = 0;
        for (int k = 0; k < 5; ++k) angle += term.y[k] * s.x_deg[k];
        s.dpsi_deg += (term.a + term.b * jce) * sind(angle) / 36000000;
        s.deps_deg += (term.c + term.d * jce) * cosd(angle) / 36000000;
    }

    // 3.5 to 3.7: obliquity, aberration, apparent longitude
    s.mean_obliquity_arcsec = polynomial(jme / 10, {84381.448, -4680.93, -1.55, 1999.25, -51.38,
                                                    -249.67, -39.05, 7.12, 27.87, 5.79, 2.45});
    s.obliquity_deg = s.mean_obliquity_arcsec / 3600 + s.deps_deg;
    s.aberration_deg = -20.4898 / (3600 * s.r_au);
    s.lambda_deg = s.theta_deg + s.dpsi_deg + s.aberration_deg;

    // 3.8: sidereal time
    s.mean_sidereal_deg = turn(280.46061837 + 360.98564736629 * (jd - 2451545) +
                               jc * jc * 0.000387933 - jc * jc * jc / 38710000);
    s.sidereal_deg = s.mean_sidereal_deg + s.dpsi_deg * cosd(s.obliquity_deg);

    // 3.9 and 3.10: right ascension and declination
    const double sl = sind(s.lambda_deg), e = s.obliquity_deg;
    s.alpha_deg =
        turn(deg(std::atan2(sl * cosd(e) - tand(s.beta_deg) * sind(e), cosd(s.lambda_deg))));
    s.delta_deg = deg(std::asin(sind(s.beta_deg) * cosd(e) + cosd(s.beta_deg) * sind(e) * sl));

    // A.1: equation of time
    s.mean_longitude_deg = turn(polynomial(
        jme, {280.4664567, 360007.6982779, 0.03032028, 1.0 / 49931, -1.0 / 15300, -1.0 / 2000000}));
    const double equation_deg =
        s.mean_longitude_deg - 0.0057183 - s.alpha_deg + s.dpsi_deg * cosd(e);
    s.equation_of_time_min = 4 * std::remainder(equation_deg, 360.0);
    return s;
}

SpaView Spa::view(const SpaSun& s, const SpaPlace& place, double pressure_hpa,
                  double temperature_celsius) {
    SpaView v{};
    const double lat = place.latitude_deg;
    v.hour_angle_deg = turn(s.sidereal_deg + place.longitude_deg - s.alpha_deg);

    // 3.12: parallax
    v.parallax_deg = 8.794 / (3600 * s.r_au);
    const double u_deg = deg(std::atan(0.99664719 * tand(lat)));
    const double x = cosd(u_deg) + place.height_m / 6378140 * cosd(lat);
    const double y = 0.99664719 * sind(u_deg) + place.height_m / 6378140 * sind(lat);
    const double sp = sind(v.parallax_deg), h = v.hour_angle_deg;
    const double away = cosd(s.delta_deg) - x * sp * cosd(h);
    v.dalpha_deg = deg(std::atan2(-x * sp * sind(h), away));
    v.alpha_prime_deg = s.alpha_deg + v.dalpha_deg;
    v.delta_prime_deg = deg(std::atan2((sind(s.delta_deg) - y * sp) * cosd(v.dalpha_deg), away));
    v.hour_angle_prime_deg = h - v.dalpha_deg;

    // 3.14 and 3.15: zenith and azimuth
    const double hp = v.hour_angle_prime_deg, dp = v.delta_prime_deg;
    v.elevation_deg = deg(std::asin(sind(lat) * sind(dp) + cosd(lat) * cosd(dp) * cosd(hp)));
    if (v.elevation_deg >= -(0.26667 + 0.5667))
        v.refraction_deg = pressure_hpa / 1010 * 283 / (273 + temperature_celsius) * 1.02 /
                           (60 * tand(v.elevation_deg + 10.3 / (v.elevation_deg + 5.11)));
    v.zenith_deg = 90 - v.elevation_deg - v.refraction_deg;
    v.azimuth_south_deg =
        turn(deg(std::atan2(sind(hp), cosd(hp) * sind(lat) - tand(dp) * cosd(lat))));
    v.azimuth_deg = turn(v.azimuth_south_deg + 180);
    return v;
}

// A.2: each time is found from the mean one by a single correction.
SpaDay Spa::day(double jd_midnight, double delta_t_s, const SpaPlace& place,
                double threshold_deg) const {
    const auto unit = [](double x) { return x - std::floor(x); };
    const double sidereal_deg = sun(jd_midnight, delta_t_s).sidereal_deg;
    SpaSun days[3];  // 0 h TT of the day before, the day and the day after
    for (int i = 0; i < 3; ++i) days[i] = sun(jd_midnight + i - 1, 0);
    const auto interpolated = [](double before, double here, double after, double n) {
        double a = here - before, b = after - here;
        if (std::abs(a) > 2) a -= std::floor(a);
        if (std::abs(b) > 2) b -= std::floor(b);
        return here + n * (a + b + (b - a) * n) / 2;
    };
    struct At {
        double hour_angle, elevation, delta;
    };
    const double lat = place.latitude_deg;
    const auto at = [&](double m) {
        const double n = m + delta_t_s / 86400;
        const double alpha =
            interpolated(days[0].alpha_deg, days[1].alpha_deg, days[2].alpha_deg, n);
        const double delta =
            interpolated(days[0].delta_deg, days[1].delta_deg, days[2].delta_deg, n);
        const double hour =
            std::remainder(sidereal_deg + 360.985647 * m + place.longitude_deg - alpha, 360.0);
        return At{hour,
                  deg(std::asin(sind(lat) * sind(delta) + cosd(lat) * cosd(delta) * cosd(hour))),
                  delta};
    };
    const double d0 = days[1].delta_deg;
    const double m0 = unit((days[1].alpha_deg - place.longitude_deg - sidereal_deg) / 360);
    const double h0 =
        deg(std::acos((sind(threshold_deg) - sind(lat) * sind(d0)) / (cosd(lat) * cosd(d0))));
    const auto passage = [&](double m) {
        const auto p = at(m);
        return unit(m + (p.elevation - threshold_deg) /
                            (360 * cosd(p.delta) * cosd(lat) * sind(p.hour_angle)));
    };
    return {unit(m0 - at(m0).hour_angle / 360), passage(unit(m0 - h0 / 360)),
            passage(unit(m0 + h0 / 360))};
}

double spa_incidence_deg(const SpaView& v, double slope_deg, double rotation_deg) {
    return deg(
        std::acos(cosd(v.zenith_deg) * cosd(slope_deg) +
                  sind(slope_deg) * sind(v.zenith_deg) * cosd(v.azimuth_south_deg - rotation_deg)));
}

}  // namespace sunbudget::test
