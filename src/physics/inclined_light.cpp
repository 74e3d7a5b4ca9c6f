#include "sunbudget/physics/inclined_light.hpp"

#include <cassert>
#include <cmath>
#include <limits>

#include "sunbudget/base/simd.hpp"

namespace sunbudget {

namespace {

struct Sun {
    const float *shaded, *hours, *east, *north, *up;
    float whole_east, whole_north, level_up, whole_up, whole_hours;
};

SUNBUDGET_CLONES
void sun_row(const Sun s, const float* n_east, const float* n_north, const float* n_up,
             float* __restrict out, std::size_t count) noexcept {
    for (std::size_t i = 0; i < count; ++i) {
        const float f = s.hours[i] / s.whole_hours;  // a division: exactly 1 where nothing is lost
        const float k = s.up[i] / s.whole_up;
        const float lost = k * (s.shaded[i] - f * (n_up[i] * s.level_up));
        const float turned = n_east[i] * (s.east[i] - k * s.whole_east) +
                             n_north[i] * (s.north[i] - k * s.whole_north);
        const float value = lost + (f * (n_up[i] * s.up[i]) + f * turned);
        out[i] = value < 0 ? 0.0F : value;  // NaN stays
    }
}

SUNBUDGET_CLONES
void sky_row(const float* view, const float* diffuse, const float* rim, const float* circumsolar,
             const float* circumsolar_up, const float* up, float* __restrict out,
             std::size_t count) noexcept {
    for (std::size_t i = 0; i < count; ++i) {
        const float even = diffuse[i] - circumsolar_up[i];
        const float left = view[i] / ((1.0F + up[i]) * 0.5F);
        const float open = left > 1 ? 1.0F : left;
        const float flat2 = 1.0F - up[i] * up[i];
        const float sine = std::sqrt(flat2 < 0 ? 0.0F : flat2);
        const float value = (diffuse[i] + (circumsolar[i] - circumsolar_up[i])) +
                            ((view[i] - 1.0F) * even + rim[i] * (sine * open));
        out[i] = value < 0 ? 0.0F : value;
    }
}

SUNBUDGET_CLONES
void ground_row(const float* view, const float* albedo, const float* direct, const float* diffuse,
                float* __restrict out, std::size_t count) noexcept {
    for (std::size_t i = 0; i < count; ++i)
        out[i] = (1.0F - view[i]) * albedo[i] * (direct[i] + diffuse[i]);
}

SUNBUDGET_CLONES
void time_row(const float* hours, float whole_hours, const float* open, float* __restrict out,
              std::size_t count) noexcept {
    for (std::size_t i = 0; i < count; ++i) out[i] = hours[i] / whole_hours * open[i];
}

/// No sun at the reference place: nothing is shared out, and nothing is divided by 0.
float divisor(float whole) {
    return whole > 0 ? whole : std::numeric_limits<float>::infinity();
}

}  // namespace

void sunlight(const SunlightRow& row, const NormalRow& normal, std::span<float> out) noexcept {
    assert(row.shaded.size() == out.size() && row.up.size() == out.size());
    const Sun sun{row.shaded.data(),     row.hours.data(),        row.east.data(), row.north.data(),
                  row.up.data(),         row.whole_east,          row.whole_north, row.whole_up,
                  divisor(row.whole_up), divisor(row.whole_hours)};
    sun_row(sun, normal.east.data(), normal.north.data(), normal.up.data(), out.data(), out.size());
}

void skylight(const SkyLightRow& row, std::span<const float> normal_up,
              std::span<float> out) noexcept {
    assert(row.sky_view.size() == out.size() && normal_up.size() == out.size());
    sky_row(row.sky_view.data(), row.diffuse.data(), row.rim.data(), row.circumsolar.data(),
            row.circumsolar_up.data(), normal_up.data(), out.data(), out.size());
}

void light_from_ground(std::span<const float> sky_view, std::span<const float> albedo_seen,
                       std::span<const float> direct_open, std::span<const float> diffuse_open,
                       std::span<float> out) noexcept {
    assert(sky_view.size() == out.size() && albedo_seen.size() == out.size());
    ground_row(sky_view.data(), albedo_seen.data(), direct_open.data(), diffuse_open.data(),
               out.data(), out.size());
}

void time_in_sun(std::span<const float> hours, float whole_hours, std::span<const float> open,
                 std::span<float> out) noexcept {
    assert(hours.size() == out.size() && open.size() == out.size());
    time_row(hours.data(), divisor(whole_hours), open.data(), out.data(), out.size());
}

SUNBUDGET_CLONES
void add_ground_and_sky(std::span<const float> ground_albedo, std::span<const float> once,
                        std::span<const float> twice, std::span<float> diffuse_w_m2) noexcept {
    const std::size_t count = diffuse_w_m2.size();
    const float* __restrict albedo = ground_albedo.data();
    const float* __restrict first = once.data();
    const float* __restrict second = twice.data();
    float* __restrict out = diffuse_w_m2.data();
    for (std::size_t i = 0; i < count; ++i) {
        const float back = albedo[i] * first[i];
        // No light, nothing to throw back: 0 / 0 is not meant.
        const float left = first[i] - albedo[i] * second[i];
        out[i] += back == 0 ? back : back * first[i] / left;
    }
}

}  // namespace sunbudget
