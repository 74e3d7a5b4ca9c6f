#pragma once

#include <algorithm>
#include <cmath>

#include "sunbudget/physics/clear_sky.hpp"
#include "sunbudget/physics/sun_day.hpp"
#include "sunbudget/physics/sun_place.hpp"

namespace sunbudget {

/// The sun in the middle of a sunlit piece of time at a place; `sin_elevation` is above 0.
struct SunSample {
    UtcSeconds utc;
    double duration_s;
    SunState sun;
    double sin_elevation;
};

/// The sunlit parts of [begin, end) at a place, horizon flat at 0, parallax counted, no refraction.
/// `sun` is a SunTrack or anything with `SunState at(UtcSeconds) const`.
template <typename Sun>
[[nodiscard]] std::vector<TimeSpan> sunlit_spans(const Sun& sun, UtcSeconds begin, UtcSeconds end,
                                                 double latitude_rad, double longitude_rad) {
    const auto up = up_direction(latitude_rad, longitude_rad);
    return spans_above_zero(
        [&](UtcSeconds utc) {
            const auto state = sun.at(utc);
            return with_parallax(dot(sun_direction(state), up), state.distance_au);
        },
        begin, end);
}

/// Cuts [begin, end) into steps counted from `begin`, the steps at sunrise and sunset, and calls
/// visit(SunSample) for the middle of each sunlit piece, in order.
///
/// in      step_s above 0; `sun` covers the span and half an hour on either side
/// out     the durations add up to the sunlit time whatever the step. A sunlit span of fewer than
/// 32
///         steps has each step cut further to reach that number: the midpoint rule errs by 0.5 /
///         n^2 of a span's sum, which must stay under 0.05 % on the shortest polar day too
/// errors  what `visit` throws
template <typename Sun, typename Visit>
void for_each_sunlit_step(const Sun& sun, UtcSeconds begin, UtcSeconds end, double step_s,
                          double latitude_rad, double longitude_rad, Visit&& visit) {
    constexpr double fewest_pieces = 32;
    const auto up = up_direction(latitude_rad, longitude_rad);
    for (const auto& lit : sunlit_spans(sun, begin, end, latitude_rad, longitude_rad)) {
        const double pieces_a_step =
            std::max(1.0, std::ceil(fewest_pieces * step_s / (lit.end - lit.begin)));
        const double piece_s = step_s / pieces_a_step;
        const auto border = [&](double piece) {
            return std::clamp(begin + piece * piece_s, lit.begin, lit.end);
        };
        for (double piece = std::floor((lit.begin - begin) / piece_s); border(piece) < lit.end;
             ++piece) {
            const UtcSeconds from = border(piece), to = border(piece + 1);
            const UtcSeconds middle = from + (to - from) / 2;
            const auto state = sun.at(middle);
            const double sine = with_parallax(dot(sun_direction(state), up), state.distance_au);
            // Under 0.1 ms from sunrise the sine can still be below 0: no light either way.
            if (to > from && sine > 0) visit(SunSample{middle, to - from, state, sine});
        }
    }
}

/// Light on a horizontal square metre over a period.
struct LightTotals {
    double direct_j_m2 = 0;
    double diffuse_j_m2 = 0;
    double extraterrestrial_j_m2 = 0;
    double sunlit_s = 0;
};

/// Clear-sky totals over [begin, end) at one place by the midpoint of each step's sunlit part.
///
/// in      sky: `ClearSky sky(UtcSeconds utc, double extraterrestrial_normal_w_m2, double
/// elevation_rad)` out     smooth in the step; with no air within 0.05 % of the closed form at
/// steps up to 10 minutes
template <typename Sun, typename Sky>
[[nodiscard]] LightTotals light_totals(const Sun& sun, UtcSeconds begin, UtcSeconds end,
                                       double step_s, double latitude_rad, double longitude_rad,
                                       Sky&& sky, double constant_w_m2 = solar_constant_w_m2) {
    LightTotals totals;
    for_each_sunlit_step(
        sun, begin, end, step_s, latitude_rad, longitude_rad, [&](const SunSample& sample) {
            const double e0 = extraterrestrial_normal(sample.sun.distance_au, constant_w_m2);
            const ClearSky light = sky(sample.utc, e0, std::asin(sample.sin_elevation));
            totals.direct_j_m2 += light.beam_normal_w_m2 * sample.sin_elevation * sample.duration_s;
            totals.diffuse_j_m2 += light.diffuse_horizontal_w_m2 * sample.duration_s;
            totals.extraterrestrial_j_m2 += e0 * sample.sin_elevation * sample.duration_s;
            totals.sunlit_s += sample.duration_s;
        });
    return totals;
}

}  // namespace sunbudget
