#pragma once

#include <string>

#include "sunbudget/engine/estimate.hpp"
#include "sunbudget/model/run.hpp"

namespace sunbudget {

/// The resolved run for people: grid, inputs and how they map onto it, classes, time, methods with
/// sources, layers, what was assumed, and what the run will take.
[[nodiscard]] std::string check_text(const Run& run, const Estimate& estimate,
                                     bool scanned_everything);

}  // namespace sunbudget
