#include <cmath>
#include <nlohmann/json.hpp>

#include "explain_parts.hpp"
#include "sun_way.hpp"
#include "sunbudget/base/units.hpp"
#include "sunbudget/base/version.hpp"
#include "sunbudget/raster/grid_build.hpp"
#include "sunbudget/report/explain.hpp"
#include "sunbudget/tables/quality.hpp"

namespace sunbudget {

namespace {

using Json = nlohmann::ordered_json;

Json json_number(double value) {
    return std::isnan(value) ? Json(nullptr) : Json(value);
}

Json inputs_json(const Run& run, const PixelAccount& account) {
    Json list = Json::array();
    for (const auto& input : account.inputs) {
        Json json{{"role", input.file->role},
                  {"name", input.file->name},
                  {"digest", input.file->digest},
                  {"alignment", input.file->source->alignment_text()}};
        if (input.place)
            json["file_pixel"] = {std::floor(input.place->column), std::floor(input.place->row)};
        json["number_in_file"] = input.raw ? Json(*input.raw) : Json(nullptr);
        json["value"] = input.value ? Json(*input.value) : Json(nullptr);
        if (const auto* use = class_of(run, input)) json["class"] = use->name;
        list.push_back(std::move(json));
    }
    for (const auto& file : run.inputs)
        if (!file.source)
            list.push_back({{"role", file.role}, {"name", file.name}, {"digest", file.digest}});
    return list;
}

Json albedo_json(const Run& run, const PixelAccount& account) {
    Json json{{"came_from", quality_meanings(account.quality)}};
    for (const auto& band : weighted_bands(run, account))
        json["bands"].push_back(
            {{"name", band.name}, {"weight", band.weight}, {"reflectance", band.reflectance}});
    if (const auto* image = std::get_if<ReflectanceSurface>(&run.surface)) {
        json["constant"] = image->weights.constant;
        json["fit_error"] = image->weights.fit_error;
    }
    return json;
}

Json moment_json(const SunMoment& moment, const std::optional<bool>& seen) {
    Json json{{"time", format_utc(moment.utc)},
              {"elevation_deg", deg_from_rad(moment.elevation_rad)},
              {"elevation_refracted_deg", deg_from_rad(moment.elevation_refracted_rad)},
              {"azimuth_deg", deg_from_rad(moment.azimuth_rad)}};
    json["above_horizon"] = seen ? Json(*seen) : Json(nullptr);
    return json;
}

Json sun_json(const Run& run, const PixelAccount& account) {
    Json list = Json::array();
    for (const auto& way : sun_ways(run, account, most_ways)) {
        Json json{{"period", band_name(run, way.band)},
                  {"day", format_date(way.day.date)},
                  {"day_length_h", way.day.day_length_s / 3600}};
        json["moments"] = Json::array();
        for (std::size_t i = 0; i < way.moments.size(); ++i)
            json["moments"].push_back(moment_json(way.moments[i], way.seen[i]));
        list.push_back(std::move(json));
    }
    return list;
}

Json horizon_json(const PixelAccount& account) {
    Json list = Json::array();
    for (const auto& point : account.probe.horizon())
        list.push_back({{"azimuth_deg", deg_from_rad(point.azimuth_rad)},
                        {"elevation_deg", json_number(deg_from_rad(std::atan(point.tangent)))}});
    return list;
}

Json periods_json(const Run& run, const PixelAccount& account) {
    Json list = Json::array();
    for (std::size_t band = 0; run.times && band < run.times->bands(); ++band)
        list.push_back({{"period", band_name(run, band)}});
    for (const auto& term : account.probe.terms())
        if (term.band)
            list[*term.band]["terms"][with_unit(term.name, term.unit)] = json_number(term.value);
    return list;
}

Json layers_json(const Run& run, const PixelAccount& account) {
    Json json = Json::object();
    for (std::size_t n = 0; n < run.layers.size(); ++n) {
        const auto& file = run.layers[n].file;
        Json bands = Json::array();
        for (std::size_t band = 0; band < file.bands.size(); ++band)
            bands.push_back({{"band", file.bands[band].description},
                             {"value", json_number(account.layers[n][band])}});
        json[file.name] = {{"unit", file.unit}, {"bands", std::move(bands)}};
    }
    return json;
}

Json terms_json(const PixelAccount& account) {
    Json json = Json::object();
    for (const auto& term : account.probe.terms())
        if (!term.band) json[with_unit(term.name, term.unit)] = json_number(term.value);
    return json;
}

Json methods_json(const Run& run) {
    Json list = Json::array();
    for (const auto* method : run.methods)
        list.push_back(
            {{"family", method->family}, {"name", method->name}, {"source", method->source}});
    return list;
}

}  // namespace

std::string explain_json(const Run& run, const PixelAccount& account) {
    Json json{
        {"program", "sunbudget"}, {"version", program_version()}, {"plan_digest", run.plan_digest}};
    json["pixel"] = {{"column", account.probe.column()},
                     {"row", account.probe.row()},
                     {"crs", crs_name(run.grid.crs_wkt)}};
    if (account.place) {
        json["pixel"]["latitude_deg"] = deg_from_rad(account.place->latitude_rad);
        json["pixel"]["longitude_deg"] = deg_from_rad(account.place->longitude_rad);
    }
    json["inputs"] = inputs_json(run, account);
    if (run.has_surface()) json["albedo"] = albedo_json(run, account);
    json["sun"] = sun_json(run, account);
    json["horizon"] = horizon_json(account);
    json["terms"] = terms_json(account);
    json["periods"] = periods_json(run, account);
    json["layers"] = layers_json(run, account);
    json["methods"] = methods_json(run);
    json["assumptions"] = run.assumptions;
    return json.dump(2, ' ', false, Json::error_handler_t::replace) + "\n";
}

}  // namespace sunbudget
