#include "sunbudget/physics/sun_day.hpp"

#include <algorithm>
#include <cmath>
#include <numbers>

#include "sunbudget/physics/sun_place.hpp"

namespace sunbudget {

namespace {

using Height = std::function<double(UtcSeconds)>;

struct Sample {
    UtcSeconds utc;
    double height;
};

constexpr double sample_step_s = 1800;

/// Where the parabola through three samples turns; they are equally spaced and the middle is
/// extreme.
UtcSeconds vertex(const Sample& a, const Sample& b, const Sample& c) {
    const double bend = a.height - 2 * b.height + c.height;
    if (bend == 0) return b.utc;
    return b.utc + (b.utc - a.utc) * 0.5 * (a.height - c.height) / bend;
}

bool turns(const Sample& a, const Sample& b, const Sample& c) {
    return (b.height >= a.height && b.height >= c.height) ||
           (b.height <= a.height && b.height <= c.height);
}

/// Samples between which `height` only rises or only falls.
std::vector<Sample> monotone_samples(const Height& height, UtcSeconds begin, UtcSeconds end) {
    const auto count = static_cast<long>(std::ceil((end - begin) / sample_step_s)) + 3;
    std::vector<Sample> samples;
    samples.reserve(static_cast<std::size_t>(count) * 2);
    Sample before{}, here{};
    for (long i = 0; i < count; ++i) {
        const UtcSeconds utc = begin + static_cast<double>(i - 1) * sample_step_s;
        const Sample next{utc, height(utc)};
        if (i >= 2 && turns(before, here, next)) {
            const UtcSeconds turn = vertex(before, here, next);
            if (turn < here.utc) samples.insert(samples.end() - 1, {turn, height(turn)});
            if (turn > here.utc) samples.push_back({turn, height(turn)});
        }
        samples.push_back(next);
        before = here;
        here = next;
    }
    return samples;
}

/// The zero between two samples of different sign: regula falsi, the kept end's weight halved (the
/// Illinois rule), which never leaves the bracket.
UtcSeconds zero_between(const Height& height, Sample a, Sample b) {
    constexpr double precision_s = 1e-4;
    for (int i = 0; i < 60 && std::abs(b.utc - a.utc) > precision_s; ++i) {
        const double fraction = a.height / (a.height - b.height);
        const UtcSeconds utc = a.utc + fraction * (b.utc - a.utc);
        const Sample middle{utc, height(utc)};
        if (middle.height == 0) return utc;
        if ((middle.height > 0) != (b.height > 0))
            a = b;
        else
            a.height *= 0.5;
        const bool arrived = std::abs(middle.utc - b.utc) < precision_s;
        b = middle;
        if (arrived) break;
    }
    return b.utc;
}

}  // namespace

std::vector<TimeSpan> spans_above_zero(const Height& height, UtcSeconds begin, UtcSeconds end) {
    std::vector<TimeSpan> spans;
    const auto samples = monotone_samples(height, begin, end);
    UtcSeconds opened = samples.front().utc;
    const auto close = [&](UtcSeconds closed) {
        const TimeSpan span{std::max(opened, begin), std::min(closed, end)};
        if (span.end > span.begin) spans.push_back(span);
    };
    for (std::size_t i = 1; i < samples.size(); ++i) {
        const bool was_up = samples[i - 1].height > 0, is_up = samples[i].height > 0;
        if (was_up == is_up) continue;
        const UtcSeconds zero = zero_between(height, samples[i - 1], samples[i]);
        if (is_up)
            opened = zero;
        else
            close(zero);
    }
    if (samples.back().height > 0) close(samples.back().utc);
    return spans;
}

namespace {

/// The first instant in [begin, end) at which the sun is on the meridian.
std::optional<UtcSeconds> first_transit(const SunTrack& track, UtcSeconds begin, UtcSeconds end,
                                        double longitude_rad) {
    constexpr double two_pi = 2 * std::numbers::pi;
    constexpr double margin_s = 60;
    const auto hour_angle_rad = [&](UtcSeconds utc) {
        return track.at(utc).greenwich_hour_angle_rad + longitude_rad;
    };
    const double to_go_turns = -hour_angle_rad(begin) / two_pi;
    UtcSeconds utc = begin + (to_go_turns - std::floor(to_go_turns)) * seconds_per_day;
    // The true day differs from the mean one by up to 30 s: what is left shrinks 3000-fold a round.
    for (int round = 0; round < 3 && utc < end + margin_s; ++round)
        utc -= std::remainder(hour_angle_rad(utc), two_pi) / two_pi * seconds_per_day;
    if (utc < begin) utc += seconds_per_day;
    return utc < end ? std::optional(utc) : std::nullopt;
}

}  // namespace

SunDay sun_day(const SunTrack& track, UtcSeconds begin, UtcSeconds end, double latitude_rad,
               double longitude_rad, double threshold_rad) {
    const auto up = up_direction(latitude_rad, longitude_rad);
    const double threshold = std::sin(threshold_rad);
    const auto spans = spans_above_zero(
        [&](UtcSeconds utc) { return dot(sun_direction(track.at(utc)), up) - threshold; }, begin,
        end);
    SunDay day;
    for (const auto& span : spans) {
        day.day_length_s += span.end - span.begin;
        if (span.begin > begin && !day.sunrise) day.sunrise = span.begin;
        if (span.end < end) day.sunset = span.end;
    }
    day.always_down = spans.empty();
    day.always_up = !spans.empty() && !day.sunrise && !day.sunset;
    day.transit = first_transit(track, begin, end, longitude_rad);
    return day;
}

double sunset_hour_angle_rad(double latitude_rad, double declination_rad) noexcept {
    const double cosine = -std::tan(latitude_rad) * std::tan(declination_rad);
    if (cosine >= 1) return 0;
    if (cosine <= -1) return std::numbers::pi;
    return std::acos(cosine);
}

double daily_extraterrestrial_j_m2(double extraterrestrial_normal_w_m2, double latitude_rad,
                                   double declination_rad) noexcept {
    const double ws = sunset_hour_angle_rad(latitude_rad, declination_rad);
    const double mean_sine = ws * std::sin(latitude_rad) * std::sin(declination_rad) +
                             std::cos(latitude_rad) * std::cos(declination_rad) * std::sin(ws);
    return seconds_per_day / std::numbers::pi * extraterrestrial_normal_w_m2 * mean_sine;
}

}  // namespace sunbudget
