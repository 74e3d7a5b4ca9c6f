#pragma once

#include <array>
#include <cmath>

namespace sunbudget::reference {

/// Heights of a 3 x 3 window by row and column, NaN where missing.
using HeightWindow = std::array<std::array<double, 3>, 3>;

struct PixelSlope {
    double per_column, per_row;
};

/// Horn's differences with missing neighbours filled: sides through the pixel from the opposite
/// side, corners from the two sides next to them.
inline PixelSlope horn(HeightWindow w) {
    const double centre = w[1][1];
    const auto fill_side = [&](double& side, double opposite) {
        if (std::isnan(side)) side = std::isnan(opposite) ? centre : 2 * centre - opposite;
    };
    fill_side(w[0][1], w[2][1]);
    fill_side(w[2][1], w[0][1]);
    fill_side(w[1][0], w[1][2]);
    fill_side(w[1][2], w[1][0]);
    for (const std::size_t r : {0U, 2U})
        for (const std::size_t c : {0U, 2U})
            if (std::isnan(w[r][c])) w[r][c] = w[r][1] + w[1][c] - centre;
    return {(w[0][2] + 2 * w[1][2] + w[2][2] - w[0][0] - 2 * w[1][0] - w[2][0]) / 8,
            (w[2][0] + 2 * w[2][1] + w[2][2] - w[0][0] - 2 * w[0][1] - w[0][2]) / 8};
}

}  // namespace sunbudget::reference
