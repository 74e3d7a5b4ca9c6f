#include "sunbudget/base/plane.hpp"

#include <catch2/catch.hpp>
#include <cstdint>

using namespace sunbudget;

TEST_CASE("Plane: every row starts on a 64-byte border", "[base][property]") {
    for (const int width : {1, 15, 16, 17, 256, 259}) {
        Plane<float> plane(width, 3, 7.0f);
        for (int r = 0; r < 3; ++r) {
            CHECK(reinterpret_cast<std::uintptr_t>(plane.row(r).data()) % 64 == 0);
            CHECK(plane.row(r).size() == static_cast<std::size_t>(width));
            CHECK(plane.row(r).back() == 7.0f);
        }
    }
}

TEST_CASE("Plane: may be empty", "[base][edge]") {
    CHECK(Plane<float>().empty());
    CHECK(Plane<float>(0, 4).empty());
}

TEST_CASE("Plane: a large plane's memory serves the next one of its size, filled anew", "[base]") {
    const float* first = nullptr;
    {
        Plane<float> plane(512, 512, 3.0f);
        first = plane.data();
    }
    const Plane<float> again(512, 512, 5.0f);
    CHECK(again.data() == first);
    CHECK(again.at(511, 511) == 5.0f);
    Plane<float> moved = Plane<float>(600, 600, 1.0f);
    CHECK(moved.at(599, 599) == 1.0f);
}
