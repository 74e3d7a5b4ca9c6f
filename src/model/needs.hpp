#pragma once

#include "sunbudget/model/run.hpp"

namespace sunbudget {

/// What a run asks of its light, its terrain and its air.
struct Needs {
    bool albedo_uncertainty;
    bool net_light;  ///< for what becomes of it: net radiation, a balanced temperature
    bool light, suns, sky_view, reflected;
    bool heat, scope, level;
    explicit Needs(const Run& run);
};

}  // namespace sunbudget
