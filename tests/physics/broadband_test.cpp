#include "sunbudget/physics/broadband.hpp"

#include <catch2/catch.hpp>
#include <cmath>
#include <limits>
#include <random>
#include <vector>

#include "reference/broadband.hpp"

using namespace sunbudget;
using namespace sunbudget::test;

namespace {

using Row = std::vector<float>;
constexpr float nodata = std::numeric_limits<float>::quiet_NaN();
constexpr std::uint16_t flag = 1U << 10;

/// Rows over what Landsat's encoding can hold.
std::vector<Row> random_bands(std::size_t bands, std::size_t count) {
    std::mt19937 random(7);
    std::uniform_real_distribution<float> values(-0.2F, 1.602F);
    std::vector<Row> rows(bands, Row(count));
    for (auto& row : rows)
        for (auto& value : row) value = values(random);
    return rows;
}

std::vector<WeightedBand> weighted(const std::vector<Row>& rows, std::span<const double> weights) {
    std::vector<WeightedBand> bands;
    for (std::size_t b = 0; b < rows.size(); ++b)
        bands.push_back({static_cast<float>(weights[b]), rows[b]});
    return bands;
}

float kept(float albedo, float margin, std::uint16_t& flags) {
    Row row{albedo};
    std::vector<std::uint16_t> flag_row{flags};
    keep_albedo(row, margin, flag, flag_row);
    flags = flag_row[0];
    return row[0];
}

}  // namespace

TEST_CASE("broadband_sum: agrees with double precision for every number of bands and row length",
          "[physics][differential]") {
    const auto count = GENERATE(as<std::size_t>{}, 1, 7, 16, 33, 256, 1000);
    const auto used = GENERATE(as<std::size_t>{}, 0, 1, 3, 5, 8);
    const std::vector<double> all{0.356, 0.130, 0.373, 0.085, 0.072, -0.324, 0.551, 0.305};
    const std::span weights(all.data(), used);
    const auto rows = random_bands(used, count);
    Row out(count);
    broadband_sum(weighted(rows, weights), -0.0018F, out);
    double worst = 0;
    for (std::size_t i = 0; i < count; ++i) {
        std::vector<double> pixel;
        for (const auto& row : rows) pixel.push_back(static_cast<double>(row[i]));
        const double wanted = broadband_reference(weights, pixel, -0.0018);
        worst = std::max(worst, std::abs(static_cast<double>(out[i]) - wanted));
    }
    // At most 8 products and 8 sums of size below 4, and 9 rounded constants: half a unit in the last
    // place each, 2^-23 at that size.
    CHECK(worst < 25 * std::pow(2, -23));
}

TEST_CASE("broadband_sum: nodata in any band is nodata out, and only there", "[physics][edge]") {
    std::vector<Row> rows(3, Row{0.2F, 0.2F, 0.2F});
    const auto which = GENERATE(as<std::size_t>{}, 0, 1, 2);
    rows[which][1] = nodata;
    Row out(3);
    broadband_sum(weighted(rows, std::vector<double>{0.3, 0.3, 0.4}), 0.01F, out);
    CHECK(out[0] == Approx(0.21));
    CHECK(std::isnan(out[1]));
    CHECK(out[2] == Approx(0.21));
}

TEST_CASE("broadband_sum: bands outside 0 to 1 enter the sum as they are", "[physics][edge]") {
    const std::vector<Row> rows{{-0.1F}, {1.5F}};
    Row out(1);
    broadband_sum(weighted(rows, std::vector<double>{0.5, 0.5}), 0, out);
    CHECK(out[0] == Approx(0.7));
}

TEST_CASE("keep_albedo: agrees with one pixel at a time, flags included",
          "[physics][differential]") {
    std::mt19937 random(11);
    std::uniform_real_distribution<float> values(-0.2F, 1.2F);
    Row row(999);
    for (auto& value : row) value = values(random);
    row[500] = nodata;
    const Row before = row;
    std::vector<std::uint16_t> flags(row.size(), 8);
    keep_albedo(row, 0.03F, flag, flags);
    for (std::size_t i = 0; i < row.size(); ++i) {
        const auto wanted =
            keep_reference(static_cast<double>(before[i]), static_cast<double>(0.03F));
        CAPTURE(before[i]);
        REQUIRE((flags[i] == (wanted.flagged ? 8 | flag : 8)));
        if (std::isnan(wanted.albedo))
            REQUIRE(std::isnan(row[i]));
        else
            REQUIRE(static_cast<double>(row[i]) == wanted.albedo);
    }
}

TEST_CASE("keep_albedo: 0, 1 and all between stay unflagged; the margin's ends become 0 and 1",
          "[physics][edge]") {
    std::uint16_t flags = 0;
    CHECK(kept(0, 0.03F, flags) == 0);
    CHECK(kept(1, 0.03F, flags) == 1);
    CHECK(flags == 0);
    CHECK(kept(-0.03F, 0.03F, flags) == 0);
    CHECK(flags == flag);
    flags = 0;
    CHECK(kept(1 + 0.03F, 0.03F, flags) == 1);
    CHECK(flags == flag);
}

TEST_CASE("keep_albedo: without a margin nothing outside becomes 0 or 1", "[physics][edge]") {
    std::uint16_t flags = 0;
    CHECK(std::isnan(kept(-1e-6F, 0, flags)));
    CHECK(flags == flag);
    flags = 0;
    CHECK(std::isnan(kept(std::numeric_limits<float>::infinity(), 0.03F, flags)));
    CHECK(flags == flag);
}
