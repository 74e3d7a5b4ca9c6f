#include <fmt/format.h>

#include <algorithm>
#include <cmath>

#include "explain_parts.hpp"
#include "sun_way.hpp"
#include "sunbudget/base/text.hpp"
#include "sunbudget/base/units.hpp"
#include "sunbudget/raster/grid_build.hpp"
#include "sunbudget/report/explain.hpp"
#include "sunbudget/tables/quality.hpp"

namespace sunbudget {

namespace {

/// Periods that stand beside each other in text.
constexpr std::size_t most_columns = 6;

/// As short as reads back as the same number; most are floats.
std::string number(double value) {
    if (std::isnan(value)) return "-";
    const auto single = static_cast<float>(value);
    return static_cast<double>(single) == value ? fmt::format("{}", single)
                                                : fmt::format("{}", value);
}

std::string range_text(const ClassUse& use) {
    return use.albedo_low
               ? fmt::format(", range {} to {}", number(*use.albedo_low), number(*use.albedo_high))
               : std::string();
}

std::string grid_place(const Run& run, const PixelAccount& account) {
    const double column = static_cast<double>(account.probe.column()) + 0.5,
                 row = static_cast<double>(account.probe.row()) + 0.5;
    return fmt::format("{:.10g}, {:.10g} in {}", run.grid.easting(column, row),
                       run.grid.northing(column, row), crs_name(run.grid.crs_wkt));
}

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

}  // namespace

std::string explain_text(const Run& run, const PixelAccount& account) {
    return place_text(run, account) + inputs_text(run, account) + albedo_text(run, account) +
           sun_text(run, account) + terms_text(run, account) + layers_text(run, account) +
           methods_text(run);
}

}  // namespace sunbudget
