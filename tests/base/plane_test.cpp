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
