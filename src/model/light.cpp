#include "sunbudget/model/light.hpp"

#include <algorithm>
#include <cmath>
#include <limits>
#include <vector>

#include "sunbudget/base/units.hpp"
#include "sunbudget/physics/air_mass.hpp"
#include "sunbudget/physics/clear_sky.hpp"
#include "sunbudget/physics/integrate.hpp"
#include "sunbudget/physics/sun.hpp"
#include "sunbudget/physics/sun_place.hpp"
#include "sunbudget/raster/locator.hpp"

namespace sunbudget {

namespace {

/// Far below the quantum of stored fluxes (1/16 W m-2) and of the sky's own uncertainty.
constexpr double tolerance_w_m2 = 1.0 / 256;

}  // namespace

struct PointLight::Work {
    TimePlan times;
    Sky sky;
    SunTrack track;

    Work(const TimePlan& t, const Sky& s) : times(t), sky(s), track(t.earliest(), t.latest()) {}

    [[nodiscard]] FlatLight instant(double latitude_rad, double longitude_rad, double pressure) const {
        const auto sun = track.at(*times.instant);
        const auto local = times.zone.local(*times.instant, longitude_rad);
        const double sin_h = sin_elevation(sun, latitude_rad, longitude_rad);
        const auto light = esra2000(extraterrestrial_normal(sun.distance_au), std::asin(sin_h),
                                    sky.turbidity_of(local.date.month), pressure);
        return {light.beam_normal_w_m2 * std::max(0.0, sin_h), light.diffuse_horizontal_w_m2};
    }

    [[nodiscard]] FlatLight period(const Period& period, double latitude_rad, double longitude_rad,
                                   double pressure) const {
        double direct_j_m2 = 0, diffuse_j_m2 = 0;
        for (const auto& day : period.days) {
            const auto span = span_of(day, times.zone, longitude_rad);
            const double turbidity = sky.turbidity_of(day.date.month);
            const auto part = light_totals(
                track, span.begin, span.end, times.step_s, latitude_rad, longitude_rad,
                [&](UtcSeconds, double normal_w_m2, double elevation_rad) {
                    return esra2000(normal_w_m2, elevation_rad, turbidity, pressure);
                });
            direct_j_m2 += part.direct_j_m2;
            diffuse_j_m2 += part.diffuse_j_m2;
        }
        return {direct_j_m2 / period.duration_s, diffuse_j_m2 / period.duration_s};
    }
};

PointLight::PointLight(const TimePlan& times, const Sky& sky) : work_(std::make_unique<Work>(times, sky)) {}
PointLight::~PointLight() = default;
PointLight::PointLight(PointLight&&) noexcept = default;

std::size_t PointLight::bands() const { return work_->times.bands(); }

FlatLight PointLight::at(std::size_t band, double latitude_rad, double longitude_rad, double height_m) const {
    const double pressure = pressure_ratio(height_m);
    if (work_->times.instant) return work_->instant(latitude_rad, longitude_rad, pressure);
    return work_->period(work_->times.periods[band], latitude_rad, longitude_rad, pressure);
}

struct LightField::Work {
    PointLight light;
    std::vector<Locator> locators;  // one a thread
    SmoothField field;

    Work(const TimePlan& times, const Sky& sky, const Grid& grid, int threads, std::optional<double> height_m)
        : light(times, sky),
          field({grid.width, grid.height, 2 * times.bands(), tolerance_w_m2, height_m},
                [this](double column, double row, double h, int thread, std::span<double> values) {
                    at_node(column, row, h, thread, values);
                }) {
        locators.emplace_back(grid);
        for (int i = 1; i < threads; ++i) locators.push_back(locators.front().clone());
    }

    void at_node(double column, double row, double height_m, int thread, std::span<double> values) const {
        // Nodes are pixel centres; the locator counts from the pixel's outer corner.
        const auto place = locators[static_cast<std::size_t>(thread)].at(column + 0.5, row + 0.5);
        for (std::size_t band = 0; band < light.bands(); ++band) {
            constexpr double nan = std::numeric_limits<double>::quiet_NaN();
            const auto found = place ? light.at(band, place->latitude_rad, place->longitude_rad, height_m)
                                     : FlatLight{nan, nan};
            values[2 * band] = found.direct_w_m2;
            values[2 * band + 1] = found.diffuse_w_m2;
        }
    }
};

LightField::LightField(const TimePlan& times, const Sky& sky, const Grid& grid, int threads,
                       std::optional<double> constant_height_m)
    : work_(std::make_unique<Work>(times, sky, grid, threads, constant_height_m)) {}
LightField::~LightField() = default;

LightField::Block LightField::prepare(const Window& window, const Window& frame, const Plane<float>& heights_m,
                                      int thread) {
    return work_->field.prepare(window, frame, heights_m, thread);
}

}  // namespace sunbudget
