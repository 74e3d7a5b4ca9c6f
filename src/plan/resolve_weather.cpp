#include <fmt/format.h>

#include <fstream>
#include <system_error>

#include "resolve_parts.hpp"
#include "sunbudget/base/digest.hpp"
#include "sunbudget/base/units.hpp"
#include "sunbudget/plan/weather.hpp"

namespace sunbudget {

namespace {

template <class T, std::size_t N>
void take(const std::array<Maybe<T>, N>& given, std::array<std::optional<T>, N>& to) {
    for (std::size_t i = 0; i < N; ++i)
        if (given[i]) to[i] = **given[i];
}

Station station_of(const PlanWeather& weather, Run& run) {
    Station station;
    if (weather.station) {
        station.latitude_rad = rad_from_deg((**weather.station)[0]);
        station.longitude_rad = rad_from_deg((**weather.station)[1]);
    } else {
        const auto middle = middle_of(run.grid);
        station.latitude_rad = middle.latitude_rad;
        station.longitude_rad = middle.longitude_rad;
        run.assumptions.push_back(
            fmt::format("weather.station: the middle of the grid, {:.4f}, {:.4f}",
                        deg_from_rad(station.latitude_rad), deg_from_rad(station.longitude_rad)));
    }
    if (weather.station_elevation)
        station.height_m = (**weather.station_elevation).m;
    else if (!run.terrain)
        station.height_m = run.constant_height_m;
    else
        throw Error(Cause::usage, "nothing says how high the station stands", {},
                    "add weather.station_elevation, such as 213 m");
    return station;
}

std::vector<std::string> notes_of(const RunWeather& weather) {
    auto notes = weather.record.notes;
    const auto& record = weather.record;
    notes.push_back(fmt::format(
        "{} rows of {} s from {} to {}", record.intervals.size(), shortest(record.interval_s),
        format_utc(record.intervals.front().begin), format_utc(record.intervals.back().end)));
    if (!record.gaps.empty()) {
        double gap_s = 0;
        for (const auto& gap : record.gaps) gap_s += gap.end - gap.begin;
        notes.push_back(fmt::format("{} gaps between rows, {:.1f} h in all, the first from {}",
                                    record.gaps.size(), gap_s / 3600,
                                    format_utc(record.gaps.front().begin)));
    }
    for (std::size_t q = 0; q < weather_quantities; ++q)
        if (const auto missing = record.missing(static_cast<Weather>(q)); missing > 0)
            notes.push_back(fmt::format("{}: {} rows without a value", weather_names[q], missing));
    return notes;
}

}  // namespace

std::string weather_text(const std::filesystem::path& file, std::uint64_t most_bytes) {
    std::error_code failure;
    const auto size = std::filesystem::file_size(file, failure);
    if (failure)
        throw Error(Cause::input, "the weather table cannot be read: " + failure.message(),
                    file.string());
    if (size > most_bytes)
        throw Error(Cause::input,
                    fmt::format("the weather table has {}, and {} may be read",
                                human_bytes(static_cast<double>(size)),
                                human_bytes(static_cast<double>(most_bytes))),
                    file.string(),
                    "give the run more --memory, or keep only the rows and columns it needs");
    std::ifstream stream(file, std::ios::binary);
    std::string text(static_cast<std::size_t>(size), '\0');
    stream.read(text.data(), static_cast<std::streamsize>(size));
    if (!stream) throw Error(Cause::input, "the weather table cannot be read", file.string());
    return text;
}

WeatherFormat weather_format(const PlanWeather& weather) {
    WeatherFormat format;
    format.file = (**weather.table).file.filename().string();
    format.separator = **weather.separator;
    format.comment = **weather.comment;
    format.skip = **weather.skip;
    format.header = **weather.header == HeaderChoice::line;
    format.decimal_comma = **weather.decimal == DecimalSign::comma;
    format.good = **weather.good_flags;
    format.stamp = **weather.stamp;
    format.zone = (**weather.zone).zone;
    if (weather.missing) format.missing = **weather.missing;
    if (weather.time_form) format.time_form = **weather.time_form;
    if (weather.interval_s) format.interval_s = **weather.interval_s;
    if (weather.columns) {
        take(weather.columns->of_time, format.time_columns);
        take(weather.columns->of, format.columns);
    }
    if (weather.units) take(weather.units->of, format.units);
    if (weather.flags) take(weather.flags->of, format.flags);
    return format;
}

void resolve_weather(const Plan& plan, const ResolveOptions& options, Run& run,
                     RunProblems& problems) {
    if (!plan.weather || !plan.weather->table) return;
    const auto& weather = *plan.weather;
    const auto& file = (**weather.table).file;
    problems.attempt(weather.table->place, [&] {
        auto format = weather_format(weather);
        if (**weather.years == Years::typical && run.times)
            format.typical = {Zone().local(run.times->earliest()).date.year,
                              Zone().local(run.times->latest()).date.year};
        RunWeather found;
        found.station = station_of(weather, run);
        found.stop_at_gaps = **weather.gaps == Gaps::stop;
        format.longitude_rad = found.station.longitude_rad;
        found.record = read_weather(weather_text(file, options.memory_bytes / 4), format);
        if (found.record.intervals.empty())
            throw Error(Cause::input, "no row of the table counts", format.file,
                        "look at weather.years");
        if (weather.stamp->place.is_default && !found.record.days)
            run.assumptions.emplace_back(
                "weather.stamp: a row's time is the start of its interval");
        run.inputs.push_back(
            {"weather.table", file.filename().string(), input_digest(file), notes_of(found), 1});
        run.weather = std::make_shared<const RunWeather>(std::move(found));
    });
}

}  // namespace sunbudget
