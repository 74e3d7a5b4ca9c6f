#pragma once

#include <vector>

#include "sunbudget/model/sky.hpp"
#include "sunbudget/raster/source.hpp"

namespace sunbudget {

/// A parameter of the sky that varies from pixel to pixel.
struct SkyRaster {
    SkyParameter parameter = SkyParameter::turbidity;
    std::vector<Source> months;  ///< one for all months, or twelve
    double lowest = 0;           ///< outside, a pixel counts as without value
    double highest = 0;

    [[nodiscard]] const Source& of(int month) const {
        return months[months.size() == 1 ? 0 : static_cast<std::size_t>(month - 1)];
    }
};

/// Width of the cells that light is interpolated over, quadratically, in the parameter's own unit.
[[nodiscard]] double cell_of(SkyParameter parameter);

}  // namespace sunbudget
