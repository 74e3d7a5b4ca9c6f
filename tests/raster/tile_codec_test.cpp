#include "sunbudget/raster/tile_codec.hpp"

#include <bit>
#include <catch2/catch.hpp>
#include <cmath>
#include <limits>
#include <random>

#include "sunbudget/base/error.hpp"

using namespace sunbudget;

namespace {
template <typename T>
Plane<T> random_bits(int tile, unsigned seed) {
    std::mt19937 random(seed);
    Plane<T> plane(tile, tile);
    for (int r = 0; r < tile; ++r)
        for (auto& value : plane.row(r)) {
            if constexpr (std::is_same_v<T, float>)
                value = std::bit_cast<float>(static_cast<std::uint32_t>(random()));
            else
                value = static_cast<T>(random());
        }
    return plane;
}

/// Pixels whose bits differ; any NaN equals the one NaN that is stored.
template <typename T>
int differing(const Plane<T>& a, const Plane<T>& b) {
    int count = 0;
    for (int r = 0; r < a.height(); ++r)
        for (int c = 0; c < a.width(); ++c) {
            if constexpr (std::is_same_v<T, float>) {
                const auto expected =
                    std::isnan(a.at(c, r)) ? 0x7fc00000u : std::bit_cast<std::uint32_t>(a.at(c, r));
                count += std::bit_cast<std::uint32_t>(b.at(c, r)) != expected;
            } else {
                count += a.at(c, r) != b.at(c, r);
            }
        }
    return count;
}
}  // namespace

TEMPLATE_TEST_CASE("encode_tile: any bits come back as they were", "[raster][property]", float,
                   std::uint16_t) {
    const int tile = GENERATE(16, 48, 128, 512);
    CAPTURE(tile);
    const auto plane = random_bits<TestType>(tile, 7);
    CHECK(differing(plane, decode_tile<TestType>(encode_tile(plane), tile)) == 0);
}

TEST_CASE("encode_tile: zeros of both signs, infinities and tiny values survive",
          "[raster][edge]") {
    using limits = std::numeric_limits<float>;
    Plane<float> plane(16, 16, -0.0F);
    plane.at(0, 0) = limits::infinity();
    plane.at(1, 0) = -limits::infinity();
    plane.at(2, 0) = limits::denorm_min();
    plane.at(3, 0) = limits::max();
    plane.at(4, 0) = 0.0F;
    CHECK(differing(plane, decode_tile<float>(encode_tile(plane), 16)) == 0);
}

TEST_CASE("encode_tile: NaN of either sign gives the same bytes", "[raster][edge]") {
    const float nan = std::numeric_limits<float>::quiet_NaN();
    const auto bytes = encode_tile(Plane<float>(128, 128, nan));
    CHECK(encode_tile(Plane<float>(128, 128, -nan)) == bytes);
    CHECK(encode_tile(Plane<float>(128, 128, std::bit_cast<float>(0x7f800001u))) == bytes);
    CHECK(bytes.size() < 2000);
}

TEST_CASE("encode_tile: the bytes do not depend on what was encoded before", "[raster][property]") {
    const auto plane = random_bits<float>(128, 1);
    const auto bytes = encode_tile(plane);
    CHECK_FALSE(encode_tile(random_bits<float>(256, 2)).empty());
    CHECK_FALSE(encode_tile(random_bits<std::uint16_t>(512, 3)).empty());
    CHECK(encode_tile(plane) == bytes);
}

TEST_CASE("decode_tile: damaged, cut and foreign bytes are refused", "[raster][edge]") {
    Plane<float> plane(128, 128, 1.5F);
    auto bytes = encode_tile(plane);
    CHECK_THROWS_AS(decode_tile<float>(bytes, 256), Error);
    CHECK_THROWS_AS(decode_tile<float>(bytes, 64), Error);
    CHECK_THROWS_AS(decode_tile<float>(std::span(bytes).first(bytes.size() - 1), 128), Error);
    bytes[0] ^= std::byte{0xff};
    CHECK_THROWS_AS(decode_tile<float>(bytes, 128), Error);
    CHECK_THROWS_AS(decode_tile<float>({}, 128), Error);
}
