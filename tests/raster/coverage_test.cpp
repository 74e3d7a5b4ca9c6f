#include "sunbudget/raster/coverage.hpp"

#include <catch2/catch.hpp>

#include <cmath>
#include <numbers>
#include <random>

namespace sunbudget::test {

namespace {

Ring circle(double column, double row, double radius, int corners) {
    Ring ring;
    for (int i = 0; i < corners; ++i) {
        const double turn = -2 * std::numbers::pi * i / corners;
        ring.push_back({column + radius * std::cos(turn), row + radius * std::sin(turn)});
    }
    return ring;
}

double sum_of(const Plane<double>& shares) {
    double sum = 0;
    for (int r = 0; r < shares.height(); ++r)
        for (const double share : shares.row(r)) sum += share;
    return sum;
}

/// Share of a pixel's points, on a lattice of n x n, that lie inside by the count of crossings.
double sampled(const Rings& rings, int column, int row, int n) {
    int inside = 0;
    for (int i = 0; i < n; ++i)
        for (int k = 0; k < n; ++k) {
            const double x = column + (i + 0.5) / n, y = row + (k + 0.5) / n;
            bool in = false;
            for (const auto& ring : rings)
                for (std::size_t j = 0; j < ring.size(); ++j) {
                    const auto &a = ring[j], &b = ring[(j + 1) % ring.size()];
                    if ((a.row > y) != (b.row > y) &&
                        x < a.column + (y - a.row) / (b.row - a.row) * (b.column - a.column))
                        in = !in;
                }
            inside += in;
        }
    return static_cast<double>(inside) / (n * n);
}

}  // namespace

TEST_CASE("coverage: a triangle's pixels hold the shares that geometry gives",
          "[raster][property]") {
    // Below the diagonal from (0, 0) to (4, 4): half of each pixel on it, all of those below it.
    const Rings triangle{{{0, 0}, {0, 4}, {4, 4}}};
    CHECK(signed_area(triangle[0]) == 8);
    Plane<double> shares;
    cover(triangle, {-1, -1, 6, 6}, shares);
    for (int r = -1; r < 5; ++r)
        for (int c = -1; c < 5; ++c) {
            const bool outside = r < 0 || c < 0 || r > 3 || c > 3 || c > r;
            CAPTURE(r, c);
            CHECK(shares.at(c + 1, r + 1) == (outside ? 0 : c == r ? 0.5 : 1));
        }
}

TEST_CASE("coverage: shares add up to the polygon's area, holes left out", "[raster][property]") {
    Rings rings{circle(50.3, 40.7, 30.2, 720), circle(52, 38, 7.9, 360)};
    std::reverse(rings[1].begin(), rings[1].end());
    const double area = signed_area(rings[0]) + signed_area(rings[1]);
    // n corners lack 1 - sin(2 pi / n) / (2 pi / n) of the circle's area: 1.3e-5 and 5.1e-5.
    CHECK(area == Approx(std::numbers::pi * (30.2 * 30.2 - 7.9 * 7.9)).epsilon(2e-5));
    Plane<double> shares;
    cover(rings, {0, 0, 100, 90}, shares);
    CHECK(sum_of(shares) == Approx(area).epsilon(1e-12));
}

TEST_CASE("coverage: exact shares agree with many samples of each pixel",
          "[raster][differential]") {
    std::mt19937 random(7);
    std::uniform_real_distribution<double> place(-3, 15);
    constexpr int samples = 200;
    for (int shape = 0; shape < 20; ++shape) {
        // Corners around a middle never cross each other.
        Ring ring;
        for (int i = 0; i < 9; ++i) {
            const double turn = -2 * std::numbers::pi * i / 9,
                         radius = 1 + std::abs(place(random)) / 2;
            ring.push_back({6 + radius * std::cos(turn), 6 + radius * std::sin(turn)});
        }
        const Rings rings{ring};
        Plane<double> shares;
        cover(rings, {0, 0, 12, 12}, shares);
        for (int r = 0; r < 12; ++r)
            for (int c = 0; c < 12; ++c) {
                CAPTURE(shape, c, r);
                // An edge makes each of `samples` rows of points err by at most one point; a pixel holds few edges.
                CHECK(shares.at(c, r) ==
                      Approx(sampled(rings, c, r, samples)).margin(3.0 / samples));
            }
    }
}

TEST_CASE("coverage: windows give the shares of the whole", "[raster][differential]") {
    const Rings rings{circle(20, 20, 17.3, 97)};
    Plane<double> whole, part;
    cover(rings, {0, 0, 40, 40}, whole);
    for (const auto& window :
         {Window{5, 3, 9, 30}, Window{31, 31, 9, 9}, Window{18, 0, 1, 40}, Window{-4, 12, 20, 5}}) {
        cover(rings, window, part);
        for (int r = 0; r < window.height; ++r)
            for (int c = 0; c < window.width; ++c) {
                const long column = window.column + c, row = window.row + r;
                const double expected = column < 0 || row < 0 ? 0
                                                              : whole.at(static_cast<int>(column),
                                                                         static_cast<int>(row));
                CHECK(part.at(c, r) == Approx(expected).margin(1e-13));
            }
    }
}

TEST_CASE("coverage: neighbours that share an edge share its pixels without gap or overlap",
          "[raster][property]") {
    const PixelPlace a{0.1, 0.3}, b{9.7, 8.9};
    const Rings left{{a, {0.1, 8.9}, b}}, right{{a, b, {9.7, 0.3}}};
    REQUIRE(signed_area(left[0]) > 0);
    REQUIRE(signed_area(right[0]) > 0);
    Plane<double> one, other, both;
    const Window window{0, 0, 10, 10};
    cover(left, window, one);
    cover(right, window, other);
    cover({{a, {0.1, 8.9}, b, {9.7, 0.3}}}, window, both);
    for (int r = 0; r < 10; ++r)
        for (int c = 0; c < 10; ++c)
            CHECK(one.at(c, r) + other.at(c, r) == Approx(both.at(c, r)).margin(1e-14));
}

TEST_CASE("coverage: slivers and points weigh what they are", "[raster][edge]") {
    Plane<double> shares;
    cover({{{2.4, 0}, {2.4, 3}, {2.4 + 1e-6, 3}, {2.4 + 1e-6, 0}}}, {0, 0, 5, 5}, shares);
    CHECK(sum_of(shares) == Approx(3e-6).epsilon(1e-9));
    CHECK(shares.at(2, 1) == Approx(1e-6).epsilon(1e-9));
    cover({{{1, 1}, {1, 1}, {1, 1}}}, {0, 0, 3, 3}, shares);
    CHECK(sum_of(shares) == 0);
    cover({}, {0, 0, 3, 3}, shares);
    CHECK(sum_of(shares) == 0);
}

}  // namespace sunbudget::test
