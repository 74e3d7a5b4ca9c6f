#include <fmt/format.h>

#include <algorithm>
#include <array>
#include <cmath>

#include "names.hpp"
#include "resolve_parts.hpp"
#include "sunbudget/base/text.hpp"
#include "sunbudget/base/units.hpp"

namespace sunbudget {

namespace {

/// Lows of 870 hPa are the deepest on record, highs of 1085 hPa the highest: beyond is another height or unit.
constexpr double least_factor = 0.85, most_factor = 1.10;

bool at_sea_level(const PlanWeather& weather) {
    return weather.pressure_at && **weather.pressure_at == PressureAt::sea_level;
}

/// Height at which a pressure holds.
double height_of(const PlanWeather& weather, const Run& run) {
    if (at_sea_level(weather)) return 0;
    if (run.weather) return run.weather->station.height_m;
    if (weather.station_elevation) return (**weather.station_elevation).m;
    if (run.terrain)
        throw Error(Cause::usage, "nothing says at which height the pressure holds", {},
                    "add weather.station_elevation, such as 213 m, or pressure_at: sea-level");
    return run.constant_height_m;
}

/// Over the standard's; `row` is when a table has it.
double factor_of(double pressure_hpa, const PlanWeather& weather, double height_m,
                 std::optional<UtcSeconds> row = {}) {
    const double standard_hpa = standard_pressure_hpa(height_m);
    const double factor = pressure_hpa / standard_hpa;
    if (factor >= least_factor && factor <= most_factor) return factor;
    const auto when = row ? " in the row of " + format_utc(*row) : std::string();
    throw Error(
        Cause::input,
        fmt::format("a pressure of {:.1f} hPa{} is {:.0f} % of the standard's {:.1f} at {:.0f} m",
                    pressure_hpa, when, factor * 100, standard_hpa, height_m),
        {},
        at_sea_level(weather)
            ? "look at the unit; pressures as the station reads them need "
              "weather.pressure_at: station"
            : "look at the unit and at weather.station_elevation; pressures brought down "
              "to the sea need weather.pressure_at: sea-level");
}

AirPressure pressure_of_table(const WeatherRecord& record, const PlanWeather& weather,
                              double height_m) {
    const auto values = record.values(Weather::pressure);
    std::vector<AirPressure::Row> rows;
    for (std::size_t i = 0; i < values.size(); ++i)
        if (!std::isnan(values[i]))
            rows.push_back({record.intervals[i].begin,
                            factor_of(values[i], weather, height_m, record.intervals[i].begin)});
    if (rows.empty())
        throw Error(Cause::input, "no row of the weather table has a pressure", {},
                    "leave its column out of weather.columns");
    return AirPressure(std::move(rows));
}

AirPressure pressure_of_numbers(const Monthly& months, const PlanWeather& weather,
                                double height_m) {
    std::array<double, 12> factors{};
    std::ranges::transform(months, factors.begin(),
                           [&](double hpa) { return factor_of(hpa, weather, height_m); });
    return AirPressure(factors);
}

void tell_pressure(const PlanWeather& weather, double height_m, Run& run) {
    const double factor = run.sky.pressure->mean_factor();
    auto text = fmt::format(
        "weather.pressure: in the mean {:.1f} hPa at {}, {:.3f} of the standard's; that of the "
        "clear sky and of refraction is scaled alike at every height",
        factor * standard_pressure_hpa(height_m),
        at_sea_level(weather) ? std::string("sea level") : fmt::format("{:.0f} m", height_m),
        factor);
    if (!weather.pressure)
        if (const auto missing = run.weather->record.missing(Weather::pressure); missing > 0)
            text += fmt::format("; {} rows without a value take the last before them", missing);
    run.assumptions.push_back(std::move(text));
}

/// What a wind in numbers comes to in a month; nothing where the months differ and none is asked for.
std::optional<double> wind_of(const Monthly& months, const std::optional<TimePlan>& times) {
    if (times && times->instant)
        return months[static_cast<std::size_t>(times->zone.local(*times->instant).date.month - 1)];
    return std::ranges::count(months, months[0]) == 12 ? std::optional(months[0]) : std::nullopt;
}

/// The table's at the run's instant.
std::optional<double> wind_of_table(const Run& run) {
    if (!run.weather || !run.weather->record.has(Weather::wind) || !run.times ||
        !run.times->instant)
        return std::nullopt;
    const auto row = run.weather->record.at(*run.times->instant);
    if (!row || std::isnan(run.weather->record.values(Weather::wind)[*row])) return std::nullopt;
    return run.weather->record.values(Weather::wind)[*row];
}

}  // namespace

void resolve_pressure(const Plan& plan, Run& run, RunProblems& problems) {
    if (!plan.weather || !run.times) return;
    const auto& weather = *plan.weather;
    const bool in_table =
        !weather.pressure && run.weather && run.weather->record.has(Weather::pressure);
    if (!weather.pressure && !in_table) return;
    // Without layers of light longwave may still tell clouds by a table's light against the clear sky's.
    const bool for_clouds =
        run.weather && run.weather->record.has(Weather::global) && !is_daily(plan);
    if (!needs_light(plan) && !for_clouds) {
        if (weather.pressure)
            run.assumptions.emplace_back(
                "weather.pressure: not used, no layer is made from the sun's light");
        return;
    }
    problems.attempt(weather.pressure ? weather.pressure->place : weather.table->place, [&] {
        const double height_m = height_of(weather, run);
        run.sky.pressure = std::make_shared<const AirPressure>(
            in_table ? pressure_of_table(run.weather->record, weather, height_m)
                     : pressure_of_numbers(std::get<Monthly>((**weather.pressure).value), weather,
                                           height_m));
        if (!needs_light(plan)) return;
        if (in_table) run.use(Weather::pressure);
        tell_pressure(weather, height_m, run);
    });
}

Wind resolved_wind(const Plan& plan, Run& run) {
    const auto* given =
        plan.weather && plan.weather->wind ? &(**plan.weather->wind).value : nullptr;
    if (given != nullptr)
        if (const auto* word = std::get_if<WindCase>(given)) return static_cast<Wind>(*word);
    const auto speed_m_s =
        given != nullptr ? wind_of(std::get<Monthly>(*given), run.times) : wind_of_table(run);
    if (given != nullptr && !speed_m_s)
        throw Error(Cause::usage,
                    "the wind differs from month to month, and nothing says which month counts", {},
                    "give one wind, or time.at with a layer that needs it");
    if (!speed_m_s) {
        const bool column = run.weather && run.weather->record.has(Weather::wind);
        run.assumptions.push_back(std::string("weather.wind: ") +
                                  (column ? "the table has none at the run's instant: " : "") +
                                  "medium, 2 to 6 m/s");
        return Wind::medium;
    }
    if (given == nullptr) run.use(Weather::wind);
    const auto wind = wind_case(*speed_m_s);
    constexpr double beyond_m_s = 10;
    const auto text = fmt::format("weather.wind: {:.1f} m/s, {}", *speed_m_s,
                                  wind_names[static_cast<std::size_t>(wind)]);
    if (*speed_m_s > beyond_m_s)
        run.warnings.push_back(text + ": ASTM E1980 knows winds of up to 10 m/s");
    else
        run.assumptions.push_back(text);
    return wind;
}

void tell_unused_columns(Run& run) {
    if (!run.weather) return;
    std::vector<std::string> names;
    for (std::size_t q = 0; q < weather_quantities; ++q)
        if (run.weather->record.has(static_cast<Weather>(q)) && !run.columns_used[q])
            names.emplace_back(weather_names[q]);
    if (names.empty()) return;
    const bool one = names.size() == 1;
    run.assumptions.push_back("weather.table: " + joined(names, ", ") + (one ? " is" : " are") +
                              " checked, but nothing in this run is made from " +
                              (one ? "it" : "them"));
}

}  // namespace sunbudget
