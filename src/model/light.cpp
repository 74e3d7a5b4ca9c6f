#include "sunbudget/model/light.hpp"

#include <algorithm>
#include <cmath>
#include <numbers>
#include <set>
#include <vector>

#include "sunbudget/base/units.hpp"
#include "sunbudget/physics/air_mass.hpp"
#include "sunbudget/physics/integrate.hpp"
#include "sunbudget/physics/sun.hpp"
#include "sunbudget/physics/sun_place.hpp"

namespace sunbudget {

namespace {

constexpr double sea_level_hpa = 1013.25;

/// Rotation from Earth-fixed vectors to a place's east, north and up.
struct LocalFrame {
    EarthVector east, north, up;

    LocalFrame(double latitude_rad, double longitude_rad)
        : east{-std::sin(longitude_rad), std::cos(longitude_rad), 0},
          north{-std::sin(latitude_rad) * std::cos(longitude_rad),
                -std::sin(latitude_rad) * std::sin(longitude_rad), std::cos(latitude_rad)},
          up(up_direction(latitude_rad, longitude_rad)) {}

    /// Unit vector to the sun, its height lowered by parallax.
    [[nodiscard]] std::array<double, 3> to(const SunState& sun) const {
        const auto s = sun_direction(sun);
        const double sine = with_parallax(dot(s, up), sun.distance_au);
        const double e = dot(s, east), n = dot(s, north);
        const double level = std::hypot(e, n);
        const double scale = level > 0 ? std::sqrt(std::max(0.0, 1 - sine * sine)) / level : 0;
        return {e * scale, n * scale, sine};
    }
};

/// One lit moment of a band with its weight in the band's mean.
struct LitMoment {
    std::array<double, 3> to_sun;
    UtcSeconds begin, end;  ///< equal for an instant
    double weight;          ///< share of the period: W m-2 times weight add up to its mean
    SkyMoment sky;

    [[nodiscard]] double sunlit_h_a_day() const { return 24 * weight; }
};

/// Sine of the elevation at which the sun appears.
double apparent_sine(double true_sine, double pressure) {
    const double elevation_rad = std::asin(std::clamp(true_sine, -1.0, 1.0));
    return std::sin(elevation_rad + refraction(elevation_rad, sea_level_hpa * pressure));
}

std::array<double, 3> scaled(const std::array<double, 3>& v, double factor) {
    return {v[0] * factor, v[1] * factor, v[2] * factor};
}

void add(std::array<double, 3>& sum, const std::array<double, 3>& v, double factor) {
    for (std::size_t i = 0; i < 3; ++i) sum[i] += v[i] * factor;
}

}  // namespace

struct PointLight::Work {
    TimePlan times;
    Sky sky;
    SunTrack track;

    Work(const TimePlan& t, const Sky& s) : times(t), sky(s), track(t.earliest(), t.latest()) {}

    /// Calls visit(LitMoment) for every lit step of a band, in order.
    template <typename Visit>
    void visit(std::size_t band, int only_month, const Sky& under, double latitude_rad,
               double longitude_rad, double height_m, Visit&& visit) const {
        const LocalFrame frame(latitude_rad, longitude_rad);
        const double pressure = pressure_ratio(height_m);
        if (times.instant) {
            const auto sun = track.at(*times.instant);
            const auto to_sun = frame.to(sun);
            if (to_sun[2] <= 0) return;
            const int month = times.zone.local(*times.instant, longitude_rad).date.month;
            visit(LitMoment{
                to_sun, *times.instant, *times.instant, 1,
                sky_moment(under, {*times.instant, month, extraterrestrial_normal(sun.distance_au),
                                   std::asin(to_sun[2]), height_m, pressure})});
            return;
        }
        const auto& period = times.periods[band];
        for (const auto& day : period.days) {
            if (only_month != 0 && day.date.month != only_month) continue;
            const auto span = span_of(day, times.zone, longitude_rad);
            for_each_sunlit_step(
                track, span.begin, span.end, times.step_s, latitude_rad, longitude_rad,
                [&](const SunSample& sample) {
                    const auto to_sun = frame.to(sample.sun);
                    visit(LitMoment{
                        to_sun, sample.utc - sample.duration_s / 2,
                        sample.utc + sample.duration_s / 2,
                        sample.duration_s * day.weight / period.duration_s,
                        sky_moment(under,
                                   {sample.utc, day.date.month,
                                    extraterrestrial_normal(sample.sun.distance_au),
                                    std::asin(to_sun[2]), height_m, pressure, sample.duration_s})});
                });
        }
    }
};

PointLight::PointLight(const TimePlan& times, const Sky& sky)
    : work_(std::make_unique<Work>(times, sky)) {}
PointLight::~PointLight() = default;
PointLight::PointLight(PointLight&&) noexcept = default;

std::size_t PointLight::bands() const {
    return work_->times.bands();
}

std::size_t PointLight::most_suns(std::size_t first_band, std::size_t bands) const {
    if (work_->times.instant) return 1;
    constexpr double fewest_a_day = 32;  // for_each_sunlit_step cuts a day no coarser
    double suns = 0;
    for (std::size_t band = first_band; band < first_band + bands; ++band)
        for (const auto& day : work_->times.periods[band].days)
            suns += std::max(fewest_a_day, (day.end_s - day.begin_s) / work_->times.step_s);
    return static_cast<std::size_t>(suns);
}

OpenLight PointLight::at(std::size_t band, double latitude_rad, double longitude_rad,
                         double height_m) const {
    return at(band, 0, work_->sky, latitude_rad, longitude_rad, height_m);
}

OpenLight PointLight::at(std::size_t band, int month, const Sky& sky, double latitude_rad,
                         double longitude_rad, double height_m) const {
    OpenLight sum;
    work_->visit(band, month, sky, latitude_rad, longitude_rad, height_m, [&](const LitMoment& m) {
        add(sum.beam_w_m2, m.to_sun, m.sky.beam_normal_w_m2 * m.weight);
        add(sum.circumsolar_w_m2, m.to_sun, m.sky.parts.circumsolar_normal_w_m2 * m.weight);
        sum.diffuse_w_m2 += m.sky.diffuse_w_m2 * m.weight;
        sum.horizon_w_m2 += m.sky.parts.horizon_w_m2 * m.weight;
        sum.sunlit_h_a_day += m.sunlit_h_a_day();
        sum.thrown_back_w_m2 += m.sky.thrown_back_w_m2 * m.weight;
        sum.thrown_back_twice_w_m2 += m.sky.thrown_back_twice_w_m2 * m.weight;
    });
    return sum;
}

const Sky& PointLight::sky() const {
    return work_->sky;
}

std::vector<int> PointLight::months_of(std::size_t band) const {
    if (work_->times.instant) return {0};
    std::set<int> months;
    for (const auto& day : work_->times.periods[band].days) months.insert(day.date.month);
    return {months.begin(), months.end()};
}

std::vector<SunStep> PointLight::path(std::size_t band, double latitude_rad, double longitude_rad,
                                      double height_m) const {
    std::vector<SunStep> path;
    const LocalFrame frame(latitude_rad, longitude_rad);
    const double pressure = pressure_ratio(height_m);
    const auto pressure_at = [&](UtcSeconds utc) {
        if (!work_->sky.pressure) return pressure;
        return pressure * work_->sky.pressure_factor(
                              utc, work_->times.zone.local(utc, longitude_rad).date.month);
    };
    const auto apparent_at = [&](UtcSeconds utc) {
        return apparent_sine(frame.to(work_->track.at(utc))[2], pressure_at(utc));
    };
    UtcSeconds last_end = 0;
    double last_sine = 0;
    work_->visit(
        band, 0, work_->sky, latitude_rad, longitude_rad, height_m, [&](const LitMoment& m) {
            // A step mostly begins where the last one ended, but for the rounding of its middle.
            constexpr double same_s = 1e-3;
            const double begin =
                std::abs(m.begin - last_end) < same_s ? last_sine : apparent_at(m.begin);
            const double end = m.end > m.begin ? apparent_at(m.end) : begin;
            last_end = m.end;
            last_sine = end;
            double azimuth_rad = std::atan2(m.to_sun[0], m.to_sun[1]);
            if (azimuth_rad < 0) azimuth_rad += 2 * std::numbers::pi;
            path.push_back({azimuth_rad, std::min(begin, end), std::max(begin, end),
                            scaled(m.to_sun, m.sky.beam_normal_w_m2 * m.weight), m.sunlit_h_a_day(),
                            scaled(m.to_sun, m.sky.parts.circumsolar_normal_w_m2 * m.weight)});
        });
    return path;
}

}  // namespace sunbudget
