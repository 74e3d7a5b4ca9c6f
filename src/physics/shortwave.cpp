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

// Multiplying by a power of two and back is exact: only rint rounds.
SUNBUDGET_CLONES void round_row(std::size_t count, float* row, float quantum,
                                float inverse) noexcept {
    for (std::size_t i = 0; i < count; ++i) row[i] = std::rint(row[i] * inverse) * quantum;
}

[[maybe_unused]] bool is_power_of_two(float value) noexcept {
    int exponent = 0;
    return std::frexp(value, &exponent) == 0.5F && exponent > -60 && exponent <= 61;
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

void quantise(std::span<float> row, float quantum) noexcept {
    assert(is_power_of_two(quantum));
    round_row(row.size(), row.data(), quantum, 1 / quantum);
}

}  // namespace sunbudget
