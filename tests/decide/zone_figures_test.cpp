#include "sunbudget/decide/zone_figures.hpp"

#include <catch2/catch.hpp>

#include <cmath>
#include <random>

namespace sunbudget::test {

TEST_CASE("zone figures: mean, spread and percentiles of weighted values as sums by hand give them",
          "[decide][property]") {
    // Values 1, 2, 3, 10 with weights 4, 3, 2, 1: mean 2.6; variance 0.4*2.56 + 0.3*0.36 + 0.2*0.16 + 0.1*54.76.
    ZoneTally tally;
    for (const auto& [value, weight] :
         {std::pair{3.0F, 2.0}, {1.0F, 4.0}, {10.0F, 1.0}, {2.0F, 3.0}})
        tally.add(value, weight);
    tally.settle();
    const auto found = tally.figures(2.5);
    CHECK(found.weight == Approx(10));
    CHECK(found.mean == Approx(2.6));
    CHECK(found.std == Approx(std::sqrt(6.64)));
    CHECK(found.min == 1);
    CHECK(found.max == 10);
    CHECK(found.p10 == 1);
    CHECK(found.p50 == 2);
    CHECK(found.p90 == 3);
    CHECK(found.above_share == Approx(0.3));
}

TEST_CASE("zone figures: pieces merged give what one piece gives", "[decide][property]") {
    std::mt19937 random(3);
    std::uniform_int_distribution<int> value(0, 400);
    std::uniform_real_distribution<double> weight(0.01, 900);
    ZoneTally whole, merged;
    for (int piece = 0; piece < 7; ++piece) {
        ZoneTally part;
        for (int i = 0; i < 1000; ++i) {
            const auto v = static_cast<float>(value(random)) / 16;
            const double w = weight(random);
            whole.add(v, w);
            part.add(v, w);
        }
        part.settle();
        merged.merge(part);
    }
    whole.settle();
    const auto a = whole.figures(12.0), b = merged.figures(12.0);
    // Rounding of sums of 7,000 terms.
    CHECK(a.mean == Approx(b.mean).epsilon(1e-13));
    CHECK(a.std == Approx(b.std).epsilon(1e-12));
    CHECK(a.above_share == Approx(b.above_share).epsilon(1e-12));
    CHECK(a.p10 == b.p10);
    CHECK(a.p90 == b.p90);
}

TEST_CASE("zone figures: more values than can be kept cost percentiles some bits, and nothing else",
          "[decide][edge]") {
    ZoneTally tally;
    constexpr int count = 1 << 19;
    for (int i = 0; i < count; ++i)
        tally.add(1.0F + static_cast<float>(i) / static_cast<float>(count), 1);
    tally.settle();
    const auto found = tally.figures({});
    CHECK(found.mean == Approx(1.5).epsilon(1e-5));
    // Values 2^-19 apart, thinned out to 2^18 of them: steps of 2^-18.
    CHECK(found.p50 == Approx(1.5).margin(std::pow(2.0, -17)));
}

TEST_CASE("zone figures: nothing in, nothing out", "[decide][edge]") {
    ZoneTally tally;
    tally.settle();
    CHECK(tally.empty());
    CHECK(tally.figures(1.0) == ZoneFigures{});
}

}  // namespace sunbudget::test
