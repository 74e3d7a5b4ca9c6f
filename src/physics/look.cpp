#include "look.hpp"

#include <algorithm>
#include <cmath>

namespace sunbudget::detail {

std::vector<Look> looks_along(const Direction& direction, const Sight& sight, int level, int first,
                              int last, std::size_t stride) {
    const auto row = static_cast<std::ptrdiff_t>(stride);
    const bool along_rows = std::abs(direction.column_step) == 1;
    const std::ptrdiff_t major =
        along_rows ? (direction.column_step > 0 ? 1 : -1) : (direction.row_step > 0 ? row : -row);
    const double slant = along_rows ? direction.row_step : direction.column_step;
    const std::ptrdiff_t across = (along_rows ? row : 1) * (slant < 0 ? -1 : 1);
    std::vector<Look> looks;
    for (int step = first; step <= last; ++step) {
        // Counted away from the line's own axis, so that a mirrored raster gives mirrored bits.
        const double aside = std::abs(slant) * step;
        const double whole = std::floor(aside);
        const double pixels = std::ldexp(step, level);
        Look look;
        look.on = major * step + across * static_cast<std::ptrdiff_t>(whole);
        look.share = static_cast<float>(aside - whole);
        look.beyond = look.share > 0 ? look.on + across : look.on;
        look.per_step = static_cast<float>(1 / pixels);
        look.drop_m =
            static_cast<float>(curvature_drop_m(pixels * direction.step_m, sight) / pixels);
        looks.push_back(look);
    }
    while (looks.size() % looks_a_pass != 0) looks.push_back(looks.back());
    return looks;
}

int last_step(const Direction& direction, const Sight& sight, int level, int most) {
    const double steps = sight.reach_m / std::ldexp(direction.step_m, level);
    return static_cast<int>(std::min<double>(most, std::floor(steps)));
}

}  // namespace sunbudget::detail
