#include "sunbudget/physics/sky_view.hpp"

#include <cassert>
#include <cmath>
#include <numbers>

#include "sunbudget/base/simd.hpp"

namespace sunbudget {

namespace {

/// Arc tangent on [0, 1]: odd polynomial, least largest error 3.2e-7 in single precision (fitted for
/// this file against the C library's).
inline float small_atan(float r) noexcept {
    const float s = r * r;
    float p = 0.00681178189F;
    p = p * s + -0.0336041859F;
    p = p * s + 0.0796236321F;
    p = p * s + -0.132333399F;
    p = p * s + 0.19807815F;
    p = p * s + -0.33317368F;
    p = p * s + 0.999996112F;
    return p * r;
}

/// Angle from the zenith of a horizon whose elevation has the tangent t >= 0.
inline float zenith_angle(float t) noexcept {
    constexpr auto quarter = static_cast<float>(std::numbers::pi / 2);
    const bool steep = t > 1;
    const float over = steep ? 1.0F : t;
    const float under = steep ? t : 1.0F;
    const float angle = small_atan(over / under);
    return steep ? angle : quarter - angle;
}

SUNBUDGET_CLONES
void add_row(const float* tangent, const float* east, const float* north, const float* up,
             float to_east, float to_north, float* __restrict sum, std::size_t count) noexcept {
    for (std::size_t i = 0; i < count; ++i) {
        const float t = tangent[i];
        const float sine2 = 1.0F / (1.0F + t * t);  // of the angle from the zenith, squared
        const float along = east[i] * to_east + north[i] * to_north;
        sum[i] += up[i] * sine2 + along * (zenith_angle(t) - t * sine2);
    }
}

SUNBUDGET_CLONES
void scale_row(float* sum, float count, std::size_t length) noexcept {
    for (std::size_t i = 0; i < length; ++i) sum[i] /= count;
}

}  // namespace

void add_sky_view(std::span<const float> tangent, const NormalRow& normal, double azimuth_rad,
                  std::span<float> sum) noexcept {
    assert(tangent.size() == sum.size() && normal.up.size() == sum.size());
    assert(normal.east.size() == sum.size() && normal.north.size() == sum.size());
    add_row(tangent.data(), normal.east.data(), normal.north.data(), normal.up.data(),
            static_cast<float>(std::sin(azimuth_rad)), static_cast<float>(std::cos(azimuth_rad)),
            sum.data(), sum.size());
}

void finish_sky_view(std::span<float> sum, int directions) noexcept {
    scale_row(sum.data(), static_cast<float>(directions), sum.size());
}

}  // namespace sunbudget
