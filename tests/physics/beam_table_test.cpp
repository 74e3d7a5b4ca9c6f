#include "sunbudget/physics/beam_table.hpp"

#include <catch2/catch.hpp>

#include <cmath>
#include <limits>
#include <numbers>
#include <random>
#include <vector>

#include "reference/beam.hpp"
#include "sunbudget/base/units.hpp"
#include "sunbudget/physics/gradient.hpp"
#include "terrain_fixture.hpp"

namespace sunbudget::test {

namespace {

constexpr double full_turn = 2 * std::numbers::pi;

SunStep sun_at(double azimuth_rad, double low_rad, double high_rad, double strength = 1) {
    const double middle = (low_rad + high_rad) / 2;
    return {azimuth_rad,
            std::sin(low_rad),
            std::sin(high_rad),
            {strength * std::cos(middle) * std::sin(azimuth_rad),
             strength * std::cos(middle) * std::cos(azimuth_rad), strength * std::sin(middle)},
            1.0 / 6};
}

/// Suns of a year of ten-minute steps at a latitude, from the rotation of the sky alone.
std::vector<SunStep> year_of_suns(double latitude_rad) {
    std::vector<SunStep> suns;
    for (int day = 0; day < 365; day += 5)
        for (int step = 0; step < 144; ++step) {
            const double declination = rad_from_deg(23.44) * std::sin(full_turn * day / 365);
            const auto elevation = [&](double steps) {
                return std::asin(std::sin(latitude_rad) * std::sin(declination) +
                                 std::cos(latitude_rad) * std::cos(declination) *
                                     std::cos(full_turn * (steps - 72) / 144));
            };
            const double angle = full_turn * (step + 0.5 - 72) / 144;
            const double azimuth =
                std::atan2(-std::cos(declination) * std::sin(angle),
                           std::cos(latitude_rad) * std::sin(declination) -
                               std::sin(latitude_rad) * std::cos(declination) * std::cos(angle));
            const double a = elevation(step);
            const double b = elevation(step + 1);
            if (std::max(a, b) <= 0) continue;
            suns.push_back(sun_at(azimuth < 0 ? azimuth + full_turn : azimuth, std::min(a, b),
                                  std::max(a, b), 1000));
        }
    return suns;
}

/// One pixel in rows of one.
struct OnePixel {
    float east, north, up;
    float beam = 0;
    float hours = 0;
    OnePixel(double slope_rad, double aspect_rad)
        : east(static_cast<float>(std::sin(slope_rad) * std::sin(aspect_rad))),
          north(static_cast<float>(std::sin(slope_rad) * std::cos(aspect_rad))),
          up(static_cast<float>(std::cos(slope_rad))) {}
    [[nodiscard]] NormalRow normal() const { return {{&east, 1}, {&north, 1}, {&up, 1}}; }
    [[nodiscard]] BeamSums sums() { return {{&beam, 1}, {&hours, 1}}; }
};

}  // namespace

TEST_CASE("add_suns: equals suns taken one by one in double precision", "[physics][differential]") {
    constexpr std::size_t width = 1031;
    std::mt19937 random(11);
    std::uniform_real_distribution<double> unit(0, 1);
    std::vector<float> before, after, east, north, up, beam(width, 0.0F), hours(width, 0.0F);
    for (std::size_t i = 0; i < width; ++i) {
        const OnePixel pixel(1.5 * unit(random), full_turn * unit(random));
        east.push_back(pixel.east);
        north.push_back(pixel.north);
        up.push_back(pixel.up);
        before.push_back(static_cast<float>(0.6 * unit(random)));
        after.push_back(static_cast<float>(0.6 * unit(random)));
    }
    const std::vector<PlacedSun> suns{{sun_at(1.0, 0.1, 0.15, 700), 0.3},
                                      {sun_at(1.1, 0.3, 0.31, 800), 0.9},
                                      {sun_at(1.05, 0.2, 0.2, 900), 0}};
    add_suns(suns, {before, after}, {east, north, up}, {beam, hours});
    double worst_beam = 0;
    double worst_hours = 0;
    for (std::size_t i = 0; i < width; ++i) {
        reference::Lit want;
        for (const auto& [sun, share] : suns) {
            const auto b = static_cast<double>(before[i]);
            const double horizon = b + share * (static_cast<double>(after[i]) - b);
            const auto lit =
                reference::lit_by(sun, horizon, static_cast<double>(east[i]),
                                  static_cast<double>(north[i]), static_cast<double>(up[i]));
            want.beam += lit.beam;
            want.hours += lit.hours;
        }
        worst_beam = std::max(worst_beam, std::abs(want.beam - static_cast<double>(beam[i])));
        worst_hours = std::max(worst_hours, std::abs(want.hours - static_cast<double>(hours[i])));
    }
    // A ramp of 0.01 in the sine turns a rounding of the horizon (6e-8) into 6e-6 of a step's share.
    CHECK(worst_beam < 2400 * 1e-5);
    CHECK(worst_hours < 0.5 * 1e-5);
}

TEST_CASE("add_beams: a table gives what its suns give one by one, to a step of the table",
          "[physics][differential]") {
    constexpr std::size_t width = 777;
    std::mt19937 random(12);
    std::uniform_real_distribution<double> unit(0, 1);
    std::vector<BeamTable> tables(3);
    std::vector<PlacedSun> suns;
    for (int i = 0; i < 400; ++i) {
        const double share = 0.999 * unit(random);
        const double low = -0.02 + 1.1 * unit(random);
        suns.push_back({sun_at(2 + 0.098 * share, low, low + 0.03 * unit(random), 900), share});
        tables[0].add(suns.back().sun, share);
        if (i < 3) tables[2].add(suns.back().sun, share);
    }
    tables[0].finish();
    tables[2].finish();
    std::vector<float> before, after, east, north, up;
    for (std::size_t i = 0; i < width; ++i) {
        const OnePixel pixel(0.6 * unit(random), full_turn * unit(random));
        east.push_back(pixel.east);
        north.push_back(pixel.north);
        up.push_back(pixel.up);
        before.push_back(static_cast<float>(unit(random)));
        after.push_back(static_cast<float>(unit(random)));
    }
    before[0] = after[0] = 0;
    before[1] = after[1] = 1;
    std::vector<std::vector<float>> rows(6, std::vector<float>(width, 0.0F));
    const std::vector<BeamSums> sums{{rows[0], rows[1]}, {rows[2], rows[3]}, {rows[4], rows[5]}};
    add_beams(tables, {before, after}, {east, north, up}, sums);
    for (std::size_t i = 0; i < width; ++i) {
        double hours = 0, hours_low = 0, hours_high = 0;
        for (const auto& [sun, share] : suns) {
            const auto b = static_cast<double>(before[i]);
            const double middle = share < 0.5 ? 0.25 : 0.75;
            const double horizon = b + middle * (static_cast<double>(after[i]) - b);
            hours += sun.hours * reference::lit_share(sun, horizon);
            const double step = std::floor(horizon * BeamTable::bins) / BeamTable::bins;
            hours_high += sun.hours * reference::lit_share(sun, step);
            hours_low += sun.hours * reference::lit_share(sun, step + 1.0 / BeamTable::bins);
        }
        CAPTURE(i, before[i], after[i]);
        const auto got = static_cast<double>(rows[1][i]);
        CHECK(got <= hours_high + 1e-4);
        CHECK(got >= hours_low - 1e-4);
        CHECK(got == Approx(hours).margin(0.5));  // three suns of 400 may stand in one step
    }
    CHECK(rows[2] == std::vector<float>(width, 0.0F));  // an empty table adds nothing
    CHECK(rows[1][1] == 0);
    const double all = 400 / 6.0;
    CHECK(static_cast<double>(rows[1][0]) < all);
    CHECK(static_cast<double>(rows[1][0]) > all * 0.96);  // a few begin below the level horizon
}

TEST_CASE("add_beams: a plane behind nothing but itself gets what faces it, all year",
          "[physics][property]") {
    const double slope_rad = rad_from_deg(GENERATE(0.0, 10.0, 35.0, 60.0, 85.0));
    const double aspect_rad = rad_from_deg(GENERATE(0.0, 100.0, 180.0, 250.0));
    const auto suns = year_of_suns(rad_from_deg(GENERATE(5.0, 47.0, 68.0)));
    constexpr int directions = 64;
    std::vector<BeamTable> tables(directions);
    double want = 0, all = 0;
    OnePixel pixel(slope_rad, aspect_rad);
    for (const auto& sun : suns) {
        const double place = sun.azimuth_rad / full_turn * directions;
        const auto sector = static_cast<std::size_t>(place) % directions;
        tables[sector].add(sun, place - std::floor(place));
        const double above = reference::lit_share(sun, 0);
        want += above * reference::lit_by(sun, -1, static_cast<double>(pixel.east),
                                          static_cast<double>(pixel.north),
                                          static_cast<double>(pixel.up))
                            .beam;
        all += above * 1000;
    }
    const auto horizon_sine = [&](int direction) {
        const double tangent =
            -std::tan(slope_rad) * std::cos(full_turn * direction / directions - aspect_rad);
        return static_cast<float>(std::sin(std::atan(std::max(0.0, tangent))));
    };
    double most_negative = 0;
    for (int d = 0; d < directions; ++d) {
        auto& table = tables[static_cast<std::size_t>(d)];
        table.finish();
        const float before = horizon_sine(d);
        const float after = horizon_sine(d + 1);
        const float so_far = pixel.beam;
        const auto sums = pixel.sums();
        add_beams({&table, 1}, {{&before, 1}, {&after, 1}}, pixel.normal(), {&sums, 1});
        most_negative = std::min(most_negative, static_cast<double>(pixel.beam - so_far));
    }
    CAPTURE(deg_from_rad(slope_rad), deg_from_rad(aspect_rad), want, all);
    // Suns that graze the plane or the horizon are off by the table's step and the sector's half:
    // 0.2 % of all the light there is, and no sector takes away more than that of what was there.
    CHECK(static_cast<double>(pixel.beam) == Approx(want).margin(2e-3 * all));
    CHECK(most_negative >= -2e-3 * all);
}

TEST_CASE("add_suns: a sun that rises over the horizon within the step counts its share",
          "[physics][edge]") {
    OnePixel pixel(0, 0);
    const float horizon = static_cast<float>(std::sin(0.2));
    const SunStep half{0, std::sin(0.2) - 0.01, std::sin(0.2) + 0.01, {0, 0, 500}, 1};
    const SunStep none{0, 0.05, std::sin(0.2) - 1e-4, {0, 0, 500}, 1};
    const SunStep at_once{0, 0.3, 0.3, {0, 0, 500}, 1};
    const std::vector<PlacedSun> suns{{half, 0}, {none, 0}, {at_once, 0}};
    add_suns(suns, {{&horizon, 1}, {&horizon, 1}}, pixel.normal(), pixel.sums());
    CHECK(static_cast<double>(pixel.hours) == Approx(1.5).margin(1e-5));
    CHECK(static_cast<double>(pixel.beam) == Approx(750).margin(5e-3));
}

TEST_CASE("beams: NaN in a horizon or a normal goes through", "[physics][edge]") {
    constexpr float missing = std::numeric_limits<float>::quiet_NaN();
    const std::vector<float> before{missing, 0.1F, 0.1F}, after{0.1F, 0.1F, missing};
    const std::vector<float> level{0.0F, 0.0F, 0.0F}, up{1.0F, missing, 1.0F};
    const PlacedSun sun{sun_at(0.1, 0.4, 0.5), 0.4};
    std::vector<BeamTable> tables(1);
    tables[0].add(sun.sun, sun.share);
    tables[0].finish();
    std::vector<float> beam(3, 0.0F), hours(3, 0.0F), beam2(3, 0.0F), hours2(3, 0.0F);
    const BeamSums sums{beam, hours};
    add_beams(tables, {before, after}, {level, level, up}, {&sums, 1});
    add_suns({&sun, 1}, {before, after}, {level, level, up}, {beam2, hours2});
    for (std::size_t i = 0; i < 3; ++i) {
        CAPTURE(i);
        CHECK(std::isnan(beam[i]));
        CHECK(std::isnan(beam2[i]));
    }
}

TEST_CASE("beams: the light on a periodic terrain without shadow is that of its map area",
          "[physics][property]") {
    // Row terrain-069: sum of cos i / cos s = N cos z, exact for one consistent gradient.
    constexpr int side = 96;
    Plane<float> padded(side + 2, side + 2);
    for (int r = 0; r < side + 2; ++r)
        for (int c = 0; c < side + 2; ++c)
            padded.at(c, r) = static_cast<float>(20 * std::sin(full_turn * c / side) +
                                                 15 * std::cos(full_turn * (c + 2 * r) / side) +
                                                 3 * std::sin(full_turn * 5 * r / side));
    const PixelMatrix matrix{12, 3, -2, -9};
    const SunStep sun = sun_at(2.3, rad_from_deg(64.0), rad_from_deg(64.0));
    const float none = -1;
    const std::vector<float> open(side, none);
    double sum = 0;
    for (int r = 0; r < side; ++r) {
        std::vector<float> column(side), row(side), east(side), north(side), up(side), beam(side),
            hours(side);
        horn_gradient(padded.row(r), padded.row(r + 1), padded.row(r + 2), column, row);
        surface_normals(column, row, inverse(matrix), inverse(matrix), east, north, up);
        const PlacedSun placed{sun, 0};
        add_suns({&placed, 1}, {open, open}, {east, north, up}, {beam, hours});
        for (std::size_t i = 0; i < side; ++i) {
            REQUIRE(beam[i] > 0);
            sum += static_cast<double>(beam[i]) / static_cast<double>(up[i]);
        }
    }
    // Single precision in each pixel, sum of 9,216 in double.
    CHECK(sum == Approx(side * side * std::sin(rad_from_deg(64.0))).epsilon(1e-6));
}

TEST_CASE(
    "beams: a plane that faces the sun gets all of it, and a zenith sun the cosine of the slope",
    "[physics][property]") {
    // Rows terrain-070 and 073.
    const double slope_rad = GENERATE(0.1, 0.6, 1.2);
    const double aspect_rad = GENERATE(0.0, 2.0, 5.0);
    const float horizon = 0;
    OnePixel facing(slope_rad, aspect_rad);
    const double height = std::numbers::pi / 2 - slope_rad;
    const PlacedSun sun{sun_at(aspect_rad, height, height), 0};
    add_suns({&sun, 1}, {{&horizon, 1}, {&horizon, 1}}, facing.normal(), facing.sums());
    CHECK(static_cast<double>(facing.beam) == Approx(1).margin(1e-6));
    OnePixel below(slope_rad, aspect_rad);
    const PlacedSun zenith{sun_at(0, std::numbers::pi / 2, std::numbers::pi / 2), 0};
    add_suns({&zenith, 1}, {{&horizon, 1}, {&horizon, 1}}, below.normal(), below.sums());
    CHECK(static_cast<double>(below.beam) == Approx(std::cos(slope_rad)).margin(1e-6));
}

}  // namespace sunbudget::test
