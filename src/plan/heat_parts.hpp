#pragma once

#include <algorithm>
#include <optional>
#include <string>

#include "resolve_parts.hpp"
#include "sunbudget/tables/methods.hpp"

namespace sunbudget {

/// How a family's rows stand in the order of an enumeration.
template <class Enum>
Enum chosen(const std::string& family, const std::string& name) {
    const auto names = method_names(family);
    return static_cast<Enum>(std::ranges::find(names, name) - names.begin());
}

/// What makes a unit of the plan the one used inside.
[[nodiscard]] Scaling unit_scaling(const std::string& unit);
/// The second of what the first makes of a number.
[[nodiscard]] Scaling after(const Scaling& first, const Scaling& second);

/// What every part of heat is resolved from, and into.
class HeatPart {
  public:
    HeatPart(const Plan& plan, const ResolveOptions& options, Run& run, RunProblems& problems)
        : plan_(plan), options_(options), run_(run), problems_(problems) {}

  protected:
    [[nodiscard]] bool wants(bool Layer::*need) const;
    [[nodiscard]] bool wants(LayerId wanted) const;
    [[nodiscard]] Source opened(const std::string& role, const PlanRaster& raster,
                                std::optional<Scaling> scaling, std::optional<double> nodata = {});
    [[nodiscard]] Source opened(const std::string& role, const PlanFieldRaster& field);

    const Plan& plan_;
    const ResolveOptions& options_;
    Run& run_;
    RunProblems& problems_;
};

// The parts, in this order.
/// Where the ground's temperature comes from, and its raster.
void resolve_surface_temperature(const Plan& plan, const ResolveOptions& options, Run& run,
                                 RunProblems& problems);
void resolve_emissivity(const Plan& plan, const ResolveOptions& options, Run& run,
                        RunProblems& problems);
/// The air and its clouds, and the heat radiation of the sky.
void resolve_longwave(const Plan& plan, const ResolveOptions& options, Run& run,
                      RunProblems& problems);

/// The longwave's air, from the weather's table or its numbers and rasters.
void resolve_longwave_air(const Plan& plan, const ResolveOptions& options, Run& run,
                          RunProblems& problems, Longwave& found);
/// Says in which bands the weather's table leaves the longwave open; throws when it does in all.
void find_thin_bands(Run& run);

}  // namespace sunbudget
