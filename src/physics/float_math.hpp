#pragma once

#include <bit>
#include <cmath>
#include <cstdint>

namespace sunbudget {

// exp and log in float that GCC can put into vector loops, which it cannot do with the library's; the
// double overloads are the library's, so that one formula serves both. Reduction by two-part constants
// after Cody & Waite, Software Manual for the Elementary Functions (1980); coefficients of the
// polynomials as in Moshier's Cephes library (netlib, 1989), good to 2 units in the last place.

/// For -87 < x < 88; NaN stays.
inline float exp_of(float x) noexcept {
    constexpr float round_by =
        12582912.0F;  // 1.5 * 2^23: adding it leaves the nearest whole number
    const float shifted = x * 1.44269504F + round_by;
    const float whole = shifted - round_by;
    const float rest = (x - whole * 0.693359375F) + whole * 2.12194440e-4F;  // ln 2 in two parts
    float p = 1.9875691500e-4F;
    for (const float c :
         {1.3981999507e-3F, 8.3334519073e-3F, 4.1665795894e-2F, 1.6666665459e-1F, 5.0000001201e-1F})
        p = p * rest + c;
    const float value = (p * (rest * rest) + rest) + 1.0F;
    const auto power = (std::bit_cast<std::uint32_t>(shifted) + 127U) << 23U;  // 2^whole
    return value * std::bit_cast<float>(power);
}

/// For normal numbers above 0; something near the logarithm of the least one at 0; NaN stays.
inline float log_of(float x) noexcept {
    // The mantissa goes into [sqrt(1/2), sqrt(2)), the rest into the exponent.
    constexpr std::uint32_t root_half = 0x3f3504f3U;
    const auto bits = std::bit_cast<std::uint32_t>(x);
    const auto exponent = static_cast<std::int32_t>(bits - root_half) >> 23;
    const float whole = static_cast<float>(exponent);
    const float m =
        std::bit_cast<float>(bits - (static_cast<std::uint32_t>(exponent) << 23U)) - 1.0F;
    float p = 7.0376836292e-2F;
    for (const float c : {-1.1514610310e-1F, 1.1676998740e-1F, -1.2420140846e-1F, 1.4249322787e-1F,
                          -1.6668057665e-1F, 2.0000714765e-1F, -2.4999993993e-1F, 3.3333331174e-1F})
        p = p * m + c;
    const float square = m * m;
    const float value = m + ((p * m * square - whole * 2.12194440e-4F) - 0.5F * square);
    return (value + whole * 0.693359375F) + (x - x);  // the last term is 0, or NaN for NaN
}

inline double exp_of(double x) noexcept {
    return std::exp(x);
}
inline double log_of(double x) noexcept {
    return std::log(x);
}

}  // namespace sunbudget
