#include "sunbudget/model/smooth_field.hpp"

#include <catch2/catch.hpp>
#include <cmath>
#include <limits>

using namespace sunbudget;

namespace {

/// Every pixel of the raster, block by block, one value.
Plane<float> whole(SmoothField& field, int width, int height, const Plane<float>& heights_m,
                   std::size_t value = 0) {
    Plane<float> out(width, height, -1.0f);
    const Window frame{0, 0, width, height};
    for (int row = 0; row < height; row += 256)
        for (int column = 0; column < width; column += 256) {
            const Window window{column, row, std::min(256, width - column),
                                std::min(256, height - row)};
            field.prepare(window, frame, heights_m, 0).fill(value, heights_m, out);
        }
    return out;
}

double worst(const Plane<float>& found, const Plane<float>& heights_m, auto&& truth) {
    double worst = 0;
    for (int r = 0; r < found.height(); ++r)
        for (int c = 0; c < found.width(); ++c) {
            const double miss =
                std::abs(static_cast<double>(found.at(c, r)) - truth(c, r, heights_m.at(c, r)));
            worst = std::max(worst, std::isnan(miss) ? 1e9 : miss);
        }
    return worst;
}

}  // namespace

TEST_CASE("SmoothField: a smooth function costs few nodes and meets the tolerance",
          "[model][differential]") {
    const auto truth = [](double c, double r, double h) {
        return 500 + 80 * std::sin(c / 900) * std::cos(r / 700) + 40 * std::exp(-h / 8434.5);
    };
    int calls = 0;
    SmoothField field({1500, 1100, 1, 1.0 / 256, std::nullopt},
                      [&](double c, double r, double h, int, std::span<double> v) {
                          ++calls;
                          v[0] = truth(c, r, h);
                      });
    Plane<float> heights(1500, 1100);
    for (int r = 0; r < 1100; ++r)
        for (int c = 0; c < 1500; ++c)
            heights.at(c, r) =
                static_cast<float>(1000 + 1300 * std::sin(c * 0.01) * std::sin(r * 0.02));
    const auto found = whole(field, 1500, 1100, heights);
    // The tolerance is met at the points tried; twice that holds between them. Float adds 1e-4.
    CHECK(worst(found, heights, truth) < 2.0 / 256 + 1e-4);
    CHECK(calls < 1500 * 1100 / 100);
}

TEST_CASE("SmoothField: a jump is followed to the pixel", "[model][edge]") {
    const auto truth = [](double c, double r, double) { return c + 0.7 * r > 400 ? 12.0 : 0.0; };
    for (const auto constant : {std::optional<double>(0.0), std::optional<double>()}) {
        SmoothField field(
            {601, 530, 1, 1.0 / 256, constant},
            [&](double c, double r, double h, int, std::span<double> v) { v[0] = truth(c, r, h); });
        const Plane<float> heights(601, 530, 250.0f);
        CHECK(worst(whole(field, 601, 530, heights), heights, truth) == 0.0);
    }
}

TEST_CASE("SmoothField: pixels without a value stay alone", "[model][edge]") {
    const auto inside = [](double c, double r) { return std::hypot(c - 100, r - 90) < 80; };
    SmoothField field({200, 180, 1, 1.0 / 256, 0.0},
                      [&](double c, double r, double, int, std::span<double> v) {
                          v[0] = inside(c, r) ? 3.0 : std::numeric_limits<double>::quiet_NaN();
                      });
    const Plane<float> heights(200, 180);
    const auto found = whole(field, 200, 180, heights);
    int wrong = 0;
    for (int r = 0; r < 180; ++r)
        for (int c = 0; c < 200; ++c)
            wrong += inside(c, r) ? found.at(c, r) != 3.0f : !std::isnan(found.at(c, r));
    CHECK(wrong == 0);
}

TEST_CASE("SmoothField: rasters of one pixel, row and column work", "[model][edge]") {
    for (const auto& [width, height] :
         {std::pair{1, 1}, {1, 300}, {300, 1}, {2, 3}, {3, 2}, {257, 2}}) {
        CAPTURE(width, height);
        const auto truth = [](double c, double r, double h) { return c * 2 + r * 3 + h; };
        for (const auto constant : {std::optional<double>(5.0), std::optional<double>()}) {
            SmoothField field({width, height, 1, 1e-3, constant},
                              [&](double c, double r, double h, int, std::span<double> v) {
                                  v[0] = truth(c, r, h);
                              });
            const Plane<float> heights(width, height, 5.0f);
            CHECK(worst(whole(field, width, height, heights), heights, truth) < 1e-3);
        }
    }
}

TEST_CASE("SmoothField: heights on and around a cell's border are filled once", "[model][edge]") {
    const auto truth = [](double, double, double h) { return h * h * 1e-6; };
    SmoothField field(
        {8, 1, 1, 1e-4, std::nullopt},
        [&](double c, double r, double h, int, std::span<double> v) { v[0] = truth(c, r, h); });
    Plane<float> heights(8, 1);
    const float values[8] = {-430.0f, -1e-3f,     0.0f,    999.99994f,
                             1000.0f, 1000.0001f, 8848.0f, 2500.0f};
    std::copy_n(values, 8, heights.row(0).data());
    CHECK(worst(whole(field, 8, 1, heights), heights, truth) < 1e-3);
    heights.at(0, 0) = std::numeric_limits<float>::quiet_NaN();
    CHECK(std::isnan(whole(field, 8, 1, heights).at(0, 0)));
}

TEST_CASE("SmoothField: what a pixel gets does not depend on the order of asking",
          "[model][differential]") {
    const auto function = [](double c, double r, double h, int, std::span<double> v) {
        v[0] = 300 * std::sin(c / 200) * std::cos(r / 300) + h / 100;
        v[1] = v[0] * v[0];
    };
    const SmoothField::Shape shape{700, 600, 2, 1.0 / 256, std::nullopt};
    const Plane<float> heights(700, 600, 1500.0f);
    SmoothField forward(shape, function), backward(shape, function);
    const auto first = whole(forward, 700, 600, heights, 1);
    Plane<float> second(700, 600);
    for (int row = 512; row >= 0; row -= 256)
        for (int column = 512; column >= 0; column -= 256) {
            const Window window{column, row, std::min(256, 700 - column), std::min(256, 600 - row)};
            backward.prepare(window, {0, 0, 700, 600}, heights, 0).fill(1, heights, second);
        }
    int differ = 0;
    for (int r = 0; r < 600; ++r)
        for (int c = 0; c < 700; ++c) differ += first.at(c, r) != second.at(c, r);
    CHECK(differ == 0);
}
