#pragma once

#include <bit>
#include <cstdint>

/// Put in front of a row kernel: the compiler makes a version for each of these CPU generations and
/// the loader picks one at start. Without contraction into fused multiply-adds all versions give the
/// same bits. Off under clang, whose thread sanitiser cannot run such functions.
#if defined(__GNUC__) && !defined(__clang__) && defined(__x86_64__) && \
    !defined(__SANITIZE_THREAD__) && !defined(__SANITIZE_ADDRESS__)
#define SUNBUDGET_CLONES \
    __attribute__((target_clones("arch=x86-64-v4", "arch=x86-64-v3", "default")))
#else
#define SUNBUDGET_CLONES
#endif

namespace sunbudget {

// Choices by bits, for row kernels: a written-out choice between numbers of which one would be
// converted or summed becomes a branch, and the loop no vector code.

[[nodiscard]] inline int zero_or_one(bool condition) noexcept {
    return static_cast<int>(condition);
}
[[nodiscard]] inline float zero_if_nan(float value) noexcept {
    const auto keep = static_cast<std::uint32_t>(-zero_or_one(value == value));
    return std::bit_cast<float>(std::bit_cast<std::uint32_t>(value) & keep);
}
[[nodiscard]] inline double zero_if_nan(double value) noexcept {
    const auto keep = static_cast<std::uint64_t>(-std::int64_t{zero_or_one(value == value)});
    return std::bit_cast<double>(std::bit_cast<std::uint64_t>(value) & keep);
}

}  // namespace sunbudget
