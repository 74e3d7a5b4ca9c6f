#include "sunbudget/physics/sun.hpp"

#include <erfa.h>
#include <erfam.h>

#include <cassert>
#include <cmath>
#include <numbers>

namespace sunbudget {

namespace {

constexpr double unix_epoch_jd = 2440587.5;
constexpr double two_pi = 2 * std::numbers::pi;

double turn_fraction(UtcSeconds utc) noexcept {
    const double days = utc / seconds_per_day;
    return days - std::floor(days);
}

// ERFA sets up its list of leap seconds at the first call, which two threads may not do at once.
int leap_seconds(int year, int month, int day, double fraction, double* tai_minus_utc_s) {
    static const bool ready = [] {
        double ignored = 0;
        return eraDat(2000, 1, 1, 0, &ignored) == 0;
    }();
    assert(ready);
    (void)ready;
    return eraDat(year, month, day, fraction, tai_minus_utc_s);
}

// Status 1 (before 1960, or years whose leap seconds ERFA's release could not know) is no error
// here.
double tt_minus_utc_s(UtcSeconds utc) {
    const double days = std::floor(utc / seconds_per_day);
    const auto date = civil_from_days(static_cast<long>(days));
    double tai_minus_utc_s = 0;
    const int status = leap_seconds(date.year, date.month, date.day, utc / seconds_per_day - days,
                                    &tai_minus_utc_s);
    assert(status >= 0);
    (void)status;
    return 32.184 + tai_minus_utc_s;
}

/// Unit vector to the sun's apparent place in the frame of the stars (GCRS), and its distance.
double apparent_direction(double tt_days, double direction[3]) {
    double heliocentric[2][3], barycentric[2][3];
    eraEpv00(unix_epoch_jd, tt_days, heliocentric, barycentric);
    const double distance_au = eraPm(heliocentric[0]);
    const double light_time_days = distance_au * ERFA_AULT / ERFA_DAYSEC;
    double geometric[3], velocity_c[3];
    for (int i = 0; i < 3; ++i) {
        // The sun itself moves about the barycentre: seen where it was when the light left.
        const double sun_velocity = barycentric[1][i] - heliocentric[1][i];
        geometric[i] = -heliocentric[0][i] - sun_velocity * light_time_days;
        velocity_c[i] = barycentric[1][i] * (ERFA_AULT / ERFA_DAYSEC);
    }
    double length = 0, unit[3];
    eraPn(geometric, &length, unit);
    eraAb(unit, velocity_c, distance_au, std::sqrt(1 - eraPdp(velocity_c, velocity_c)), direction);
    return distance_au;
}

}  // namespace

SunState sun_state(UtcSeconds utc, double ut1_minus_utc_s) {
    const double tt_days = (utc + tt_minus_utc_s(utc)) / seconds_per_day;
    const double ut1_days = (utc + ut1_minus_utc_s) / seconds_per_day;
    double stars[3], of_date[3], precession_nutation[3][3];
    const double distance_au = apparent_direction(tt_days, stars);
    eraPnm06a(unix_epoch_jd, tt_days, precession_nutation);
    eraRxp(precession_nutation, stars, of_date);
    double right_ascension_rad = 0, declination_rad = 0;
    eraC2s(of_date, &right_ascension_rad, &declination_rad);
    const double sidereal_rad =
        eraGst06(unix_epoch_jd, ut1_days, unix_epoch_jd, tt_days, precession_nutation);
    return {declination_rad, eraAnp(sidereal_rad - right_ascension_rad), distance_au};
}

namespace {

constexpr double knot_spacing_s = 43200;

/// Weights of the knots at -1, 0, 1, 2 for the cubic through them, at u in [0, 1].
struct CubicWeights {
    double w[4];
    explicit CubicWeights(double u) noexcept
        : w{-u * (u - 1) * (u - 2) / 6, (u + 1) * (u - 1) * (u - 2) / 2, -(u + 1) * u * (u - 2) / 2,
            (u + 1) * u * (u - 1) / 6} {}
};

}  // namespace

SunTrack::SunTrack(UtcSeconds begin, UtcSeconds end, double ut1_minus_utc_s) {
    assert(begin <= end);
    constexpr double margin_s = 3600;
    first_knot_ = std::floor((begin - margin_s) / knot_spacing_s) - 1;
    const double last_knot = std::floor((end + margin_s) / knot_spacing_s) + 2;
    knots_.reserve(static_cast<std::size_t>(last_knot - first_knot_) + 1);
    for (double knot = first_knot_; knot <= last_knot; ++knot) {
        const UtcSeconds utc = knot * knot_spacing_s;
        const auto sun = sun_state(utc, ut1_minus_utc_s);
        const double rest_rad = eraAnp(sun.greenwich_hour_angle_rad - two_pi * turn_fraction(utc));
        knots_.push_back({sun.declination_rad, rest_rad, sun.distance_au});
    }
}

SunState SunTrack::at(UtcSeconds utc) const noexcept {
    const double position = utc / knot_spacing_s - first_knot_;
    const double whole = std::floor(position);
    assert(whole >= 1 && whole + 2 < static_cast<double>(knots_.size()));
    const CubicWeights cubic(position - whole);
    const Knot* knot = knots_.data() + (static_cast<std::size_t>(whole) - 1);
    SunState sun{0, two_pi * turn_fraction(utc), 0};
    for (int i = 0; i < 4; ++i) {
        sun.declination_rad += cubic.w[i] * knot[i].declination_rad;
        sun.greenwich_hour_angle_rad += cubic.w[i] * knot[i].hour_angle_minus_ut_rad;
        sun.distance_au += cubic.w[i] * knot[i].distance_au;
    }
    if (sun.greenwich_hour_angle_rad >= two_pi) sun.greenwich_hour_angle_rad -= two_pi;
    return sun;
}

double equation_of_time_s(const SunState& sun, UtcSeconds utc) noexcept {
    const double ahead_rad =
        sun.greenwich_hour_angle_rad - two_pi * turn_fraction(utc) - std::numbers::pi;
    return std::remainder(ahead_rad, two_pi) / two_pi * seconds_per_day;
}

UtcSeconds utc_from_true_solar(UtcSeconds as_if_mean) {
    // The equation of time changes by at most 30 s a day: the second round errs by under 0.01 ms.
    UtcSeconds utc = as_if_mean;
    for (int round = 0; round < 3; ++round)
        utc = as_if_mean - equation_of_time_s(sun_state(utc), utc);
    return utc;
}

}  // namespace sunbudget
