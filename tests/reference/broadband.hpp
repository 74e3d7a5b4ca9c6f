#pragma once

#include <cmath>
#include <cstdint>
#include <limits>
#include <optional>
#include <span>

namespace sunbudget::test {

/// The weighted sum in double precision, one pixel.
inline double broadband_reference(std::span<const double> weights,
                                  std::span<const double> reflectance, double constant) {
    double sum = constant;
    for (std::size_t b = 0; b < weights.size(); ++b) sum += weights[b] * reflectance[b];
    return sum;
}

struct KeptAlbedo {
    double albedo;
    bool flagged;
};
inline KeptAlbedo keep_reference(double albedo, double margin) {
    if (std::isnan(albedo) || (albedo >= 0 && albedo <= 1)) return {albedo, false};
    if (albedo < 0 && albedo >= -margin) return {0, true};
    if (albedo > 1 && albedo <= 1 + margin) return {1, true};
    return {std::numeric_limits<double>::quiet_NaN(), true};
}

/// The numbered bits of a code as an integer, by division instead of masks; nothing for a negative
/// code.
inline std::optional<std::int64_t> bits_reference(std::int32_t code, int first_bit, int bits) {
    if (code < 0) return std::nullopt;
    std::int64_t rest = code;
    for (int i = 0; i < first_bit; ++i) rest /= 2;
    std::int64_t size = 1;
    for (int i = 0; i < bits; ++i) size *= 2;
    return rest % size;
}

}  // namespace sunbudget::test
