#pragma once

#include <span>
#include <string>
#include <string_view>

namespace sunbudget {

/// One layer a plan may ask for, and what it cannot do without.
struct PlanLayer {
    std::string_view name;
    bool needs_sun = false;      ///< a time, and with it the sky
    bool needs_surface = false;  ///< an albedo
    std::string_view meaning;    ///< one line, with the unit
};

/// Every layer of this version, in the order of the manual.
[[nodiscard]] std::span<const PlanLayer> plan_layers();
/// The row of that name, which must exist.
[[nodiscard]] const PlanLayer& plan_layer(std::string_view name);

}  // namespace sunbudget
