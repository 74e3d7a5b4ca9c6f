#include "sunbudget/report/explain.hpp"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <nlohmann/json.hpp>

#include "sun_way.hpp"
#include "sunbudget/base/text.hpp"
#include "sunbudget/base/units.hpp"
#include "sunbudget/base/version.hpp"
#include "sunbudget/raster/grid_build.hpp"
#include "sunbudget/tables/quality.hpp"

namespace sunbudget {

namespace {

using Json = nlohmann::ordered_json;

/// Days whose sun is followed: a year of months, no more.
constexpr std::size_t most_ways = 12;
/// Periods that stand beside each other in text.
constexpr std::size_t most_columns = 6;

/// As short as reads back as the same number; most are floats.
std::string number(double value) {
    if (std::isnan(value)) return "-";
    const auto single = static_cast<float>(value);
    return static_cast<double>(single) == value ? fmt::format("{}", single)
                                                : fmt::format("{}", value);
}

Json json_number(double value) {
    return std::isnan(value) ? Json(nullptr) : Json(value);
}

std::string with_unit(const std::string& name, const std::string& unit) {
    if (unit == "1" || (unit == "h" && name.ends_with("hours"))) return name;
    if (unit == "degree") return name + "_deg";
    auto suffix = lower_case(unit);
    std::ranges::replace(suffix, '/', '_');
    return name + "_" + suffix;
}

std::string band_name(const Run& run, std::size_t band) {
    return run.times->instant ? format_utc(*run.times->instant) : run.times->periods[band].name;
}

const ClassUse* class_of(const Run& run, const InputPixel& input) {
    if (input.file->role != "surface.cover.raster" || !input.value) return nullptr;
    const auto found =
        std::ranges::find(run.classes, static_cast<int>(*input.value), &ClassUse::code);
    return found == run.classes.end() ? nullptr : &*found;
}

std::string range_text(const ClassUse& use) {
    return use.albedo_low
               ? fmt::format(", range {} to {}", number(*use.albedo_low), number(*use.albedo_high))
               : std::string();
}

/// Weight and reflectance of each band of an image: their products and the constant add up to the albedo.
struct WeightedBand {
    std::string name;
    double weight;
    double reflectance;
};
std::vector<WeightedBand> weighted_bands(const Run& run, const PixelAccount& account) {
    std::vector<WeightedBand> bands;
    if (const auto* image = std::get_if<ReflectanceSurface>(&run.surface))
        for (const auto& band : image->bands)
            for (const auto& input : account.inputs)
                if (input.file->source->info().name == band.reflectance.info().name && input.value)
                    bands.push_back({band.name, band.weight, *input.value});
    return bands;
}

std::string grid_place(const Run& run, const PixelAccount& account) {
    const double column = static_cast<double>(account.probe.column()) + 0.5,
                 row = static_cast<double>(account.probe.row()) + 0.5;
    return fmt::format("{:.10g}, {:.10g} in {}", run.grid.easting(column, row),
                       run.grid.northing(column, row), crs_name(run.grid.crs_wkt));
}

// ---- text ----

std::string heading(const std::string& text) {
    return "\n" + text + "\n";
}

std::string place_text(const Run& run, const PixelAccount& account) {
    auto text = run.title.empty() ? std::string() : printable(run.title) + "\n";
    text += fmt::format("Pixel column {}, row {} (counted from 0) of {}\n", account.probe.column(),
                        account.probe.row(), describe(run.grid));
    text += "  middle at " + grid_place(run, account) + "\n";
    return text + (account.place ? fmt::format("  latitude {:.6f}, longitude {:.6f} degrees\n",
                                               deg_from_rad(account.place->latitude_rad),
                                               deg_from_rad(account.place->longitude_rad))
                                 : "  the projection has no place on Earth for it\n");
}

std::string input_text(const Run& run, const InputPixel& input) {
    const auto& file = *input.file;
    auto text =
        fmt::format("  {}: {} ({})\n", file.role, printable(file.name), file.digest.substr(0, 23));
    if (!input.place) return text + "    the pixel lies beside the raster: no value\n";
    text +=
        fmt::format("    pixel {:.0f}, {:.0f} of the file, {}\n", std::floor(input.place->column),
                    std::floor(input.place->row), file.source->alignment_text());
    text += "    number in the file " +
            (input.raw ? number(*input.raw) : std::string("none (no data)"));
    text += ", taken as " + (input.value ? number(*input.value) : std::string("no value"));
    if (const auto* use = class_of(run, input)) text += " \"" + printable(use->name) + "\"";
    return text + "\n";
}

std::string inputs_text(const Run& run, const PixelAccount& account) {
    auto text = heading("What was read");
    for (const auto& input : account.inputs) text += input_text(run, input);
    for (const auto& file : run.inputs)
        if (!file.source)
            text += fmt::format("  {}: {} ({})\n", file.role, printable(file.name),
                                file.digest.substr(0, 23));
    return run.inputs.empty() ? std::string() : text;
}

std::string albedo_text(const Run& run, const PixelAccount& account) {
    if (!run.has_surface()) return {};
    auto text = heading("Where the albedo came from");
    for (const auto& row : quality_rows())
        if ((account.quality & row.mask) == row.value)
            text += fmt::format("  {}: {}\n", row.name, row.text);
    for (const auto& input : account.inputs)
        if (const auto* use = class_of(run, input))
            text += fmt::format("  class {} \"{}\": {}\n", use->code, printable(use->name),
                                use->albedo ? "albedo " + number(*use->albedo) + range_text(*use)
                                            : std::string("no data"));
    for (const auto& band : weighted_bands(run, account))
        text += fmt::format("  {}: reflectance {} x weight {} = {:.6f}\n", band.name,
                            number(band.reflectance), band.weight, band.reflectance * band.weight);
    if (const auto* image = std::get_if<ReflectanceSurface>(&run.surface))
        text += fmt::format("  constant {}; the fit is good to {} (one standard deviation): {}\n",
                            number(image->weights.constant), number(image->weights.fit_error),
                            image->weights.text);
    return text;
}

std::string day_text(const Run& run, const SunWay& way) {
    const auto clock = [](const std::optional<UtcSeconds>& utc) {
        return utc ? format_utc(*utc).substr(11, 5) : std::string("-");
    };
    std::size_t seen = 0, known = 0;
    for (const auto& one : way.seen) {
        known += one.has_value();
        seen += one.value_or(false);
    }
    auto text = fmt::format("  {}, {}: rises {}, highest {} at {:.2f} deg, sets {} (UTC)",
                            band_name(run, way.band), format_date(way.day.date),
                            clock(way.day.sunrise), clock(way.day.transit),
                            deg_from_rad(way.day.transit_elevation_rad), clock(way.day.sunset));
    if (known > 0)
        text += fmt::format("; above the horizon here {:.1f} h of {:.1f} h",
                            static_cast<double>(seen) / 6, static_cast<double>(known) / 6);
    return text + "\n";
}

std::string sun_text(const Run& run, const PixelAccount& account) {
    const auto ways = sun_ways(run, account, most_ways);
    if (ways.empty()) return {};
    auto text = heading("The sun on the middle day of each period");
    for (const auto& way : ways) text += day_text(run, way);
    if (const auto& at = ways.front().instant)
        text += fmt::format(
            "  at the instant: {:.3f} deg high, azimuth {:.3f} deg, beam {:.1f} W/m2, sky light "
            "{:.1f} W/m2 on open level ground in the run's sky\n",
            deg_from_rad(at->elevation_rad), deg_from_rad(at->azimuth_rad), at->beam_w_m2,
            at->diffuse_w_m2);
    text += fmt::format(
        "\n  {}: # ground up to the horizon, * sun, o sun behind the ground{}; degrees above the "
        "level\n",
        format_date(ways.front().day.date), ways.front().instant ? ", @ the instant" : "");
    return text + sky_plot(account, ways.front());
}

/// One number a line, a column for each period.
struct Line {
    std::string name;
    std::string text;  ///< may be empty
    std::vector<double> values;
};
std::string columns_text(const Run& run, const std::vector<Line>& lines) {
    const std::size_t bands = std::min(most_columns, run.times->bands());
    auto text = fmt::format("  {:<34}", "");
    for (std::size_t band = 0; band < bands; ++band)
        text += fmt::format(" {:>14}", printable(band_name(run, band)));
    text += "\n";
    for (const auto& [name, words, values] : lines) {
        text += fmt::format("  {:<34}", name);
        for (std::size_t band = 0; band < std::min(bands, values.size()); ++band)
            text += fmt::format(" {:>14}", number(values[band]));
        text += (words.empty() ? "" : "  " + words) + "\n";
    }
    if (run.times->bands() > bands)
        text +=
            fmt::format("  and {} periods more: --json has them all\n", run.times->bands() - bands);
    return text;
}

std::string terms_text(const Run& run, const PixelAccount& account) {
    auto text = heading("Terms of the whole run");
    std::vector<Line> lines;
    for (const auto& term : account.probe.terms()) {
        if (!term.band) {
            text += fmt::format("  {:<34} {:>14}  {}\n", with_unit(term.name, term.unit),
                                number(term.value), term.text);
            continue;
        }
        const auto name = with_unit(term.name, term.unit);
        auto line = std::ranges::find(lines, name, &Line::name);
        if (line == lines.end()) line = lines.insert(line, {name, term.text, {}});
        line->values.push_back(term.value);
    }
    if (lines.empty()) return text;
    return text + heading("Terms of each period (W/m2: means over its hours, night included)") +
           columns_text(run, lines);
}

std::string layers_text(const Run& run, const PixelAccount& account) {
    auto text = heading("Layers, as stored in the run's files");
    std::vector<Line> lines;
    for (std::size_t n = 0; n < run.layers.size(); ++n) {
        const auto& file = run.layers[n].file;
        const auto name = with_unit(file.name, file.unit);
        if (!run.layers[n].layer->needs_time() || !run.times)
            text += fmt::format("  {:<34} {:>14}\n", name, number(account.layers[n].front()));
        else
            lines.push_back({name, {}, account.layers[n]});
    }
    return lines.empty() ? text : text + columns_text(run, lines);
}

std::string methods_text(const Run& run) {
    auto text = heading("Methods");
    for (const auto* method : run.methods)
        text += fmt::format("  {} {}: {}\n    {}\n", method->family, method->name, method->text,
                            method->source);
    for (std::size_t i = 0; run.times && i < sky_parameter_count; ++i)
        if (!std::isnan(run.sky.parameters[i][0]))
            text += fmt::format("  {} {}, January first: {}\n", name_of(run.sky.model),
                                name_of(static_cast<SkyParameter>(i)),
                                fmt::join(run.sky.parameters[i], " "));
    if (!run.assumptions.empty()) text += heading("Assumed");
    for (const auto& line : run.assumptions) text += "  " + line + "\n";
    return text;
}

// ---- JSON ----

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

std::string explain_text(const Run& run, const PixelAccount& account) {
    return place_text(run, account) + inputs_text(run, account) + albedo_text(run, account) +
           sun_text(run, account) + terms_text(run, account) + layers_text(run, account) +
           methods_text(run);
}

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
