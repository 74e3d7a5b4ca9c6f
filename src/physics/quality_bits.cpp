#include "sunbudget/physics/quality_bits.hpp"

#include <cassert>
#include <cstddef>
#include <limits>

#include "sunbudget/base/simd.hpp"

namespace sunbudget {

namespace {

// One compare a pixel: (code & wanted bits) == value in place, instead of shifting every code. The
// sign bit is part of the mask, so that a negative code never matches.
SUNBUDGET_CLONES void apply_test(std::size_t count, const std::int32_t* codes, std::int32_t mask,
                                 std::int32_t value, std::uint16_t flag, RejectReason reason,
                                 std::uint16_t* __restrict flags,
                                 RejectReason* __restrict reasons) noexcept {
    for (std::size_t i = 0; i < count; ++i) {
        const bool holds = (codes[i] & mask) == value;
        flags[i] = static_cast<std::uint16_t>(flags[i] | (holds ? flag : 0));
        const RejectReason here = holds ? reason : not_rejected;
        reasons[i] = here < reasons[i] ? here : reasons[i];
    }
}

SUNBUDGET_CLONES void apply_missing(std::size_t count, const std::int32_t* codes,
                                    RejectReason missing,
                                    RejectReason* __restrict reasons) noexcept {
    for (std::size_t i = 0; i < count; ++i) {
        const RejectReason here = codes[i] < 0 ? missing : not_rejected;
        reasons[i] = here < reasons[i] ? here : reasons[i];
    }
}

SUNBUDGET_CLONES void drop(std::size_t count, const RejectReason* reasons,
                           float* __restrict values) noexcept {
    constexpr float nodata = std::numeric_limits<float>::quiet_NaN();
    for (std::size_t i = 0; i < count; ++i)
        values[i] = reasons[i] == not_rejected ? values[i] : nodata;
}

}  // namespace

void apply_quality(std::span<const std::int32_t> codes, std::span<const QualityBits> tests,
                   RejectReason missing, std::span<std::uint16_t> flags,
                   std::span<RejectReason> reasons) noexcept {
    assert(flags.size() == codes.size() && reasons.size() == codes.size());
    constexpr auto sign = std::numeric_limits<std::int32_t>::min();
    for (const auto& test : tests) {
        assert(test.first_bit >= 0 && test.bits >= 1 && test.first_bit + test.bits <= 31);
        const auto field = static_cast<std::int32_t>((1U << test.bits) - 1U);
        assert(test.value >= 0 && test.value <= field);
        apply_test(codes.size(), codes.data(), (field << test.first_bit) | sign,
                   test.value << test.first_bit, test.flag, test.reason, flags.data(),
                   reasons.data());
    }
    apply_missing(codes.size(), codes.data(), missing, reasons.data());
}

void drop_rejected(std::span<const RejectReason> reasons, std::span<float> values) noexcept {
    assert(reasons.size() == values.size());
    drop(values.size(), reasons.data(), values.data());
}

}  // namespace sunbudget
