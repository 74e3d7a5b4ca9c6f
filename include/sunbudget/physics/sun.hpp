#pragma once

#include <vector>

#include "sunbudget/base/time.hpp"
#include "sunbudget/base/units.hpp"

namespace sunbudget {

/// Apparent geocentric place of the sun: where it is for the whole Earth at one instant.
struct SunState {
    double declination_rad;           ///< of the true equator of date, [-0.41, 0.41]
    double greenwich_hour_angle_rad;  ///< positive west, [0, 2 pi)
    double distance_au;               ///< Earth to sun, geometric
};

/// The sun from IAU models: Earth's place, light time, aberration, precession-nutation 2006/2000A
/// and apparent sidereal time; about 0.1 ms a call.
///
/// in      utc; ut1_minus_utc_s [-0.9, 0.9], 0 where it is not known (at most 0.004 deg in hour
/// angle) out     TT is UTC + 32.184 s + leap seconds; years without announced leap seconds keep
/// the last count errors  none; before 1960 there is no UTC and TT - UTC is taken as 32.184 s
/// source  ERFA 2.0 (IAU SOFA routines epv00, ab, pnm06a, gst06, dat); within 5e-4 deg of the full
///         series of Reda & Andreas 2004, Solar Energy 76, 577-589, in tests/physics
[[nodiscard]] SunState sun_state(UtcSeconds utc, double ut1_minus_utc_s = 0);

/// sun_state over a span of time by cubic interpolation between knots of 12 hours: about 20 ns a
/// call. Knots lie at the same instants whatever the span, so an instant has one value in every
/// run. Immutable once built: safe to share by threads.
class SunTrack {
  public:
    /// Covers [begin, end] and an hour on either side.
    SunTrack(UtcSeconds begin, UtcSeconds end, double ut1_minus_utc_s = 0);

    /// in      utc inside the span or up to an hour outside it (asserted)
    /// out     within 2e-9 rad and 1e-9 au of sun_state; within 3e-7 rad in the two days about a
    /// leap
    ///         second, where the sun's own UTC path has a step of that size
    [[nodiscard]] SunState at(UtcSeconds utc) const noexcept;

  private:
    struct Knot {
        double declination_rad;
        double hour_angle_minus_ut_rad;  // near pi: 12 h and the equation of time
        double distance_au;
    };
    double first_knot_ = 0;  // in knot spacings since 1970
    std::vector<Knot> knots_;
};

/// Apparent minus mean solar time, in seconds: positive when the sundial is ahead.
///
/// in      the sun at this same instant
/// out     (-1800, 1800); GAST - right ascension - UT + 12 h
/// source  Meeus, Astronomical Algorithms, 2nd ed. 1998, ch. 28 (defines it by the mean longitude;
///         the two agree within 0.3 s)
[[nodiscard]] double equation_of_time_s(const SunState& sun, UtcSeconds utc) noexcept;

/// The instant at which the true sun shows the time that the mean sun shows at `as_if_mean`: what
/// Zone::to_utc gives for solar-true goes in.
[[nodiscard]] UtcSeconds utc_from_true_solar(UtcSeconds as_if_mean);

/// Extraterrestrial irradiance on a plane facing the sun, W m-2: constant / distance^2.
[[nodiscard]] constexpr double extraterrestrial_normal(
    double distance_au, double constant_w_m2 = solar_constant_w_m2) noexcept {
    return constant_w_m2 / (distance_au * distance_au);
}

}  // namespace sunbudget
