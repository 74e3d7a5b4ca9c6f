#include "sun_text.hpp"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <nlohmann/json.hpp>

#include "sun_plot.hpp"
#include "sunbudget/base/units.hpp"
#include "sunbudget/model/turbidity_fit.hpp"
#include "sunbudget/plan/weather.hpp"

namespace sunbudget {

namespace {

using Json = nlohmann::ordered_json;

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

Json json_of(int month, const MonthTurbidity& found) {
    return {{"month", month},
            {"turbidity", rounded(found.turbidity, 2)},
            {"low", rounded(found.low, 2)},
            {"high", rounded(found.high, 2)},
            {"clear_hours", found.hours},
            {"clear_days", found.days}};
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

/// The day that --time or --from names.
std::string plot_of(const SunFlags& flags, Terminal& terminal) {
    const auto place = place_of(flags, terminal);
    const auto zone = zone_of(flags);
    if (!flags.time.empty()) {
        const auto utc = instant_of(flags, zone, place.longitude_rad);
        return day_plot(place, zone, zone.local(utc, place.longitude_rad).date);
    }
    if (flags.from.empty() || !flags.to.empty() || !flags.step.empty())
        throw Error(Cause::usage, "a plot shows one day", "--plot",
                    "name it with --from DAY alone, or with --time T");
    return day_plot(place, zone, date_of(flags.from, "--from"));
}

/// A table of days, or of steps in them.
Json rows_of_days(const SunFlags& flags, const SunPlace& place, const Zone& zone) {
    if (flags.from.empty())
        throw Error(Cause::usage, "no time", "command line",
                    "give --time T, or --from DAY with --to DAY and --step");
    const auto from = date_of(flags.from, "--from");
    const auto to = flags.to.empty() ? from : date_of(flags.to, "--to");
    if (to < from) throw Error(Cause::usage, flags.to + " is before " + flags.from, "--to");
    const double step_s = step_of(flags);
    constexpr double most_rows = 1e6;
    if (static_cast<double>(days_from_civil(to) - days_from_civil(from) + 1) * seconds_per_day /
            step_s >
        most_rows)
        throw Error(Cause::usage, "more than a million rows", "--step",
                    "take a longer step or fewer days");
    Json rows = Json::array();
    constexpr double light_step_s = 600;
    if (step_s == seconds_per_day)
        for (const auto& day : sun_days(place, zone, from, to, light_step_s))
            rows.push_back(json_of(day));
    else
        for (const auto& moment : sun_moments(place, zone, from, to, step_s))
            rows.push_back(json_of(moment));
    return rows;
}

Json rows_of(const SunFlags& flags, Terminal& terminal) {
    const auto place = place_of(flags, terminal);
    const auto zone = zone_of(flags);
    if (flags.time.empty()) return rows_of_days(flags, place, zone);
    const auto utc = instant_of(flags, zone, place.longitude_rad);
    return Json::array({json_of(sun_moment(place, zone, utc))});
}

Json fitted_rows(const SunFlags& flags, Terminal& terminal) {
    auto place = place_of(flags, terminal);
    std::filesystem::path table;
    auto format = table_format(flags, table, place);
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

std::string sun_text(const SunFlags& flags, Terminal& terminal) {
    if (flags.plot) return plot_of(flags, terminal);
    const auto rows = flags.fit.empty() ? rows_of(flags, terminal) : fitted_rows(flags, terminal);
    if (flags.csv) return csv_of(rows);
    return flags.json ? rows.dump(2) + "\n" : text_of_rows(rows);
}

}  // namespace sunbudget
