#include <fmt/format.h>

#include <algorithm>
#include <array>
#include <cmath>
#include <memory>
#include <nlohmann/json.hpp>

#include "context.hpp"
#include "sun_plot.hpp"
#include "sunbudget/base/text.hpp"
#include "sunbudget/base/units.hpp"
#include "sunbudget/model/sun_table.hpp"
#include "sunbudget/model/turbidity_fit.hpp"
#include "sunbudget/plan/plan.hpp"
#include "sunbudget/plan/weather.hpp"
#include "sunbudget/tables/methods.hpp"

namespace sunbudget {

namespace {

using Json = nlohmann::ordered_json;

enum class Format { text, csv, json };

struct Flags {
    std::string at, time, from, to, step, zone = "UTC", height, model = "esra2000",
                                          diffuse = "hay-davies1980";
    std::string slope, azimuth, albedo, fit;
    std::array<std::string, sky_parameter_count> sky;
    bool csv = false, json = false, plot = false;

    [[nodiscard]] Format format() const {
        return csv ? Format::csv : json ? Format::json : Format::text;
    }
};

double number(const std::string& text, const char* flag, double low, double high) {
    const auto value = parse_number(text);
    if (!value || *value < low || *value > high)
        throw Error(Cause::usage,
                    "\"" + text + "\" is no number from " + shortest(low) + " to " + shortest(high),
                    flag);
    return *value;
}

/// What `read` returns; its errors name the flag.
template <class Read>
auto from_flag(const char* flag, const Read& read) {
    try {
        return read();
    } catch (const Error& error) {
        throw error.at(flag);
    }
}

/// "turbidity_coefficient" as a flag: "--turbidity-coefficient".
std::string flag_of(SkyParameter parameter) {
    auto name = std::string(name_of(parameter));
    std::replace(name.begin(), name.end(), '_', '-');
    return "--" + name;
}

/// A number for every month, or twelve with commas between.
MonthlyNumbers months_of(const std::string& text, const Parameter& parameter,
                         const std::string& flag, Terminal& terminal) {
    const auto parts = split(text, ',');
    if (parts.size() != 1 && parts.size() != 12)
        throw Error(Cause::usage, "\"" + text + "\" is neither one number nor twelve", flag,
                    "write 3, or twelve with commas between");
    MonthlyNumbers months{};
    for (std::size_t i = 0; i < 12; ++i)
        months[i] = number(parts[parts.size() == 1 ? 0 : i], flag.c_str(), -1e9, 1e9);
    for (const double value : months) {
        const auto verdict = judge(parameter, value);
        if (verdict == Verdict::refused)
            throw Error(Cause::usage,
                        parameter.name + " " + shortest(value) + ", expected a number " +
                            parameter.allowed.text(),
                        flag);
        if (verdict == Verdict::fine) continue;
        terminal.warning(flag + ": " + shortest(value) + " is outside the usual " +
                         parameter.usual.text());
        break;
    }
    return months;
}

Sky sky_of(const Flags& flags, double ground_albedo, Terminal& terminal) {
    Sky sky(from_flag("--model", [&] { return clear_model_named(flags.model); }));
    if (waits_for_ground(sky)) sky[SkyParameter::ground_albedo].fill(ground_albedo);
    for (std::size_t i = 0; i < sky_parameter_count; ++i) {
        const auto id = static_cast<SkyParameter>(i);
        const auto& text = flags.sky[i];
        if (text.empty()) continue;
        const auto* parameter = method("clear_sky", flags.model).parameter(name_of(id));
        if (parameter == nullptr)
            throw Error(Cause::usage, flags.model + " has no " + std::string(name_of(id)),
                        flag_of(id),
                        "leave it out, or choose another --model: sunbudget tables methods lists "
                        "their parameters");
        sky[id] = months_of(text, *parameter, flag_of(id), terminal);
    }
    sky.diffuse = from_flag("--diffuse", [&] { return diffuse_model_named(flags.diffuse); });
    return sky;
}

SunPlace place_of(const Flags& flags, Terminal& terminal) {
    const auto parts = split(flags.at, ',');
    if (parts.size() != 2)
        throw Error(Cause::usage, "\"" + flags.at + "\" is no place", "--at",
                    "write LAT,LON in degrees, north and east positive: 52.5,13.4");
    SunPlace place;
    place.latitude_rad = rad_from_deg(number(parts[0], "--at, latitude", -90, 90));
    place.longitude_rad = rad_from_deg(number(parts[1], "--at, longitude", -180, 180));
    if (!flags.height.empty()) place.height_m = number(flags.height, "--height", -500, 9000);
    if (!flags.albedo.empty()) place.ground_albedo = number(flags.albedo, "--albedo", 0, 1);
    if (!flags.slope.empty()) place.slope_rad = rad_from_deg(number(flags.slope, "--slope", 0, 90));
    if (flags.azimuth.empty() && place.slope_rad > 0)
        throw Error(Cause::usage, "a slope without its direction", "--slope",
                    "add --azimuth, downslope and clockwise from north: 180 faces south");
    if (!flags.azimuth.empty())
        place.slope_azimuth_rad = rad_from_deg(number(flags.azimuth, "--azimuth", -360, 360));
    place.sky = sky_of(flags, place.ground_albedo, terminal);
    return place;
}

CivilDate date_of(const std::string& text, const char* flag) {
    const auto date = parse_date(text);
    if (!date) throw Error(Cause::usage, "\"" + text + "\" is no day", flag, "write 2025-06-21");
    return *date;
}

/// Seconds of "10 min", "1 h", "30 s", "1 d".
double step_of(const std::string& text) {
    const auto trimmed_text = std::string(trimmed(text));
    const auto digits = trimmed_text.find_first_not_of("0123456789.");
    const auto value = parse_number(trimmed_text.substr(0, digits));
    const auto unit = digits == std::string::npos
                          ? std::string()
                          : std::string(trimmed(trimmed_text.substr(digits)));
    const double unit_s = unit == "s"     ? 1
                          : unit == "min" ? 60
                          : unit == "h"   ? 3600
                          : unit == "d"   ? 86400
                                          : 0;
    const double seconds = value.value_or(0) * unit_s;
    if (!(seconds >= 1 && seconds <= seconds_per_day))
        throw Error(Cause::usage, "\"" + text + "\" is no step from 1 s to 1 d", "--step",
                    "write 10 min, 1 h or 1 d");
    return seconds;
}

double rounded(double value, double digits) {
    const double factor = std::pow(10, digits);
    return std::round(value * factor) / factor;
}

Json json_of(const SunMoment& m) {
    Json json{{"time", format_utc(m.utc)},
              {"elevation_deg", rounded(deg_from_rad(m.elevation_rad), 5)},
              {"elevation_refracted_deg", rounded(deg_from_rad(m.elevation_refracted_rad), 5)},
              {"azimuth_deg", rounded(deg_from_rad(m.azimuth_rad), 5)},
              {"zenith_deg", rounded(90 - deg_from_rad(m.elevation_rad), 5)},
              {"distance_au", rounded(m.distance_au, 7)}};
    json["air_mass"] = m.air_mass ? Json(rounded(*m.air_mass, 4)) : Json(nullptr);
    json["extraterrestrial_w_m2"] = rounded(m.extraterrestrial_w_m2, 2);
    json["beam_w_m2"] = rounded(m.beam_w_m2, 2);
    json["diffuse_w_m2"] = rounded(m.diffuse_w_m2, 2);
    json["global_w_m2"] = rounded(m.global_w_m2, 2);
    json["on_slope_w_m2"] = rounded(m.on_slope_w_m2, 2);
    return json;
}

Json time_or_null(const std::optional<UtcSeconds>& utc) {
    return utc ? Json(format_utc(*utc)) : Json(nullptr);
}

Json json_of(const SunDayRow& d) {
    constexpr double mj = 1e6;
    return {{"date", format_date(d.date)},
            {"sunrise", time_or_null(d.sunrise)},
            {"transit", time_or_null(d.transit)},
            {"sunset", time_or_null(d.sunset)},
            {"sunrise_apparent", time_or_null(d.sunrise_apparent)},
            {"sunset_apparent", time_or_null(d.sunset_apparent)},
            {"day_length_h", rounded(d.day_length_s / 3600, 4)},
            {"transit_elevation_deg", rounded(deg_from_rad(d.transit_elevation_rad), 4)},
            {"extraterrestrial_mj_m2", rounded(d.extraterrestrial_j_m2 / mj, 4)},
            {"direct_mj_m2", rounded(d.direct_j_m2 / mj, 4)},
            {"diffuse_mj_m2", rounded(d.diffuse_j_m2 / mj, 4)},
            {"global_mj_m2", rounded((d.direct_j_m2 + d.diffuse_j_m2) / mj, 4)},
            {"on_slope_mj_m2", rounded(d.on_slope_j_m2 / mj, 4)}};
}

std::string cell_of(const Json& value) {
    if (value.is_null()) return {};
    return value.is_string() ? value.get<std::string>() : value.dump();
}

std::string csv_of(const Json& rows) {
    std::string text;
    for (const auto& [key, value] : rows.front().items()) text += (text.empty() ? "" : ",") + key;
    text += "\n";
    for (const auto& row : rows) {
        std::string line;
        bool first = true;
        for (const auto& [key, value] : row.items()) {
            line += (first ? "" : ",") + cell_of(value);
            first = false;
        }
        text += line + "\n";
    }
    return text;
}

/// Columns as wide as they need to be; one row alone stands upright, a name a line.
std::string text_of_rows(const Json& rows) {
    std::string text;
    if (rows.size() == 1) {
        for (const auto& [key, value] : rows.front().items())
            text += fmt::format("{:<26} {}\n", key, value.is_null() ? "-" : cell_of(value));
        return text;
    }
    std::vector<std::vector<std::string>> lines(1);
    for (const auto& [key, value] : rows.front().items()) lines.front().push_back(key);
    for (const auto& row : rows) {
        lines.emplace_back();
        for (const auto& [key, value] : row.items())
            lines.back().push_back(value.is_null() ? "-" : cell_of(value));
    }
    for (const auto& line : lines) {
        for (std::size_t c = 0; c < line.size(); ++c) {
            std::size_t width = 0;
            for (const auto& other : lines) width = std::max(width, other[c].size());
            text += fmt::format("{}{:>{}}", c == 0 ? "" : "  ", line[c], width);
        }
        text += "\n";
    }
    return text;
}

UtcSeconds instant_of(const Flags& flags, const Zone& zone, double longitude_rad) {
    const auto written = parse_instant(flags.time);
    const auto utc = resolve(written, zone, longitude_rad);
    return zone.kind() == ZoneKind::solar_true && !written.offset_s ? utc_from_true_solar(utc)
                                                                    : utc;
}

/// The day that --time or --from names.
std::string plot_of(const Flags& flags, Terminal& terminal) {
    const auto place = place_of(flags, terminal);
    const auto zone = from_flag("--zone", [&] { return Zone::parse(flags.zone); });
    if (!flags.time.empty()) {
        const auto utc =
            from_flag("--time", [&] { return instant_of(flags, zone, place.longitude_rad); });
        return day_plot(place, zone, zone.local(utc, place.longitude_rad).date);
    }
    if (flags.from.empty() || !flags.to.empty() || !flags.step.empty())
        throw Error(Cause::usage, "a plot shows one day", "--plot",
                    "name it with --from DAY alone, or with --time T");
    return day_plot(place, zone, date_of(flags.from, "--from"));
}

Json rows_of(const Flags& flags, Terminal& terminal) {
    const auto place = place_of(flags, terminal);
    const auto zone = from_flag("--zone", [&] { return Zone::parse(flags.zone); });
    Json rows = Json::array();
    if (!flags.time.empty()) {
        const auto utc =
            from_flag("--time", [&] { return instant_of(flags, zone, place.longitude_rad); });
        rows.push_back(json_of(sun_moment(place, zone, utc)));
        return rows;
    }
    if (flags.from.empty())
        throw Error(Cause::usage, "no time", "command line",
                    "give --time T, or --from DAY with --to DAY and --step");
    const auto from = date_of(flags.from, "--from");
    const auto to = flags.to.empty() ? from : date_of(flags.to, "--to");
    if (to < from) throw Error(Cause::usage, flags.to + " is before " + flags.from, "--to");
    const double step_s = flags.step.empty() ? seconds_per_day : step_of(flags.step);
    constexpr double most_rows = 1e6;
    if (static_cast<double>(days_from_civil(to) - days_from_civil(from) + 1) * seconds_per_day /
            step_s >
        most_rows)
        throw Error(Cause::usage, "more than a million rows", "--step",
                    "take a longer step or fewer days");
    constexpr double light_step_s = 600;
    if (step_s == seconds_per_day)
        for (const auto& day : sun_days(place, zone, from, to, light_step_s))
            rows.push_back(json_of(day));
    else
        for (const auto& moment : sun_moments(place, zone, from, to, step_s))
            rows.push_back(json_of(moment));
    return rows;
}

/// The flags of the clear-sky model, made from its row like all else about it.
void add_sky_flags(CLI::App& command, Flags& flags) {
    command
        .add_option("--model", flags.model,
                    "Clear sky: " + joined(method_names("clear_sky"), ", ") + " [esra2000]")
        ->type_name("NAME");
    for (std::size_t i = 0; i < sky_parameter_count; ++i) {
        const auto id = static_cast<SkyParameter>(i);
        if (id == SkyParameter::ground_albedo) continue;  // --albedo
        std::vector<std::string> models;
        const Parameter* parameter = nullptr;
        for (const auto& model : method_names("clear_sky"))
            if (const auto* found = method("clear_sky", model).parameter(name_of(id))) {
                parameter = found;
                models.push_back(model);
            }
        command
            .add_option(flag_of(id), flags.sky[i],
                        joined(models, ", ") + ": " + parameter->text + " [" +
                            shortest(*parameter->default_value) +
                            (parameter->unit == "1" ? "]" : " " + parameter->unit + "]"))
            ->type_name("X");
    }
    command
        .add_option("--diffuse", flags.diffuse,
                    "How the sky's light is spread, for a slope: " +
                        joined(method_names("diffuse_sky"), ", ") + " [hay-davies1980]")
        ->type_name("NAME");
}

/// How a table is laid out: by a plan's weather, or by its own header.
WeatherFormat table_format(const std::string& file, const Flags& flags,
                           std::filesystem::path& table, SunPlace& place) {
    const std::filesystem::path path(file);
    if (path.extension() == ".yaml" || path.extension() == ".yml") {
        const auto plan = with_defaults(read_plan(path));
        if (!plan.weather || !plan.weather->table)
            throw Error(Cause::usage, "the plan names no weather table", file);
        table = (**plan.weather->table).file;
        if (plan.weather->station_elevation && flags.height.empty())
            place.height_m = (**plan.weather->station_elevation).m;
        auto format = weather_format(*plan.weather);
        constexpr int any_year = 2001;  // the sun of a date is nearly the same in all
        if (**plan.weather->years == Years::typical)
            format.typical = WeatherFormat::Years{any_year, any_year};
        return format;
    }
    table = path;
    WeatherFormat format;
    format.file = path.filename().string();
    format.zone = from_flag("--zone", [&] { return Zone::parse(flags.zone); });
    return format;
}

Json json_of(int month, const MonthTurbidity& found) {
    return {{"month", month},
            {"turbidity", rounded(found.turbidity, 2)},
            {"low", rounded(found.low, 2)},
            {"high", rounded(found.high, 2)},
            {"clear_hours", found.hours},
            {"clear_days", found.days}};
}

Json fitted_rows(const Flags& flags, Terminal& terminal) {
    auto place = place_of(flags, terminal);
    std::filesystem::path table;
    auto format = table_format(flags.fit, flags, table, place);
    format.longitude_rad = place.longitude_rad;
    const auto record = read_weather(weather_text(table, std::uint64_t{1} << 30), format);
    const auto fit = from_flag("--fit", [&] {
        return fit_turbidity(record, {place.latitude_rad, place.longitude_rad, place.height_m});
    });
    terminal.note(fmt::format(
        "{} of {} hours with the sun above 10 degrees are clear; turbidity fitted to the {}",
        fit.clear_hours, fit.hours, fit.to == FitTo::beam ? "beam" : "global light"));
    Json rows = Json::array();
    for (std::size_t m = 0; m < fit.months.size(); ++m)
        if (fit.months[m]) rows.push_back(json_of(static_cast<int>(m) + 1, *fit.months[m]));
    if (rows.empty())
        throw Error(Cause::input, "the record has no clear hours", flags.fit,
                    "check its place, height, time zone and stamps; a record of an hour or less a "
                    "row is needed");
    return rows;
}

}  // namespace

void add_sun(CLI::App& app) {
    auto flags = std::make_shared<Flags>();
    auto* command = app.add_subcommand(
        "sun",
        "Sun position and clear-sky light at a place: an instant, or a table of days or steps");
    command->add_option("--at", flags->at, "Place in degrees, north and east positive")
        ->type_name("LAT,LON")
        ->required();
    auto* time =
        command
            ->add_option("--time", flags->time,
                         "One instant: 2025-06-21T12:00-07:00, or without offset in --zone")
            ->type_name("T");
    command->add_option("--from", flags->from, "First day of a table")
        ->type_name("DAY")
        ->excludes(time);
    command->add_option("--to", flags->to, "Last day, included [that of --from]")
        ->type_name("DAY")
        ->excludes(time);
    command
        ->add_option(
            "--step", flags->step,
            "Step of the table: 10 min, 1 h, 1 d [1 d: a row a day with sunrise and totals]")
        ->type_name("STEP")
        ->excludes(time);
    command
        ->add_option("--zone", flags->zone,
                     "UTC, an offset, an IANA name, solar-mean or solar-true [UTC]")
        ->type_name("ZONE");
    command->add_option("--height", flags->height, "Height of the place in metres [0]")
        ->type_name("M");
    add_sky_flags(*command, *flags);
    command->add_option("--slope", flags->slope, "Slope of the ground in degrees, for on_slope [0]")
        ->type_name("DEG");
    command
        ->add_option("--azimuth", flags->azimuth,
                     "Where the slope faces, downslope, clockwise from north: 180 is south")
        ->type_name("DEG");
    command
        ->add_option("--albedo", flags->albedo,
                     "Of the ground around: what a slope sees of it, and what lights the sky where "
                     "the model counts that [0.2]")
        ->type_name("A");
    command
        ->add_option("--fit", flags->fit,
                     "Linke turbidity of each month from the clear hours of a record: a table "
                     "whose header names quantities and units "
                     "(global [W/m2]), or a plan (*.yaml) whose weather says how to read one")
        ->type_name("TABLE")
        ->excludes(time);
    auto* csv = command->add_flag("--csv", flags->csv, "As CSV");
    auto* json =
        command->add_flag("--json", flags->json, "As JSON: an array of objects, units in the names")
            ->excludes(csv);
    command
        ->add_flag("--plot", flags->plot,
                   "The day's curve in letters, for the day of --from or --time")
        ->excludes(csv)
        ->excludes(json);
    command->footer(
        "Times are printed in UTC. sunrise and sunset are of the sun's centre on a flat horizon, "
        "without refraction;\n"
        "sunrise_apparent and sunset_apparent of its upper limb with mean refraction, as almanacs "
        "have them.\n"
        "beam_w_m2 is on a plane facing the sun, direct_mj_m2 and the rest on the horizontal; "
        "on_slope is all light on\n"
        "a square metre of the slope. A clear-sky number may be one or twelve (1,2,..,12), one for "
        "each month.\n"
        "--fit prints the median of a month's clear hours; two thirds of them lie between low and "
        "high.\n"
        "Example: sunbudget sun --at 40,-105 --time 2025-06-21T12:00-07:00\n"
        "         sunbudget sun --at 40,-105 --from 2025-01-01 --to 2025-12-31 --csv\n"
        "         sunbudget sun --at 40,-105 --from 2025-12-21 --zone solar-true --slope 30 "
        "--azimuth 180 --plot\n"
        "         sunbudget sun --at 40.05,-88.37 --height 213 --fit station.csv");
    command->callback([flags] {
        Terminal terminal(false);
        if (flags->plot) return print_result(plot_of(*flags, terminal));
        const auto rows =
            flags->fit.empty() ? rows_of(*flags, terminal) : fitted_rows(*flags, terminal);
        const auto text = flags->format() == Format::json  ? rows.dump(2) + "\n"
                          : flags->format() == Format::csv ? csv_of(rows)
                                                           : text_of_rows(rows);
        print_result(text);
    });
}

}  // namespace sunbudget
