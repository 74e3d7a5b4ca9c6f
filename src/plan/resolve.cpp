#include "sunbudget/plan/resolve.hpp"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <functional>
#include <utility>

#include "reflectance.hpp"
#include "resolve_parts.hpp"
#include "sunbudget/base/digest.hpp"
#include "sunbudget/base/error.hpp"
#include "sunbudget/raster/grid_build.hpp"
#include "sunbudget/raster/locator.hpp"

namespace sunbudget {

namespace fs = std::filesystem;

bool RunProblems::attempt(const Place& place, const std::function<void()>& step) {
    try {
        step();
        return true;
    } catch (const Error& error) {
        const auto placed = place.text().empty() ? error : error.at(place.text());
        for (const auto& problem : placed.problems()) list_.push_back(problem);
        // A wrong plan outranks a wrong file: the plan is what has to be mended first.
        if (list_.size() == placed.problems().size() || error.cause() == Cause::usage)
            cause_ = error.cause();
        return false;
    }
}

void RunProblems::add(Cause cause, const Place& place, std::string what, std::string todo) {
    attempt(place, [&] { throw Error(cause, std::move(what), {}, std::move(todo)); });
}

void RunProblems::throw_if_any() const {
    if (!list_.empty()) throw Error(cause_, list_);
}

RasterName raster_of(const PlanRaster& raster) {
    RasterName name;
    name.path = raster.path.file;
    if (const auto number = parse_integer(raster.band))
        name.band = static_cast<int>(*number);
    else
        name.band_name = raster.band;
    return name;
}

RasterLimits limits_of(const ResolveOptions& options) {
    return {std::max<std::uint64_t>(options.memory_bytes / 8, std::uint64_t{1} << 26)};
}

namespace {

/// Resolves one plan, step by step; each step may use what those before it found.
class Resolver {
  public:
    Resolver(const Plan& plan, const ResolveOptions& options) : plan_(plan), options_(options) {}

    Run resolved() {
        run_.title = plan_.title ? **plan_.title : std::string();
        run_.plan_file = fs::path(plan_.file).filename().string();
        run_.plan_digest = plan_digest(plan_);
        if (plan_.engine.tile) run_.tile = **plan_.engine.tile;
        if (!find_grid()) problems_.throw_if_any();
        resolve_surface(plan_, options_, run_, problems_);
        resolve_elevation(plan_, options_, run_, problems_);
        resolve_sky(plan_, options_, run_, problems_);
        resolve_time(plan_, run_, problems_);
        resolve_weather(plan_, options_, run_, problems_);
        resolve_pressure(plan_, run_, problems_);
        resolve_heat(plan_, options_, run_, problems_);
        resolve_clouds(plan_, options_, run_, problems_);
        share_clouds(plan_, run_);
        tell_unused_columns(run_);
        problems_.throw_if_any();
        resolve_layers(plan_, run_, problems_);
        problems_.throw_if_any();
        resolve_changes(plan_, options_, run_, problems_);
        resolve_zones(plan_, run_, problems_);
        resolve_report();
        refuse_overwriting_inputs();
        problems_.throw_if_any();
        return std::move(run_);
    }

  private:
    /// The raster whose grid the run takes when the plan gives none of its own.
    std::optional<std::pair<RasterName, Place>> model_raster() {
        const auto surface = [&]() -> std::optional<std::pair<RasterName, Place>> {
            if (plan_.surface.reflectance) {
                const auto bands = image_files(*plan_.surface.reflectance).bands;
                if (!bands.empty()) return std::pair{bands.front().raster, bands.front().place};
            }
            if (plan_.surface.cover)
                return std::pair{raster_of(*plan_.surface.cover->raster),
                                 plan_.surface.cover->raster.place};
            if (plan_.surface.albedo && plan_.surface.albedo->raster)
                return std::pair{raster_of(**plan_.surface.albedo->raster),
                                 plan_.surface.albedo->raster->place};
            return std::nullopt;
        };
        const auto elevation = [&]() -> std::optional<std::pair<RasterName, Place>> {
            if (plan_.terrain.elevation)
                if (const auto* rasters =
                        std::get_if<std::vector<PlanRaster>>(&**plan_.terrain.elevation))
                    return std::pair{raster_of(rasters->front()), plan_.terrain.elevation->place};
            return std::nullopt;
        };
        if (!plan_.grid.like) return surface() ? surface() : elevation();
        if (const auto* path = std::get_if<PlanPath>(&**plan_.grid.like))
            return std::pair{RasterName{path->file, 1, {}}, plan_.grid.like->place};
        return std::get<LikeInput>(**plan_.grid.like) == LikeInput::surface ? surface()
                                                                            : elevation();
    }

    bool find_grid() {
        const auto& grid = plan_.grid;
        std::optional<Bounds> bounds;
        if (grid.bounds)
            bounds = Bounds{(**grid.bounds)[0], (**grid.bounds)[1], (**grid.bounds)[2],
                            (**grid.bounds)[3]};
        const std::optional<double> cell = grid.cell ? std::optional(**grid.cell) : std::nullopt;
        if (grid.crs)
            return problems_.attempt(grid.crs->place, [&] {
                run_.grid = grid_from(crs_wkt_of(**grid.crs), *bounds, *cell);
            });
        std::optional<std::pair<RasterName, Place>> model;
        const auto place_of_image =
            plan_.surface.reflectance ? plan_.surface.reflectance->place : Place{};
        if (!problems_.attempt(place_of_image, [&] { model = model_raster(); })) return false;
        if (!model) {
            problems_.add(Cause::usage, grid.like ? grid.like->place : Place{plan_.file, 0, "grid"},
                          "the run has no grid: no raster to take it from",
                          "give grid.crs with bounds and cell, or a surface or elevation raster");
            return false;
        }
        RasterInfo info;
        if (!problems_.attempt(model->second,
                               [&] { info = inspect(model->first, limits_of(options_)); }))
            return false;
        const auto& place = grid.bounds ? grid.bounds->place
                            : grid.cell ? grid.cell->place
                                        : model->second;
        return problems_.attempt(place, [&] { run_.grid = cropped(info.grid, bounds, cell); });
    }

    void resolve_report() {
        if (!plan_.report.html || !**plan_.report.html) return;
        run_.report.emplace();
        for (const auto& id : plan_.report.layers) run_.report->layers.push_back(*id);
    }

    [[nodiscard]] std::vector<fs::path> outputs() const {
        if (!options_.single_file.empty()) return {options_.single_file};
        std::vector<fs::path> files;
        if (plan_.outputs.directory)
            for (const auto& layer : run_.layers)
                files.push_back(plan_.outputs.directory->value.file / (layer.file.name + ".tif"));
        if (plan_.outputs.directory && plan_.zones)
            for (const auto* name : {"zones.csv", "zones.gpkg", "changes.csv"})
                files.push_back(plan_.outputs.directory->value.file / name);
        if (plan_.outputs.directory && run_.report)
            files.push_back(plan_.outputs.directory->value.file / "report.html");
        return files;
    }

    [[nodiscard]] std::vector<std::pair<fs::path, Place>> inputs() const {
        std::vector<std::pair<fs::path, Place>> files;
        for (const auto& [name, place] : read_rasters(plan_)) files.emplace_back(name.path, place);
        if (plan_.grid.like)
            if (const auto* path = std::get_if<PlanPath>(&**plan_.grid.like))
                files.emplace_back(path->file, plan_.grid.like->place);
        if (plan_.weather && plan_.weather->table)
            files.emplace_back((**plan_.weather->table).file, plan_.weather->table->place);
        if (plan_.zones) files.emplace_back(plan_.zones->file->file, plan_.zones->file.place);
        for (const auto& change : plan_.changes)
            if (change.where && change.where->file)
                files.emplace_back((**change.where->file).file, change.where->file->place);
        if (plan_.surface.cover)
            if (const auto* path = std::get_if<PlanPath>(&*plan_.surface.cover->classes))
                files.emplace_back(path->file, plan_.surface.cover->classes.place);
        return files;
    }

    /// No output may take the place of an input: the run would destroy what it stands on.
    void refuse_overwriting_inputs() {
        for (const auto& output : outputs())
            for (const auto& [input, place] : inputs()) {
                std::error_code ignored;
                if (fs::equivalent(output, input, ignored))
                    problems_.add(Cause::usage, place,
                                  "the run would write over its own input " + input.string(),
                                  "name another output");
            }
    }

    const Plan& plan_;
    const ResolveOptions& options_;
    Run run_;
    RunProblems problems_;
};

}  // namespace

namespace {

/// Rasters of air, emissivity and surface temperature.
std::vector<std::pair<PlanRaster, Place>> heat_rasters(const Plan& plan) {
    std::vector<std::pair<PlanRaster, Place>> rasters;
    const auto add = [&](const auto& given) {
        if (!given) return;
        if (const auto* field = std::get_if<PlanFieldRaster>(&(**given).value))
            rasters.emplace_back(field->raster, given->place);
    };
    add(plan.surface.emissivity);
    if (plan.weather) {
        add(plan.weather->air_temperature);
        add(plan.weather->relative_humidity);
        add(plan.weather->dew_point);
        add(plan.weather->vapour_pressure);
    }
    if (plan.surface_temperature)
        if (const auto* raster =
                std::get_if<PlanSurfaceRaster>(&(**plan.surface_temperature).value)) {
            rasters.emplace_back(raster->raster, plan.surface_temperature->place);
            if (raster->quality)
                rasters.emplace_back(*raster->quality, plan.surface_temperature->place);
        }
    return rasters;
}

}  // namespace

std::vector<std::pair<RasterName, Place>> read_rasters(const Plan& plan) {
    std::vector<std::pair<RasterName, Place>> rasters;
    if (plan.surface.cover)
        rasters.emplace_back(raster_of(*plan.surface.cover->raster),
                             plan.surface.cover->raster.place);
    if (plan.surface.reflectance) {
        const auto files = image_files(*plan.surface.reflectance);
        for (const auto* list : {&files.bands, &files.quality})
            for (const auto& file : *list) rasters.emplace_back(file.raster, file.place);
    }
    if (plan.surface.albedo && plan.surface.albedo->raster)
        rasters.emplace_back(raster_of(**plan.surface.albedo->raster),
                             plan.surface.albedo->raster->place);
    if (plan.terrain.elevation)
        if (const auto* elevation = std::get_if<std::vector<PlanRaster>>(&**plan.terrain.elevation))
            for (const auto& raster : *elevation)
                rasters.emplace_back(raster_of(raster), plan.terrain.elevation->place);
    for (const auto& given : plan.sky.parameters)
        if (given)
            if (const auto* raster = std::get_if<PlanRaster>(&**given))
                rasters.emplace_back(raster_of(*raster), given->place);
    if (plan.terrain.slope_from)
        if (const auto* path = std::get_if<PlanPath>(&**plan.terrain.slope_from))
            rasters.emplace_back(RasterName{path->file, 1, {}}, plan.terrain.slope_from->place);
    for (const auto& [raster, place] : heat_rasters(plan))
        rasters.emplace_back(raster_of(raster), place);
    for (const auto* given : {&plan.sky.cloud, &plan.longwave.cloud, &plan.longwave.down})
        if (*given)
            if (const auto* list = std::get_if<std::vector<PlanRaster>>(&***given))
                for (const auto& raster : *list)
                    rasters.emplace_back(raster_of(raster), (*given)->place);
    if (plan.sky.index)
        for (const auto& raster : **plan.sky.index)
            rasters.emplace_back(raster_of(raster), plan.sky.index->place);
    for (const auto& change : plan.changes)
        if (change.height && change.height->raster)
            rasters.emplace_back(raster_of(**change.height->raster), change.height->raster->place);
    return rasters;
}

void add_input(Run& run, const std::string& role, const Source& source) {
    const auto& path = source.info().name.path;
    auto name = path.filename().string();
    if (source.info().bands > 1) name += fmt::format(" band {}", source.info().name.band);
    run.inputs.push_back({role, std::move(name), input_digest(path), source.description(),
                          source.coverage(), std::make_shared<const Source>(source)});
    for (const auto& warning : source.warnings()) run.warnings.push_back(role + ": " + warning);
    if (source.coverage() < 0.999)
        run.warnings.push_back(
            fmt::format("{}: {} covers {:.1f} % of the grid; the rest has no value", role,
                        path.filename().string(), source.coverage() * 100));
}

Run resolve(const Plan& plan, const ResolveOptions& options) {
    const Plan complete = with_defaults(plan);
    return Resolver(complete, options).resolved();
}

}  // namespace sunbudget
