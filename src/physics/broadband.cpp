#include "sunbudget/physics/broadband.hpp"

#include <algorithm>
#include <cassert>
#include <limits>

#include "sunbudget/base/simd.hpp"

namespace sunbudget {

namespace {

// Band by band into the row of results: a row stays in the first-level cache, and the inner loop
// needs no count of bands known beforehand.
SUNBUDGET_CLONES void add_band(std::size_t count, float weight, const float* reflectance,
                               float* __restrict sum) noexcept {
    for (std::size_t i = 0; i < count; ++i) sum[i] += weight * reflectance[i];
}

// NaN compares false with everything: it is not outside, and stays. Two loops, since the compiler makes
// no vector loop of one that compares floats for both a float and a short result.
SUNBUDGET_CLONES void flag_outside(std::size_t count, const float* albedo, std::uint16_t flag,
                                   std::uint16_t* __restrict flags) noexcept {
    for (std::size_t i = 0; i < count; ++i) {
        const int outside = static_cast<int>(albedo[i] < 0) | static_cast<int>(albedo[i] > 1);
        flags[i] = static_cast<std::uint16_t>(flags[i] | (flag & -outside));
    }
}

SUNBUDGET_CLONES void keep(std::size_t count, float* albedo, float lowest, float highest) noexcept {
    constexpr float nodata = std::numeric_limits<float>::quiet_NaN();
    for (std::size_t i = 0; i < count; ++i) {
        float a = albedo[i];
        a = a < lowest ? nodata : a;
        a = a > highest ? nodata : a;
        a = a < 0 ? 0 : a;
        albedo[i] = a > 1 ? 1 : a;
    }
}

}  // namespace

void broadband_sum(std::span<const WeightedBand> bands, float constant,
                   std::span<float> albedo) noexcept {
    assert(bands.size() <= most_bands);
    std::fill(albedo.begin(), albedo.end(), constant);
    for (const auto& band : bands) {
        assert(band.reflectance.size() == albedo.size());
        add_band(albedo.size(), band.weight, band.reflectance.data(), albedo.data());
    }
}

void keep_albedo(std::span<float> albedo, float margin, std::uint16_t flag,
                 std::span<std::uint16_t> flags) noexcept {
    assert(flags.size() == albedo.size() && margin >= 0);
    flag_outside(albedo.size(), albedo.data(), flag, flags.data());
    keep(albedo.size(), albedo.data(), -margin, 1 + margin);
}

}  // namespace sunbudget
