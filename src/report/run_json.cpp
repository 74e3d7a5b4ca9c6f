#include "sunbudget/report/run_json.hpp"

#include <fmt/format.h>
#include <cmath>

#include <algorithm>
#include <fstream>
#include <nlohmann/json.hpp>

#include "quality_counts.hpp"
#include "sunbudget/base/digest.hpp"
#include "sunbudget/base/text.hpp"
#include "sunbudget/base/version.hpp"
#include "sunbudget/raster/grid_build.hpp"
#include "sunbudget/tables/quality.hpp"

namespace sunbudget {

namespace {

using Json = nlohmann::ordered_json;

Json grid_json(const Grid& grid) {
    const auto bounds = bounds_of(grid);
    Json json{{"columns", grid.width},
              {"rows", grid.height},
              {"affine", grid.affine},
              {"crs", crs_name(grid.crs_wkt)}};
    json["bounds"] = {bounds.west, bounds.south, bounds.east, bounds.north};
    json["crs_wkt"] = grid.crs_wkt;
    return json;
}

Json sky_json(const Run& run) {
    const auto& sky = run.sky;
    Json json{{"model", name_of(sky.model)}, {"uncertainty", run.light_uncertainty}};
    if (run.sky_raster) json["raster"] = name_of(run.sky_raster->parameter);
    for (std::size_t i = 0; i < sky_parameter_count; ++i)
        if (const auto& months = sky.parameters[i]; !std::isnan(months[0])) {
            const bool same = std::all_of(months.begin(), months.end(),
                                          [&](double month) { return month == months[0]; });
            json[std::string(name_of(static_cast<SkyParameter>(i)))] =
                same ? Json(months[0]) : Json(months);
        }
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

Json changes_json(const Run& run) {
    Json changes = Json::array();
    for (const auto& change : run.changes) {
        Json json{{"name", change.name}};
        if (!change.case_name.empty()) json["case"] = change.case_name;
        if (change.albedo) json["albedo"] = *change.albedo;
        json["treatable"] = change.treatable;
        json["raises_the_ground"] = change.height.has_value();
        if (change.where) json["polygons"] = change.where->polygons().size();
        if (change.lifetime_years) json["lifetime_years"] = *change.lifetime_years;
        if (change.cost_per_m2) json["cost_per_m2"] = *change.cost_per_m2;
        changes.push_back(std::move(json));
    }
    return changes;
}

Json methods_json(const Run& run) {
    Json methods = Json::array();
    for (const auto* method : run.methods)
        methods.push_back(
            {{"family", method->family}, {"name", method->name}, {"source", method->source}});
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
        Json json{
            {"layer", file.name}, {"file", execution.layers[n].file_name}, {"unit", file.unit}};
        if (file.quantum > 0) json["rounded_to"] = static_cast<double>(file.quantum);
        Json bands = Json::array();
        for (std::size_t band = 0; band < execution.layers[n].bands.size(); ++band)
            bands.push_back(
                band_json(file.bands[band].description, execution.layers[n].bands[band]));
        if (!bands.empty()) json["bands"] = std::move(bands);
        layers.push_back(std::move(json));
    }
    return layers;
}

Json gaps_json(const MeasuredReport& report) {
    Json gaps = Json::array();
    for (const auto& gap : report.first_gaps)
        gaps.push_back({{"from", format_utc(gap.begin)}, {"to", format_utc(gap.end)}});
    return gaps;
}

/// What clouds or a record make of the light; nothing under a clear sky.
Json real_sky_json(const Run& run) {
    Json json = Json::object();
    if (run.sky.mean_cloud) {
        Json shares = Json::array();
        for (const auto& share : *run.sky.mean_cloud)
            shares.push_back(
                {{"beam", share.beam}, {"diffuse", share.diffuse}, {"scattered", share.scattered}});
        json["shares_of_the_clear_sky_by_month"] = std::move(shares);
    }
    if (!run.light.measured) return json;
    const auto& report = *run.light.measured;
    json["from"] = report.from;
    json["days"] = {{"sunlit", report.days},
                    {"missing", report.days_missing},
                    {"with_gaps_filled", report.days_with_gaps}};
    json["sunlit_hours_without_value"] = report.gap_h;
    json["first_gaps"] = gaps_json(report);
    json["day_needs_share_of_light"] = day_needs;
    json["month_needs_share_of_days"] = month_needs;
    Json thin = Json::array();
    for (std::size_t band = 0; band < run.light.thin.size(); ++band)
        if (run.light.thin[band])
            thin.push_back(run.times->instant ? format_utc(*run.times->instant)
                                              : run.times->periods[band].name);
    json["bands_without_data"] = std::move(thin);
    json["intervals_with_sky_light_split_off"] = report.split_intervals;
    if (report.closure.intervals > 0)
        json["closure"] = {{"intervals", report.closure.intervals},
                           {"global_mean_w_m2", report.closure.global_mean_w_m2},
                           {"global_less_parts_mean_w_m2", report.closure.difference_mean_w_m2},
                           {"global_less_parts_rms_w_m2", report.closure.difference_rms_w_m2}};
    json["share_of_light_left_out"] = report.left_out_share;
    return json;
}

/// Pixels for each meaning of the quality layer, in its own order.
Json quality_json(const Execution& execution) {
    Json json = Json::object();
    for (const auto& row : quality_rows())
        if (const auto pixels = pixels_of(row, execution); pixels > 0) json[row.name] = pixels;
    return json;
}

Json image_json(const ReflectanceSurface& surface) {
    const auto& facts = surface.facts;
    Json json{{"sensor", facts.sensor}};
    if (!facts.scene.empty()) json["scene"] = facts.scene;
    if (facts.acquired_utc) json["acquired"] = format_utc(*facts.acquired_utc);
    if (!facts.acquired_utc && facts.date) json["acquired"] = format_date(*facts.date);
    if (facts.sun_elevation_deg) json["sun_elevation_deg"] = *facts.sun_elevation_deg;
    if (facts.sun_azimuth_deg) json["sun_azimuth_deg"] = *facts.sun_azimuth_deg;
    for (const auto& band : surface.bands) json["weights"][band.name] = band.weight;
    json["weights"]["constant"] = surface.weights.constant;
    json["weights_note"] = surface.weights.text;
    json["fit_error"] = surface.weights.fit_error;
    json["rejected"] = facts.rejected;
    json["fill"] = surface.fill ? "cover" : "nodata";
    return json;
}

/// Pixels without the image's albedo, each once: under the first flag of the quality layer's order that
/// rejects, else as out of range, else as without data.
using Reasons = std::vector<std::pair<std::string, std::uint64_t>>;
Reasons reasons_of(const ReflectanceSurface& surface, const Execution& execution) {
    Reasons reasons;
    const auto count = [&](const std::string& name, std::uint64_t pixels) {
        const auto known = std::find_if(reasons.begin(), reasons.end(),
                                        [&](const auto& r) { return r.first == name; });
        if (known == reasons.end())
            reasons.emplace_back(name, pixels);
        else
            known->second += pixels;
    };
    for (const auto& [flag, pixels] : execution.flags) {
        if ((flag & quality::source_mask) == quality::reflectance) continue;
        const auto mask = static_cast<std::uint16_t>(surface.rejecting | quality::out_of_range);
        const auto& rows = quality_rows();
        const auto row = std::find_if(rows.begin(), rows.end(), [&, f = flag](const QualityRow& r) {
            return r.mask != quality::source_mask && (f & mask & r.mask) != 0;
        });
        count(row == rows.end() ? "no_data" : row->name, pixels);
    }
    std::sort(reasons.begin(), reasons.end(),
              [](const auto& a, const auto& b) { return a.second > b.second; });
    return reasons;
}

Json reasons_json(const Reasons& reasons) {
    Json json = Json::object();
    for (const auto& [name, pixels] : reasons) json[name] = pixels;
    return json;
}

double share_without_surface(const Execution& execution) {
    double all = 0, without = 0;
    for (const auto& [flag, pixels] : execution.flags) {
        all += static_cast<double>(pixels);
        if ((flag & quality::source_mask) == quality::no_surface)
            without += static_cast<double>(pixels);
    }
    return all > 0 ? without / all : 0;
}

std::string reasons_text(const Reasons& reasons) {
    std::vector<std::string> texts;
    for (const auto& [name, pixels] : reasons) texts.push_back(fmt::format("{} {}", name, pixels));
    return joined(texts, ", ");
}

}  // namespace

std::vector<std::string> closing_warnings(const Run& run, const Execution& execution) {
    // Less than a twentieth left is hardly what anybody ran this for.
    constexpr double nearly_all = 0.95;
    const double share = share_without_surface(execution);
    if (!run.has_surface() || share <= nearly_all) return {};
    auto text = fmt::format("the result is nearly empty: {:.4g} % of the pixels have no albedo",
                            share * 100);
    if (const auto* image = std::get_if<ReflectanceSurface>(&run.surface))
        text += " (pixels: " + reasons_text(reasons_of(*image, execution)) + ")";
    return {text};
}

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
    if (!json.is_object() || !json.contains("run_digest") || !json["run_digest"].is_string())
        return {};
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
        json["sky"] = sky_json(run);
        if (const auto real = real_sky_json(run); !real.empty()) json["real_sky"] = real;
    }
    json["inputs"] = inputs_json(run);
    if (const auto* image = std::get_if<ReflectanceSurface>(&run.surface)) {
        json["image"] = image_json(*image);
        json["image"]["unused_pixels"] = reasons_json(reasons_of(*image, execution));
    }
    if (!run.classes.empty()) json["classes"] = classes_json(run);
    if (!run.changes.empty()) json["changes"] = changes_json(run);
    json["methods"] = methods_json(run);
    json["layers"] = layers_json(run, execution);
    if (run.zones)
        json["zones"] = {{"file", "zones.csv"},
                         {"shapes", "zones.gpkg"},
                         {"count", execution.zones},
                         {"notes", execution.zone_notes}};
    json["quality_pixels"] = quality_json(execution);
    json["infinite_numbers_in_inputs"] = execution.infinities;
    json["assumptions"] = run.assumptions;
    json["warnings"] = run.warnings;
    for (const auto& warning : closing_warnings(run, execution))
        json["warnings"].push_back(warning);
    return json.dump(2, ' ', false, Json::error_handler_t::replace) + "\n";
}

std::vector<std::string> summary(const Run& run, const Execution& execution) {
    std::vector<std::string> lines;
    for (std::size_t n = 0; n < run.layers.size(); ++n) {
        if (run.layers[n].changed && run.layers[n].layer->id != LayerId::net_shortwave)
            continue;  // there are many
        const auto& file = run.layers[n].file;
        const auto unit = file.unit == "1" ? std::string() : " " + file.unit;
        for (std::size_t b = 0; b < execution.layers[n].bands.size(); ++b) {
            const auto& band = execution.layers[n].bands[b];
            const auto name =
                file.bands.size() == 1 ? file.name : file.name + " " + file.bands[b].description;
            const auto missing = static_cast<double>(band.pixels - band.count) /
                                 static_cast<double>(band.pixels) * 100;
            lines.push_back(
                band.count == 0
                    ? name + ": no pixel has a value"
                    : fmt::format("{}: mean {:.4g}, {:.4g} to {:.4g}{}, {:.2g} % without value",
                                  name, band.mean, band.min, band.max, unit, missing));
        }
    }
    if (const auto* image = std::get_if<ReflectanceSurface>(&run.surface))
        if (const auto reasons = reasons_of(*image, execution); !reasons.empty())
            lines.push_back("pixels without the image's albedo, by reason: " +
                            reasons_text(reasons));
    for (const auto& row : quality_rows()) {
        const bool where_from =
            row.mask == quality::source_mask && row.value != quality::no_surface;
        const auto pixels = pixels_of(row, execution);
        if (!where_from && pixels > 0 && (row.mask != quality::source_mask || run.has_surface()))
            lines.push_back(fmt::format("{} pixels: {}", pixels, row.text));
    }
    if (run.zones)
        lines.push_back(fmt::format("zones.csv, zones.gpkg: figures of {} zones", execution.zones));
    for (const auto& note : execution.zone_notes) lines.push_back("zones: " + note);
    return lines;
}

}  // namespace sunbudget
