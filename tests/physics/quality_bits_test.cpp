#include "sunbudget/physics/quality_bits.hpp"

#include <algorithm>
#include <catch2/catch.hpp>
#include <cmath>
#include <limits>
#include <random>
#include <vector>

#include "reference/broadband.hpp"

using namespace sunbudget;
using namespace sunbudget::test;

namespace {

using Codes = std::vector<std::int32_t>;

struct Rows {
    explicit Rows(std::size_t count) : flags(count, 0), reasons(count, not_rejected) {}
    std::vector<std::uint16_t> flags;
    std::vector<RejectReason> reasons;
};

// Bits of QA_PIXEL as in tables/sensors.cpp; here only their places matter.
const std::vector<QualityBits> pixel_tests{{0, 1, 1, 0, 0},  {1, 1, 1, 16, 3},
                                           {2, 1, 1, 32, 4}, {3, 1, 1, 8, 1},
                                           {4, 1, 1, 64, 2}, {5, 1, 1, 128, not_rejected},
                                           {8, 2, 3, 256, 5}};

}  // namespace

TEST_CASE(
    "apply_quality: every 16-bit code gives the flags and the reason found one test at a time",
    "[physics][differential]") {
    Codes codes(65536);
    for (std::size_t i = 0; i < codes.size(); ++i) codes[i] = static_cast<std::int32_t>(i);
    Rows rows(codes.size());
    apply_quality(codes, pixel_tests, 0, rows.flags, rows.reasons);
    for (std::size_t i = 0; i < codes.size(); ++i) {
        unsigned flags = 0;
        RejectReason reason = not_rejected;
        for (const auto& test : pixel_tests) {
            if (bits_reference(codes[i], test.first_bit, test.bits) != test.value) continue;
            flags |= test.flag;
            reason = std::min(reason, test.reason);
        }
        CAPTURE(i);
        REQUIRE(rows.flags[i] == flags);
        REQUIRE(rows.reasons[i] == reason);
    }
}

TEST_CASE("apply_quality: a pixel without a code gets the reason for it and no flag",
          "[physics][edge]") {
    const Codes codes{-1, std::numeric_limits<std::int32_t>::min(), 0};
    Rows rows(3);
    const std::vector<QualityBits> zero{{0, 31, 0, 4, 1}};
    apply_quality(codes, zero, 9, rows.flags, rows.reasons);
    CHECK(rows.flags == std::vector<std::uint16_t>{0, 0, 4});
    CHECK(rows.reasons == std::vector<RejectReason>{9, 9, 1});
}

TEST_CASE("apply_quality: two rasters give the same rows in either order", "[physics][property]") {
    std::mt19937 random(3);
    Codes first(257), second(257);
    for (auto& code : first) code = static_cast<std::int32_t>(random() & 0xFFFF);
    for (auto& code : second) code = static_cast<std::int32_t>(random() & 0xFF);
    const std::vector<QualityBits> saturation{{1, 1, 1, 256, 5}, {3, 1, 1, 256, 5}};
    Rows a(257), b(257);
    apply_quality(first, pixel_tests, 0, a.flags, a.reasons);
    apply_quality(second, saturation, not_rejected, a.flags, a.reasons);
    apply_quality(second, saturation, not_rejected, b.flags, b.reasons);
    apply_quality(first, pixel_tests, 0, b.flags, b.reasons);
    CHECK(a.flags == b.flags);
    CHECK(a.reasons == b.reasons);
}

TEST_CASE("drop_rejected: rejected pixels become nodata, the others keep their bits",
          "[physics][edge]") {
    std::vector<float> values{0.1F, 0.2F, 0.3F, 0.4F};
    const std::vector<RejectReason> reasons{not_rejected, 0, 254, not_rejected};
    drop_rejected(reasons, values);
    CHECK(values[0] == 0.1F);
    CHECK(std::isnan(values[1]));
    CHECK(std::isnan(values[2]));
    CHECK(values[3] == 0.4F);
}
