#include <algorithm>

#include "heat_parts.hpp"
#include "sunbudget/base/units.hpp"

namespace sunbudget {

/// What makes a unit of the plan the one used inside.
Scaling unit_scaling(const std::string& unit) {
    if (unit == "degC") return {1, k_from_celsius(0)};
    if (unit == "kPa") return {10, 0};
    if (unit == "Pa") return {0.01, 0};
    return {1, 0};
}

Scaling after(const Scaling& first, const Scaling& second) {
    return {first.scale * second.scale, first.offset * second.scale + second.offset};
}

bool HeatPart::wants(bool Layer::*need) const {
    return std::ranges::any_of(plan_.outputs.layers,
                               [&](const auto& id) { return layer(*id).*need; });
}

bool HeatPart::wants(LayerId wanted) const {
    return std::ranges::any_of(plan_.outputs.layers, [&](const auto& id) { return *id == wanted; });
}

Source HeatPart::opened(const std::string& role, const PlanRaster& raster,
                        std::optional<Scaling> scaling, std::optional<double> nodata) {
    SourceSpec spec;
    spec.name = raster_of(raster);
    spec.limits = limits_of(options_);
    spec.scaling = scaling;
    spec.profile_nodata = nodata;
    auto source = Source::open(spec, run_.grid);
    add_input(run_, role, source);
    return source;
}

Source HeatPart::opened(const std::string& role, const PlanFieldRaster& field) {
    const Scaling stored{field.scale, field.offset};
    const bool plain = field.unit.empty() && stored == Scaling{};
    return opened(role, field.raster,
                  plain ? std::nullopt : std::optional(after(stored, unit_scaling(field.unit))));
}

namespace {

/// What the layers of heat ask for, step by step.
class HeatResolver : HeatPart {
  public:
    using HeatPart::HeatPart;
    void resolve() {
        if (is_daily(plan_)) return daily();
        if (wants(&Layer::needs_surface_temperature))
            resolve_surface_temperature(plan_, options_, run_, problems_);
        // A balance sends out heat radiation whether or not a layer of it is written.
        const bool balance = run_.heat.surface == SurfaceFrom::balance;
        if (wants(&Layer::needs_emissivity) || balance)
            resolve_emissivity(plan_, options_, run_, problems_);
        if (wants(LayerId::sri) || balance) wind();
        const bool by_air = run_.heat.surface == SurfaceFrom::air || balance;
        if (wants(&Layer::needs_air) || (wants(&Layer::needs_surface_temperature) && by_air))
            resolve_longwave(plan_, options_, run_, problems_);
        if (wants(LayerId::sri)) run_.methods.push_back(&method("sri", "astm-e1980"));
    }

  private:
    void wind() {
        problems_.attempt(
            plan_.weather && plan_.weather->wind ? plan_.weather->wind->place : Place{},
            [&] { run_.heat.wind = resolved_wind(plan_, run_); });
    }
    void daily();
};

/// Net of whole days: it stands for the sky, the ground's temperature and its emissivity.
void HeatResolver::daily() {
    problems_.attempt(plan_.longwave.method->place, [&] {
        // What was wrong with the weather or the time is said already.
        if (!wants(&Layer::needs_air) || !run_.times || !plan_.weather ||
            (plan_.weather->table && !run_.weather))
            return;
        run_.heat.longwave = daily_longwave(plan_, run_);
        find_thin_bands(run_);
    });
}

}  // namespace

void resolve_heat(const Plan& plan, const ResolveOptions& options, Run& run,
                  RunProblems& problems) {
    HeatResolver(plan, options, run, problems).resolve();
}

}  // namespace sunbudget
