#include "sunbudget/model/light.hpp"

#include <algorithm>
#include <cmath>
#include <limits>
#include <numbers>
#include <vector>

#include "sunbudget/base/units.hpp"
#include "sunbudget/physics/air_mass.hpp"
#include "sunbudget/physics/integrate.hpp"
#include "sunbudget/physics/sun.hpp"
#include "sunbudget/physics/sun_place.hpp"

namespace sunbudget {

namespace {

/// Far below the quantum of stored fluxes (1/16 W m-2) and of the sky's own uncertainty.
constexpr double tolerance_w_m2 = 1.0 / 256;

constexpr double sea_level_hpa = 1013.25;

/// Rotation from Earth-fixed vectors to a place's east, north and up.
struct LocalFrame {
    EarthVector east, north, up;

    LocalFrame(double latitude_rad, double longitude_rad)
        : east{-std::sin(longitude_rad), std::cos(longitude_rad), 0},
          north{-std::sin(latitude_rad) * std::cos(longitude_rad), -std::sin(latitude_rad) * std::sin(longitude_rad),
                std::cos(latitude_rad)},
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
    double weight;                ///< share of the period: W m-2 times weight add up to its mean
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
    void visit(std::size_t band, double latitude_rad, double longitude_rad, double height_m, Visit&& visit) const {
        const LocalFrame frame(latitude_rad, longitude_rad);
        const double pressure = pressure_ratio(height_m);
        if (times.instant) {
            const auto sun = track.at(*times.instant);
            const auto to_sun = frame.to(sun);
            if (to_sun[2] <= 0) return;
            const int month = times.zone.local(*times.instant, longitude_rad).date.month;
            visit(LitMoment{to_sun, *times.instant, *times.instant, 1,
                            sky_moment(sky, {*times.instant, month, extraterrestrial_normal(sun.distance_au),
                                             std::asin(to_sun[2]), height_m, pressure})});
            return;
        }
        const auto& period = times.periods[band];
        for (const auto& day : period.days) {
            const auto span = span_of(day, times.zone, longitude_rad);
            for_each_sunlit_step(
                track, span.begin, span.end, times.step_s, latitude_rad, longitude_rad, [&](const SunSample& sample) {
                    const auto to_sun = frame.to(sample.sun);
                    visit(LitMoment{to_sun, sample.utc - sample.duration_s / 2, sample.utc + sample.duration_s / 2,
                                    sample.duration_s * day.weight / period.duration_s,
                                    sky_moment(sky, {sample.utc, day.date.month,
                                                     extraterrestrial_normal(sample.sun.distance_au),
                                                     std::asin(to_sun[2]), height_m, pressure})});
                });
        }
    }
};

PointLight::PointLight(const TimePlan& times, const Sky& sky) : work_(std::make_unique<Work>(times, sky)) {}
PointLight::~PointLight() = default;
PointLight::PointLight(PointLight&&) noexcept = default;

std::size_t PointLight::bands() const { return work_->times.bands(); }

std::size_t PointLight::most_suns(std::size_t first_band, std::size_t bands) const {
    if (work_->times.instant) return 1;
    constexpr double fewest_a_day = 32;  // for_each_sunlit_step cuts a day no coarser
    double suns = 0;
    for (std::size_t band = first_band; band < first_band + bands; ++band)
        for (const auto& day : work_->times.periods[band].days)
            suns += std::max(fewest_a_day, (day.end_s - day.begin_s) / work_->times.step_s);
    return static_cast<std::size_t>(suns);
}

OpenLight PointLight::at(std::size_t band, double latitude_rad, double longitude_rad, double height_m) const {
    OpenLight sum;
    work_->visit(band, latitude_rad, longitude_rad, height_m, [&](const LitMoment& m) {
        add(sum.beam_w_m2, m.to_sun, m.sky.beam_normal_w_m2 * m.weight);
        add(sum.circumsolar_w_m2, m.to_sun, m.sky.parts.circumsolar_normal_w_m2 * m.weight);
        sum.diffuse_w_m2 += m.sky.diffuse_w_m2 * m.weight;
        sum.horizon_w_m2 += m.sky.parts.horizon_w_m2 * m.weight;
        sum.sunlit_h_a_day += m.sunlit_h_a_day();
    });
    return sum;
}

std::vector<SunStep> PointLight::path(std::size_t band, double latitude_rad, double longitude_rad, double height_m) const {
    std::vector<SunStep> path;
    const LocalFrame frame(latitude_rad, longitude_rad);
    const double pressure = pressure_ratio(height_m);
    const auto apparent_at = [&](UtcSeconds utc) { return apparent_sine(frame.to(work_->track.at(utc))[2], pressure); };
    UtcSeconds last_end = 0;
    double last_sine = 0;
    work_->visit(band, latitude_rad, longitude_rad, height_m, [&](const LitMoment& m) {
        // A step mostly begins where the last one ended, but for the rounding of its middle.
        constexpr double same_s = 1e-3;
        const double begin = std::abs(m.begin - last_end) < same_s ? last_sine : apparent_at(m.begin);
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

struct LightField::Work {
    PointLight light;
    bool vectors;
    std::vector<Locator> locators;  // one a thread
    SmoothField field;

    [[nodiscard]] std::size_t values_a_band() const { return vectors ? OpenLight::values : 2; }

    Work(const TimePlan& times, const Sky& sky, const Grid& grid, int threads, std::optional<double> height_m, bool v)
        : light(times, sky),
          vectors(v),
          field({grid.width, grid.height, (v ? OpenLight::values : 2) * times.bands(), tolerance_w_m2, height_m},
                [this](double column, double row, double h, int thread, std::span<double> values) {
                    at_node(column, row, h, thread, values);
                }) {
        locators.emplace_back(grid);
        for (int i = 1; i < threads; ++i) locators.push_back(locators.front().clone());
    }

    void at_node(double column, double row, double height_m, int thread, std::span<double> values) const {
        // Nodes are pixel centres; the locator counts from the pixel's outer corner.
        const auto place = locators[static_cast<std::size_t>(thread)].at(column + 0.5, row + 0.5);
        if (!place) {
            std::fill(values.begin(), values.end(), std::numeric_limits<double>::quiet_NaN());
            return;
        }
        for (std::size_t band = 0; band < light.bands(); ++band) {
            const auto found = light.at(band, place->latitude_rad, place->longitude_rad, height_m);
            double* to = values.data() + band * values_a_band();
            if (!vectors) {
                to[0] = found.direct_w_m2();
                to[1] = found.diffuse_w_m2;
                continue;
            }
            std::copy(found.beam_w_m2.begin(), found.beam_w_m2.end(), to);
            std::copy(found.circumsolar_w_m2.begin(), found.circumsolar_w_m2.end(), to + 3);
            to[6] = found.diffuse_w_m2;
            to[7] = found.horizon_w_m2;
            to[8] = found.sunlit_h_a_day;
        }
    }
};

LightField::LightField(const TimePlan& times, const Sky& sky, const Grid& grid, int threads,
                       std::optional<double> constant_height_m, bool vectors)
    : work_(std::make_unique<Work>(times, sky, grid, threads, constant_height_m, vectors)) {}
LightField::~LightField() = default;

LightField::Block LightField::prepare(const Window& window, const Window& frame, const Plane<float>& heights_m,
                                      int thread) {
    return work_->field.prepare(window, frame, heights_m, thread);
}

void LightField::fill(const Block& block, std::size_t band, Part part, const Plane<float>& heights_m,
                      Plane<float>& out) const {
    const auto value = work_->vectors ? static_cast<std::size_t>(part) : part == Part::beam_up ? 0u : 1u;
    block.fill(band * work_->values_a_band() + value, heights_m, out);
}

const PointLight& LightField::point() const { return work_->light; }
const Locator& LightField::locator(int thread) const { return work_->locators[static_cast<std::size_t>(thread)]; }

}  // namespace sunbudget
