#include "sunbudget/physics/shortwave.hpp"

#include <cassert>
#include <cmath>

#include "sunbudget/base/simd.hpp"

namespace sunbudget {

namespace {

// `absorbed` may be one of the inputs: each pixel is read before it is written. The compiler checks
// for overlap once a row and takes a plain loop then, with the same result.
SUNBUDGET_CLONES void absorb(std::size_t count, const float* albedo_direct, const float* direct,
                             const float* albedo_diffuse, const float* diffuse,
                             float* absorbed) noexcept {
    for (std::size_t i = 0; i < count; ++i)
        absorbed[i] = (1 - albedo_direct[i]) * direct[i] + (1 - albedo_diffuse[i]) * diffuse[i];
}

SUNBUDGET_CLONES void propagate(std::size_t count, const float* albedo, const float* own,
                                const float* light, float light_uncertainty,
                                float* uncertainty) noexcept {
    for (std::size_t i = 0; i < count; ++i) {
        const float of_light = (1 - albedo[i]) * light_uncertainty;
        uncertainty[i] = light[i] * std::sqrt(own[i] * own[i] + of_light * of_light);
    }
}

}  // namespace

void absorbed_shortwave(std::span<const float> albedo_direct, std::span<const float> direct,
                        std::span<const float> albedo_diffuse, std::span<const float> diffuse,
                        std::span<float> absorbed) noexcept {
    assert(albedo_direct.size() == absorbed.size() && direct.size() == absorbed.size());
    assert(albedo_diffuse.size() == absorbed.size() && diffuse.size() == absorbed.size());
    absorb(absorbed.size(), albedo_direct.data(), direct.data(), albedo_diffuse.data(),
           diffuse.data(), absorbed.data());
}

void absorbed_uncertainty(std::span<const float> albedo, std::span<const float> albedo_uncertainty,
                          std::span<const float> light, float light_uncertainty,
                          std::span<float> uncertainty) noexcept {
    assert(albedo.size() == uncertainty.size() && light.size() == uncertainty.size());
    assert(albedo_uncertainty.size() == uncertainty.size());
    propagate(uncertainty.size(), albedo.data(), albedo_uncertainty.data(), light.data(),
              light_uncertainty, uncertainty.data());
}

}  // namespace sunbudget
