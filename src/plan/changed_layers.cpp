#include <fmt/format.h>

#include "resolve_parts.hpp"
#include "sunbudget/raster/finish.hpp"

namespace sunbudget {

namespace {

/// Whether a layer shows the change, and whether what is saved of it has a meaning.
struct Shows {
    bool after = false, saved = false;
};

Shows shows(const Change& change, const Layer& layer, const Run& run) {
    if (!change.case_name.empty()) return {false, layer.id == LayerId::net_shortwave};
    const auto both = [](bool shown) { return Shows{shown, shown}; };
    const bool terrain = run.terrain.has_value(), raised = change.height.has_value();
    const bool ground_lights_sky = waits_for_ground(run.sky);
    const bool lights = raised || change.albedo, emits = change.emissivity.has_value();
    const bool balanced = run.heat.surface == SurfaceFrom::balance;
    const bool warms = raised || emits || (balanced && (change.albedo || change.dry));
    switch (layer.id) {
        case LayerId::albedo:
            return {change.albedo.has_value(), false};
        case LayerId::emissivity:
            return {emits, false};
        case LayerId::sri:
            return {lights || emits || change.dry, false};
        case LayerId::net_shortwave:
            return both(lights);
        case LayerId::insolation:
            return both(lights && (terrain || ground_lights_sky));
        case LayerId::reflected:
            return both(lights && terrain);
        case LayerId::diffuse:
            return both(raised || (lights && ground_lights_sky));
        case LayerId::direct:
        case LayerId::sunlit_hours:
        case LayerId::longwave_down:
            return both(raised);
        case LayerId::longwave_up:
        case LayerId::net_longwave:
            return both(warms);
        case LayerId::net_radiation:
            return both(lights || warms);
        case LayerId::surface_temperature:
            return both(balanced ? warms : raised && run.heat.surface == SurfaceFrom::air);
        case LayerId::sky_view:
            return {raised, false};
        default:
            return {};
    }
}

void add_layer(Run& run, std::size_t base, std::size_t change, const std::string& described,
               bool saved) {
    auto added = run.layers[base];
    const auto& made = run.changes[change];
    added.changed = ChangedLayer{change, saved, base};
    auto& file = added.file;
    file.name += "__" + made.name;
    if (saved) file.name += made.case_name.empty() ? "__saved" : "__saved_" + made.case_name;
    file.metadata["change"] = described;
    if (!made.case_name.empty())
        file.metadata["case"] = fmt::format("{} albedo, {:.6g}", made.case_name, *made.albedo);
    if (saved) {
        file.metadata["layer"] =
            "what the change saves: before less after; negative where there is more after";
        if (added.layer->quantity == Quantity::temperature) file.unit = "K";  // a difference
        for (auto& band : file.bands) band.metadata.erase("standard_name");
    }
    check_layer(file);
    run.layers.push_back(std::move(added));
}

}  // namespace

void add_change(Run& run, Change change, const std::string& described) {
    const auto number = run.changes.size();
    run.changes.push_back(std::move(change));
    const auto& added = run.changes.back();
    if (added.case_name.empty()) {
        auto treated = output_layer(layer(LayerId::treated), run);
        treated.file.name += "__" + added.name;
        treated.changed = ChangedLayer{number, false, 0};
        run.layers.push_back(std::move(treated));
    }
    const auto count = run.layers.size();
    for (std::size_t n = 0; n < count; ++n) {
        if (run.layers[n].changed) continue;
        const auto [after, saved] = shows(added, *run.layers[n].layer, run);
        if (after) add_layer(run, n, number, described, false);
        if (saved) add_layer(run, n, number, described, true);
    }
}

}  // namespace sunbudget
