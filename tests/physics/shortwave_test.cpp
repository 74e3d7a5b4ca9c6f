#include "sunbudget/physics/shortwave.hpp"

#include <catch2/catch.hpp>
#include <cmath>
#include <limits>
#include <random>
#include <vector>

#include "reference/shortwave.hpp"

using namespace sunbudget;
using namespace sunbudget::test;

namespace {

using Row = std::vector<float>;
constexpr float nodata = std::numeric_limits<float>::quiet_NaN();

Row random_row(std::size_t count, float low, float high, unsigned seed) {
    std::mt19937 random(seed);
    std::uniform_real_distribution<float> values(low, high);
    Row row(count);
    for (auto& value : row) value = values(random);
    return row;
}

}  // namespace

TEST_CASE("absorbed_shortwave: agrees with double precision at every row length",
          "[physics][differential]") {
    // Four float operations on sums below 1500 W m-2: under 4 half-units in the last place, 2.4e-4.
    const auto count = GENERATE(as<std::size_t>{}, 1, 7, 16, 33, 1000);
    const auto a = random_row(count, 0, 1, 1), b = random_row(count, 0, 1000, 2);
    const auto c = random_row(count, 0, 1, 3), d = random_row(count, 0, 500, 4);
    Row out(count);
    absorbed_shortwave(a, b, c, d, out);
    double worst = 0;
    for (std::size_t i = 0; i < count; ++i)
        worst = std::max(worst, std::abs(static_cast<double>(out[i]) -
                                         absorbed_reference(a[i], b[i], c[i], d[i])));
    CHECK(worst < 2.4e-4);
}

TEST_CASE("absorbed_shortwave: the result may overwrite an input", "[physics][edge]") {
    const auto albedo = random_row(100, 0, 1, 5), direct = random_row(100, 0, 1000, 6);
    auto diffuse = random_row(100, 0, 500, 7);
    Row apart(100);
    absorbed_shortwave(albedo, direct, albedo, diffuse, apart);
    absorbed_shortwave(albedo, direct, albedo, diffuse, diffuse);
    CHECK(diffuse == apart);
}

TEST_CASE("absorbed_shortwave: nodata in any input is nodata out, and only there",
          "[physics][edge]") {
    Row rows[4] = {{0.2F, 0.2F, 0.2F}, {500, 500, 500}, {0.2F, 0.2F, 0.2F}, {100, 100, 100}};
    const auto which = GENERATE(0, 1, 2, 3);
    rows[which][1] = nodata;
    Row out(3);
    absorbed_shortwave(rows[0], rows[1], rows[2], rows[3], out);
    CHECK(out[0] == Approx(480));
    CHECK(std::isnan(out[1]));
    CHECK(out[2] == out[0]);
}

TEST_CASE("absorbed_shortwave: black takes all, a mirror nothing", "[physics][property]") {
    const Row direct{800, 0, 3.5F}, diffuse{100, 90, 0};
    const Row black(3, 0.0F), mirror(3, 1.0F);
    Row out(3);
    absorbed_shortwave(black, direct, black, diffuse, out);
    CHECK(out == Row{900, 90, 3.5F});
    absorbed_shortwave(mirror, direct, mirror, diffuse, out);
    CHECK(out == Row{0, 0, 0});
}

TEST_CASE("absorbed_uncertainty: agrees with finite steps in double precision",
          "[physics][differential]") {
    // Results below 500 W m-2, six float operations: under 6 half-units in the last place, 1e-4.
    const auto count = GENERATE(as<std::size_t>{}, 1, 9, 1000);
    const auto albedo = random_row(count, 0, 1, 8), own = random_row(count, 0, 0.2F, 9);
    const auto light = random_row(count, 0, 1200, 10);
    Row out(count);
    absorbed_uncertainty(albedo, own, light, 0.07F, out);
    double worst = 0;
    for (std::size_t i = 0; i < count; ++i)
        worst = std::max(worst,
                         std::abs(static_cast<double>(out[i]) -
                                  absorbed_uncertainty_reference(
                                      static_cast<double>(albedo[i]), static_cast<double>(own[i]),
                                      static_cast<double>(light[i]), static_cast<double>(0.07F))));
    CHECK(worst < 1e-4);
}

TEST_CASE("absorbed_uncertainty: by hand, either part alone, and no value from none",
          "[physics][property]") {
    // 500 W m-2 on albedo 0.2: 0.05 in the albedo is 25, 7 % in the light 0.8 * 35 = 28.
    const Row albedo{0.2F, 0.2F, 1, 0.2F, nodata, 0.2F}, own{0.05F, 0, 0.05F, 0.05F, 0.05F, nodata};
    const Row light{500, 500, 500, 0, 500, 500};
    Row out(6);
    absorbed_uncertainty(albedo, own, light, 0.07F, out);
    CHECK(out[0] == Approx(std::hypot(25.0, 28.0)).epsilon(1e-6));
    CHECK(out[1] == Approx(28).epsilon(1e-6));
    CHECK(out[2] == Approx(25).epsilon(1e-6));
    CHECK(out[3] == 0);
    CHECK(std::isnan(out[4]));
    CHECK(std::isnan(out[5]));
    absorbed_uncertainty(albedo, own, light, 0, out);
    CHECK(out[0] == Approx(25).epsilon(1e-6));
}
