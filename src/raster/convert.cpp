#include "convert.hpp"

#include <cmath>
#include <limits>

#include "sunbudget/base/simd.hpp"

namespace sunbudget {
namespace {

// The kernels have no branches, so that the compiler turns them into vector code; templates cannot
// be cloned for CPUs, their inlined bodies can.

template <typename Stored>
inline std::uint64_t physical(const Stored* __restrict in, std::size_t count, Stored nodata,
                              double scale, double offset, float* __restrict out) noexcept {
    constexpr float nan = std::numeric_limits<float>::quiet_NaN();
    constexpr float largest = std::numeric_limits<float>::max();
    std::uint64_t infinities = 0;
    for (std::size_t i = 0; i < count; ++i) {
        const Stored stored = in[i];
        const auto value = static_cast<float>(static_cast<double>(stored) * scale + offset);
        const bool given = (stored == stored) & (stored != nodata);
        const bool finite = std::fabs(value) <= largest;
        out[i] = given & finite ? value : nan;
        infinities += given & !finite ? 1u : 0u;
    }
    return infinities;
}

template <typename Stored>
inline void codes(const Stored* __restrict in, std::size_t count, std::int32_t nodata,
                  std::int32_t* __restrict out) noexcept {
    for (std::size_t i = 0; i < count; ++i) {
        const std::int32_t code = in[i];
        out[i] = code == nodata ? no_code : code;
    }
}

SUNBUDGET_CLONES std::uint64_t physical_floats(const float* in, std::size_t count, float nodata,
                                               double scale, double offset, float* out) noexcept {
    return physical(in, count, nodata, scale, offset, out);
}
SUNBUDGET_CLONES std::uint64_t physical_doubles(const double* in, std::size_t count, double nodata,
                                                double scale, double offset, float* out) noexcept {
    return physical(in, count, nodata, scale, offset, out);
}
SUNBUDGET_CLONES void codes_of_bytes(const std::uint8_t* in, std::size_t count, std::int32_t nodata,
                                     std::int32_t* out) noexcept {
    codes(in, count, nodata, out);
}
SUNBUDGET_CLONES void codes_of_integers(const std::int32_t* in, std::size_t count,
                                        std::int32_t nodata, std::int32_t* out) noexcept {
    codes(in, count, nodata, out);
}

}  // namespace

template <>
std::uint64_t physical_row(const float* in, std::size_t count, float nodata, const Scaling& scaling,
                           float* out) noexcept {
    return physical_floats(in, count, nodata, scaling.scale, scaling.offset, out);
}
template <>
std::uint64_t physical_row(const double* in, std::size_t count, double nodata,
                           const Scaling& scaling, float* out) noexcept {
    return physical_doubles(in, count, nodata, scaling.scale, scaling.offset, out);
}

template <>
void code_row(const std::uint8_t* in, std::size_t count, std::int32_t nodata,
              std::int32_t* out) noexcept {
    codes_of_bytes(in, count, nodata, out);
}
template <>
void code_row(const std::int32_t* in, std::size_t count, std::int32_t nodata,
              std::int32_t* out) noexcept {
    codes_of_integers(in, count, nodata, out);
}

template <typename Value>
void drop_masked(const std::uint8_t* mask, std::size_t count, Value none, Value* row) noexcept {
    for (std::size_t i = 0; i < count; ++i) row[i] = mask[i] == 0 ? none : row[i];
}
template void drop_masked(const std::uint8_t*, std::size_t, float, float*) noexcept;
template void drop_masked(const std::uint8_t*, std::size_t, double, double*) noexcept;
template void drop_masked(const std::uint8_t*, std::size_t, std::int32_t, std::int32_t*) noexcept;

}  // namespace sunbudget
