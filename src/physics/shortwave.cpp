#include "sunbudget/physics/shortwave.hpp"

#include <cassert>

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

}  // namespace

void absorbed_shortwave(std::span<const float> albedo_direct, std::span<const float> direct,
                        std::span<const float> albedo_diffuse, std::span<const float> diffuse,
                        std::span<float> absorbed) noexcept {
    assert(albedo_direct.size() == absorbed.size() && direct.size() == absorbed.size());
    assert(albedo_diffuse.size() == absorbed.size() && diffuse.size() == absorbed.size());
    absorb(absorbed.size(), albedo_direct.data(), direct.data(), albedo_diffuse.data(),
           diffuse.data(), absorbed.data());
}

}  // namespace sunbudget
