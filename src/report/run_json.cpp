#include "sunbudget/report/run_json.hpp"

#include <fmt/format.h>

#include <fstream>
#include <nlohmann/json.hpp>

#include "sunbudget/base/digest.hpp"
#include "sunbudget/base/version.hpp"
#include "sunbudget/raster/grid_build.hpp"
#include "sunbudget/tables/quality.hpp"

namespace sunbudget {

namespace {

using Json = nlohmann::ordered_json;

Json grid_json(const Grid& grid) {
    const auto bounds = bounds_of(grid);
    Json json{{"columns", grid.width}, {"rows", grid.height}, {"affine", grid.affine}, {"crs", crs_name(grid.crs_wkt)}};
    json["bounds"] = {bounds.west, bounds.south, bounds.east, bounds.north};
    json["crs_wkt"] = grid.crs_wkt;
    return json;
}

Json time_json(const TimePlan& times) {
    if (times.instant) return {{"at", format_utc(*times.instant)}};
    Json periods = Json::array();
    for (const auto& period : times.periods)
        periods.push_back({{"name", period.name},
                           {"first_day", format_date(period.days.front().date)},
                           {"last_day", format_date(period.days.back().date)},
                           {"duration_h", period.duration_s / 3600}});
    return {{"zone", times.zone.name()}, {"step_s", times.step_s}, {"periods", periods}};
}

Json inputs_json(const Run& run) {
    Json inputs = Json::array();
    for (const auto& input : run.inputs) {
        Json json{{"role", input.role}, {"name", input.name}, {"digest", input.digest}};
        if (!input.notes.empty()) json["notes"] = input.notes;
        json["coverage"] = input.coverage;
        inputs.push_back(std::move(json));
    }
    return inputs;
}

Json classes_json(const Run& run) {
    Json classes = Json::array();
    for (const auto& use : run.classes) {
        Json json{{"code", use.code}, {"name", use.name}, {"pixels_of_the_raster", use.pixels}};
        json["albedo"] = use.albedo ? Json(*use.albedo) : Json(nullptr);
        classes.push_back(std::move(json));
    }
    return classes;
}

Json methods_json(const Run& run) {
    Json methods = Json::array();
    for (const auto* method : run.methods)
        methods.push_back({{"family", method->family}, {"name", method->name}, {"source", method->source}});
    return methods;
}

Json band_json(const std::string& name, const BandStatistics& band) {
    Json json{{"name", name}, {"valid_pixels", band.count}, {"pixels", band.pixels}};
    if (band.count > 0) {
        json["min"] = band.min;
        json["max"] = band.max;
        json["mean"] = band.mean;
        json["stddev"] = band.stddev;
    }
    return json;
}

Json layers_json(const Run& run, const Execution& execution) {
    Json layers = Json::array();
    for (std::size_t n = 0; n < run.layers.size(); ++n) {
        const auto& file = run.layers[n].file;
        Json json{{"layer", file.name}, {"file", execution.layers[n].file_name}, {"unit", file.unit}};
        if (file.quantum > 0) json["rounded_to"] = static_cast<double>(file.quantum);
        Json bands = Json::array();
        for (std::size_t band = 0; band < execution.layers[n].bands.size(); ++band)
            bands.push_back(band_json(file.bands[band].description, execution.layers[n].bands[band]));
        if (!bands.empty()) json["bands"] = std::move(bands);
        layers.push_back(std::move(json));
    }
    return layers;
}

std::uint64_t pixels_of(const QualityRow& row, const Execution& execution) {
    std::uint64_t pixels = 0;
    for (const auto& [flag, count] : execution.flags)
        if ((flag & row.mask) == row.value) pixels += count;
    return pixels;
}

/// Pixels for each meaning of the quality layer, in its own order.
Json quality_json(const Execution& execution) {
    Json json = Json::object();
    for (const auto& row : quality_rows())
        if (const auto pixels = pixels_of(row, execution); pixels > 0) json[row.name] = pixels;
    return json;
}

}  // namespace

std::string run_digest(const Run& run) {
    Sha256 sha;
    sha.add(program_version());
    sha.add("\n" + run.plan_digest);
    for (const auto& input : run.inputs) sha.add("\n" + input.role + " " + input.digest);
    return sha.hex();
}

std::string recorded_run_digest(const std::filesystem::path& folder) {
    std::ifstream file(folder / "run.json");
    const auto json = Json::parse(file, nullptr, false);
    if (!json.is_object() || !json.contains("run_digest") || !json["run_digest"].is_string()) return {};
    return json["run_digest"].get<std::string>();
}

std::string run_json(const Run& run, const Execution& execution) {
    Json json{{"program", "sunbudget"}, {"version", program_version()}};
    if (!run.title.empty()) json["title"] = run.title;
    json["run_digest"] = run_digest(run);
    json["plan"] = {{"file", run.plan_file}, {"digest", run.plan_digest}};
    json["grid"] = grid_json(run.grid);
    if (run.times) {
        json["time"] = time_json(*run.times);
        json["sky"] = {{"turbidity", run.sky.turbidity}};
    }
    json["inputs"] = inputs_json(run);
    if (!run.classes.empty()) json["classes"] = classes_json(run);
    json["methods"] = methods_json(run);
    json["layers"] = layers_json(run, execution);
    json["quality_pixels"] = quality_json(execution);
    json["infinite_numbers_in_inputs"] = execution.infinities;
    json["assumptions"] = run.assumptions;
    json["warnings"] = run.warnings;
    return json.dump(2, ' ', false, Json::error_handler_t::replace) + "\n";
}

std::vector<std::string> summary(const Run& run, const Execution& execution) {
    std::vector<std::string> lines;
    for (std::size_t n = 0; n < run.layers.size(); ++n) {
        const auto& file = run.layers[n].file;
        const auto unit = file.unit == "1" ? std::string() : " " + file.unit;
        for (std::size_t b = 0; b < execution.layers[n].bands.size(); ++b) {
            const auto& band = execution.layers[n].bands[b];
            const auto name = file.bands.size() == 1 ? file.name : file.name + " " + file.bands[b].description;
            const auto missing = static_cast<double>(band.pixels - band.count) / static_cast<double>(band.pixels) * 100;
            lines.push_back(band.count == 0 ? name + ": no pixel has a value"
                                            : fmt::format("{}: mean {:.4g}, {:.4g} to {:.4g}{}, {:.2g} % without value", name,
                                                          band.mean, band.min, band.max, unit, missing));
        }
    }
    for (const auto& row : quality_rows()) {
        const bool where_from = row.mask == quality::source_mask && row.value != quality::no_surface;
        const auto pixels = pixels_of(row, execution);
        if (!where_from && pixels > 0 && (row.mask != quality::source_mask || run.has_surface()))
            lines.push_back(fmt::format("{} pixels: {}", pixels, row.text));
    }
    return lines;
}

}  // namespace sunbudget
