#include "sun_flags.hpp"

#include <algorithm>

#include "sunbudget/base/text.hpp"
#include "sunbudget/base/units.hpp"
#include "sunbudget/plan/plan.hpp"
#include "sunbudget/plan/weather.hpp"
#include "sunbudget/tables/methods.hpp"

namespace sunbudget {

namespace {

double number(const std::string& text, const char* flag, double low, double high) {
    const auto value = parse_number(text);
    if (!value || *value < low || *value > high)
        throw Error(Cause::usage,
                    "\"" + text + "\" is no number from " + shortest(low) + " to " + shortest(high),
                    flag);
    return *value;
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

Sky sky_of(const SunFlags& flags, double ground_albedo, Terminal& terminal) {
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

/// Seconds of "10 min", "1 h", "30 s", "1 d".
double seconds_of(const std::string& text) {
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

}  // namespace

std::string flag_of(SkyParameter parameter) {
    auto name = std::string(name_of(parameter));
    std::replace(name.begin(), name.end(), '_', '-');
    return "--" + name;
}

SunPlace place_of(const SunFlags& flags, Terminal& terminal) {
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

Zone zone_of(const SunFlags& flags) {
    return from_flag("--zone", [&] { return Zone::parse(flags.zone); });
}

UtcSeconds instant_of(const SunFlags& flags, const Zone& zone, double longitude_rad) {
    return from_flag("--time", [&] {
        const auto written = parse_instant(flags.time);
        const auto utc = resolve(written, zone, longitude_rad);
        return zone.kind() == ZoneKind::solar_true && !written.offset_s ? utc_from_true_solar(utc)
                                                                        : utc;
    });
}

CivilDate date_of(const std::string& text, const char* flag) {
    const auto date = parse_date(text);
    if (!date) throw Error(Cause::usage, "\"" + text + "\" is no day", flag, "write 2025-06-21");
    return *date;
}

double step_of(const SunFlags& flags) {
    return flags.step.empty() ? seconds_per_day : seconds_of(flags.step);
}

WeatherFormat table_format(const SunFlags& flags, std::filesystem::path& table, SunPlace& place) {
    const std::filesystem::path path(flags.fit);
    if (path.extension() == ".yaml" || path.extension() == ".yml") {
        const auto plan = with_defaults(read_plan(path));
        if (!plan.weather || !plan.weather->table)
            throw Error(Cause::usage, "the plan names no weather table", flags.fit);
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
    format.zone = zone_of(flags);
    return format;
}

}  // namespace sunbudget
