#pragma once

#include <memory>
#include <string>
#include <variant>
#include <vector>

#include "sunbudget/physics/direction.hpp"
#include "sunbudget/raster/source.hpp"

namespace sunbudget {

struct Change;

/// The run's ground.
struct Terrain {
    struct Flat {};           ///< planes level everywhere: roofs and streets of a surface model
    struct FromElevation {};  ///< planes from the elevation itself

    std::vector<Source> elevation;         ///< what shades; the first that has a value gives it
    std::shared_ptr<const Change> raised;  ///< what has become of it; mostly nothing
    std::variant<FromElevation, Flat, std::vector<Source>> slope_from;
    int directions = 64;
    Sight sight;
};

}  // namespace sunbudget
