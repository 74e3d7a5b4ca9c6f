#include <fmt/format.h>

#include <algorithm>

#include "resolve_parts.hpp"
#include "sunbudget/base/digest.hpp"
#include "sunbudget/base/text.hpp"
#include "sunbudget/base/units.hpp"
#include "sunbudget/base/version.hpp"
#include "sunbudget/raster/finish.hpp"
#include "sunbudget/raster/grid_build.hpp"
#include "sunbudget/tables/quality.hpp"

namespace sunbudget {

namespace {

std::string period_text(const Period& period, const TimePlan& times) {
    const auto first = format_date(period.days.front().date),
               last = format_date(period.days.back().date);
    return first + "/" + last + " " + times.zone.name();
}

/// From what the flow gives (W m-2, mean over the band's period; hours for each 24) to the stored unit.
double factor_of(const Layer& layer, OutputUnit unit, double period_s) {
    if (layer.quantity == Quantity::hours) return period_s / seconds_per_day;
    if (layer.quantity != Quantity::radiation) return 1.0;
    return unit == OutputUnit::w_m2 ? 1.0 : period_s / joules_of(unit);
}

BandText band_of(const Layer& layer, const Run& run, std::size_t band) {
    BandText text;
    text.description = layer.name;
    if (layer.needs_time() && run.times && run.times->instant) {
        text.description = format_utc(*run.times->instant);
        text.metadata["time"] = text.description;
    } else if (layer.needs_time() && run.times) {
        const auto& period = run.times->periods[band];
        text.description = period.name;
        text.metadata["period"] = period_text(period, *run.times);
        const bool mean = layer.quantity == Quantity::temperature ||
                          (layer.quantity == Quantity::radiation && run.unit == OutputUnit::w_m2);
        text.metadata["cell_methods"] = mean ? "time: mean" : "time: sum";
    }
    if (const auto& name = standard_name_of(layer, run.unit); !name.empty())
        text.metadata["standard_name"] = name;
    return text;
}

/// Where the albedo's standard uncertainty comes from; empty where nobody says.
std::string albedo_uncertainty_text(const Run& run) {
    const std::string classes =
        "half of the class's range of published values over the root of 3, as of a rectangular "
        "distribution";
    if (const auto* given = std::get_if<GivenSurface>(&run.surface))
        return given->uncertainty ? shortest(*given->uncertainty) + ", as the plan says"
                                  : std::string();
    if (const auto* image = std::get_if<ReflectanceSurface>(&run.surface))
        return shortest(image->weights.fit_error) + ", the error of the bands' weights" +
               (image->fill ? "; filled pixels: " + classes : "");
    return std::holds_alternative<CoverSurface>(run.surface) ? classes : std::string();
}

std::map<std::string, std::string> file_metadata(const Layer& layer, const Run& run) {
    std::map<std::string, std::string> items{
        {"software", "sunbudget " + std::string(program_version())},
        {"plan_digest", run.plan_digest},
        {"layer", layer.text}};
    if (!run.title.empty()) items["title"] = run.title;
    for (std::size_t i = 0; i < run.inputs.size(); ++i)
        items[fmt::format("input_{:02}", i + 1)] =
            fmt::format("{}: {} {}", run.inputs[i].role, run.inputs[i].name, run.inputs[i].digest);
    for (std::size_t i = 0; i < run.methods.size(); ++i)
        items[fmt::format("method_{:02}", i + 1)] = fmt::format(
            "{} {}: {}", run.methods[i]->family, run.methods[i]->name, run.methods[i]->source);
    if (const auto* image = std::get_if<ReflectanceSurface>(&run.surface);
        image != nullptr && (layer.needs_albedo || layer.id == LayerId::quality))
        items.merge(reflectance_metadata(*image));
    if (const auto text = albedo_uncertainty_text(run); layer.needs_albedo && !text.empty())
        items["albedo_uncertainty"] = text;
    if (layer.needs_time() && run.times) {
        if (layer.quantity == Quantity::radiation)
            items["per_area"] =
                run.terrain
                    ? "square metre of the inclined surface"
                    : "square metre of horizontal ground: the ground is taken as level and open";
        items["light_uncertainty"] = fmt::format(
            "{:g} of the value, standard, the same at all times", run.light_uncertainty);
        if (!run.times->instant) items["time_step"] = fmt::format("{} s", run.times->step_s);
    }
    return items;
}

/// The files' own words for the flags, so that a table of them is never far away.
void describe_flags(LayerFile& file) {
    for (const auto& row : quality_rows())
        file.metadata[fmt::format("flag_{}", row.name)] =
            fmt::format("(value & {}) == {}: {}", row.mask, row.value, row.text);
}

}  // namespace

OutputLayer output_layer(const Layer& layer, const Run& run) {
    OutputLayer out{&layer, {}, {}};
    auto& file = out.file;
    file.name = layer.name;
    file.grid = run.grid;
    file.tile = run.tile;
    file.overviews = run.overviews;
    file.nearest = layer.id == LayerId::aspect;
    file.sample = layer.sample == SampleType::float32 ? Sample::float32 : Sample::uint16;
    file.unit = unit_of(layer, run.unit);
    const bool timed = layer.needs_time() && run.times;
    const std::size_t bands = timed ? run.times->bands() : 1;
    double quantum = 1e300;
    for (std::size_t band = 0; band < bands; ++band) {
        const double period_s =
            timed && !run.times->instant ? run.times->periods[band].duration_s : 1;
        file.bands.push_back(band_of(layer, run, band));
        out.factors.push_back(timed ? factor_of(layer, run.unit, period_s) : 1.0);
        quantum = std::min(quantum, quantum_of(layer, run.unit, period_s));
    }
    file.metadata = file_metadata(layer, run);
    if (file.sample == Sample::float32) {
        file.quantum = static_cast<float>(quantum);
        file.metadata["rounded_to"] = shortest(quantum);
    } else {
        describe_flags(file);
    }
    return out;
}

namespace {

/// Classes whose table gives no range have no uncertainty, and the layers ask for one.
void refuse_without_range(const Run& run) {
    std::vector<std::string> without;
    for (const auto& use : run.classes)
        if (use.albedo && !use.albedo_low)
            without.push_back(fmt::format("{} \"{}\"", use.code, use.name));
    if (!without.empty())
        throw Error(Cause::usage,
                    "the class table gives no range of albedo for " + joined(without, ", ") +
                        ", and the layer needs one",
                    {}, "add the columns albedo_low and albedo_high, or leave the layer out");
}

}  // namespace

void resolve_layers(const Plan& plan, Run& run, RunProblems& problems) {
    if (plan.outputs.unit) run.unit = **plan.outputs.unit;
    if (plan.outputs.format) run.overviews = **plan.outputs.format == FileFormat::cog;
    for (const auto& name : plan.outputs.layers)
        problems.attempt(name.place, [&] {
            if (layer(*name).needs_albedo_uncertainty) refuse_without_range(run);
            run.layers.push_back(output_layer(layer(*name), run));
            check_layer(run.layers.back().file);
        });
}

void resolve_zones(const Plan& plan, Run& run, RunProblems& problems) {
    if (!plan.zones) return;
    const auto& zones = *plan.zones;
    ZoneTask task{{zones.file->file, zones.layer ? **zones.layer : std::string(), {}},
                  **zones.id,
                  {},
                  {},
                  {}};
    if (zones.above) task.above = **zones.above;
    for (const auto& id : zones.layers) task.layers.push_back(layer(*id).name);
    if (!zones.layers.empty())
        for (const auto& output : run.layers)
            if (output.changed &&
                (output.layer->id == LayerId::treated ||
                 std::ranges::find(task.layers, run.layers[output.changed->base].file.name) !=
                     task.layers.end()))
                task.layers.push_back(output.file.name);
    if (zones.layers.empty())
        for (const auto& output : run.layers)
            if (output.layer->quantity != Quantity::flags && output.layer->id != LayerId::aspect &&
                !output.layer->needs_albedo_uncertainty)
                task.layers.push_back(output.file.name);
    if (plan.surface.cover) task.cover = raster_of(*plan.surface.cover->raster);
    problems.attempt(zones.file.place, [&] {
        const auto file = inspect_polygons(task.shapes);
        if (task.id != "fid" && std::ranges::find(file.fields, task.id) == file.fields.end())
            throw Error(Cause::input, "no field \"" + task.id + "\" to name the zones by", {},
                        suggestion(task.id, file.fields));
        run.inputs.push_back({"zones.file",
                              task.shapes.path.filename().string(),
                              input_digest(task.shapes.path),
                              {fmt::format("{}, layer {}, {} features, {}", file.driver, file.layer,
                                           file.features, crs_name(file.crs_wkt))},
                              1});
    });
    const bool has_slope = std::ranges::any_of(
        run.layers, [](const auto& output) { return output.layer->id == LayerId::slope; });
    if (run.terrain && !has_slope) {
        run.layers.push_back(output_layer(layer(LayerId::slope), run));
        run.assumptions.push_back(
            "zones: the layer slope is written too; sums over zones use the inclined surface");
    }
    run.zones = std::move(task);
}

}  // namespace sunbudget
