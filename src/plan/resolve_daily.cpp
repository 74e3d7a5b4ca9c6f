#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <numeric>

#include "resolve_parts.hpp"
#include "sunbudget/base/text.hpp"
#include "sunbudget/model/daily_air.hpp"
#include "sunbudget/physics/fao56.hpp"
#include "sunbudget/physics/fao56_balance.hpp"

namespace sunbudget {

namespace {

constexpr double zero_celsius_k = 273.15;
constexpr double hpa_per_kpa = 10;

/// The net longwave of whole days, from numbers or a table.
class DailyResolver {
  public:
    DailyResolver(const Plan& plan, Run& run) : plan_(plan), weather_(*plan.weather), run_(run) {}

    Longwave resolved(const std::string& name) {
        auto& daily = found_.daily.emplace();
        daily.method = static_cast<DailyMethod>(std::ranges::find(names_, name) - names_.begin());
        for (std::size_t month = 0; month < 12; ++month)
            found_.lapse_k_m[month] =
                weather_.lapse ? (**weather_.lapse).k_km[month] / 1000 : 0.0065;
        place();
        light();
        daily.days = run_.weather ? days_of_table() : days_of_numbers();
        run_.methods.push_back(&method("longwave_daily", name));
        run_.assumptions.push_back(fmt::format(
            "longwave {}: net of whole days from the highest and lowest temperature, vapour "
            "pressure ({}) and sunlight over "
            "a clear day's ({}); no sky view, emissivity or surface temperature is in it",
            name, humidity_from_, sunlight_from_));
        for (const auto* key : {"surface_temperature", "surface.emissivity"}) say_unused(key, name);
        if (run_.terrain)
            run_.warnings.push_back("longwave " + name +
                                    " is for level open ground: of the terrain only the height "
                                    "counts, not its slopes and horizons");
        return std::move(found_);
    }

  private:
    void place();
    void light();
    void say_unused(const std::string& key, const std::string& name);
    [[nodiscard]] double relative_sunlight(const CivilDate& date) const;
    [[nodiscard]] std::vector<DailyAir> days_of_table();
    [[nodiscard]] std::vector<DailyAir> days_of_numbers();
    [[nodiscard]] double vapour_kpa(std::size_t month, double min_celsius,
                                    double max_celsius) const;

    const Plan& plan_;
    const PlanWeather& weather_;
    Run& run_;
    std::vector<std::string> names_ = method_names("longwave_daily");
    Longwave found_;
    Station station_;
    std::string humidity_from_, sunlight_from_;
};

void DailyResolver::place() {
    if (run_.weather) {
        station_ = run_.weather->station;
    } else {
        const auto middle = middle_of(run_.grid);
        station_ = {middle.latitude_rad, middle.longitude_rad, run_.constant_height_m};
        if (weather_.station_elevation)
            station_.height_m = (**weather_.station_elevation).m;
        else if (run_.terrain)
            throw Error(Cause::usage, "nothing says at which height the air's numbers hold", {},
                        "add weather.station_elevation, such as 213 m");
    }
    found_.height_m = station_.height_m;
}

/// Where the sunlight comes from when no table tells it.
void DailyResolver::light() {
    if (plan_.sky.sunshine) {
        sunlight_from_ = "sky.sunshine";
    } else if (plan_.sky.cloud && std::holds_alternative<Monthly>(**plan_.sky.cloud)) {
        sunlight_from_ = "sky.cloud";
    } else {
        sunlight_from_ = "none given, every day counts as clear";
        if (plan_.sky.cloud || plan_.sky.index)
            throw Error(Cause::usage,
                        "one day has one sky here, and sky." +
                            std::string(plan_.sky.cloud ? "cloud" : "index") + " is of rasters",
                        {},
                        "give sky.cloud as numbers, sky.sunshine, or a weather table with global");
    }
}

double DailyResolver::relative_sunlight(const CivilDate& date) const {
    const auto month = static_cast<std::size_t>(date.month - 1);
    if (plan_.sky.sunshine) {
        const auto [a, b] = plan_.sky.angstrom ? **plan_.sky.angstrom : std::array{0.25, 0.50};
        const double longest_h = fao56_daylight_h(day_of_year(date), station_.latitude_rad);
        return (a + b * std::min(1.0, (**plan_.sky.sunshine)[month] / longest_h)) /
               fao56_clear_share(station_.height_m);
    }
    return plan_.sky.cloud ? 1 - (1 - overcast_in(plan_, date.month)) *
                                     std::get<Monthly>(**plan_.sky.cloud)[month]
                           : 1;
}

std::vector<DailyAir> DailyResolver::days_of_table() {
    auto record = daily_air(run_.weather->record, station_, *run_.times,
                            [this](const CivilDate& date) { return relative_sunlight(date); });
    if (record.days.empty())
        throw Error(Cause::input,
                    "no day of the run has all that the method needs in the weather table: "
                    "temperatures, humidity and what tells its sunlight",
                    {}, "choose days that the table covers, or look at weather.columns");
    if (record.left_out > 0)
        run_.assumptions.push_back(fmt::format(
            "longwave: {} of {} days lack something in the table and do not count; periods with "
            "less than {:.0f} % of their "
            "days have no value",
            record.left_out, record.left_out + record.days.size(), air_band_needs * 100));
    for (std::size_t q = 0; q < weather_quantities; ++q)
        if (record.used[q]) run_.columns_used[q] = true;
    humidity_from_ = record.humidity_from;
    if (!record.sunlight_from.empty()) sunlight_from_ = record.sunlight_from;
    return std::move(record.days);
}

double DailyResolver::vapour_kpa(std::size_t month, double min_celsius, double max_celsius) const {
    const auto number = [&](const auto& given) {
        return std::get<Monthly>((**given).value)[month];
    };
    if (weather_.dew_point)
        return fao56_saturation_kpa(number(weather_.dew_point) - zero_celsius_k);
    if (weather_.vapour_pressure) return number(weather_.vapour_pressure) / hpa_per_kpa;
    return number(weather_.relative_humidity) *
           std::midpoint(fao56_saturation_kpa(min_celsius), fao56_saturation_kpa(max_celsius));
}

std::vector<DailyAir> DailyResolver::days_of_numbers() {
    const auto refuse_raster = [&](const auto& given, const char* name) {
        if (!given) return;
        if (!std::holds_alternative<Monthly>((**given).value))
            throw Error(Cause::usage,
                        std::string("weather.") + name +
                            " is a raster, and the method takes numbers or a table",
                        {}, "give one number, or twelve");
        humidity_from_ = name;
    };
    refuse_raster(weather_.dew_point, "dew_point");
    refuse_raster(weather_.vapour_pressure, "vapour_pressure");
    refuse_raster(weather_.relative_humidity, "relative_humidity");
    const auto& highest = std::get<Monthly>((**weather_.air_temperature_max).value);
    const auto& lowest = std::get<Monthly>((**weather_.air_temperature_min).value);
    std::vector<DailyAir> days;
    for (const auto& date : dates_of(*run_.times)) {
        const auto month = static_cast<std::size_t>(date.month - 1);
        DailyAir day{date, lowest[month] - zero_celsius_k, highest[month] - zero_celsius_k, 0,
                     relative_sunlight(date)};
        day.vapour_kpa = vapour_kpa(month, day.min_celsius, day.max_celsius);
        if (!std::isnan(day.relative_sunlight)) days.push_back(day);
    }
    return days;
}

void DailyResolver::say_unused(const std::string& key, const std::string& name) {
    const bool given = key == "surface_temperature" ? plan_.surface_temperature.has_value()
                                                    : plan_.surface.emissivity.has_value();
    if (given) run_.assumptions.push_back(key + ": not used, longwave " + name + " knows none");
}

}  // namespace

bool is_daily(const Plan& plan) {
    const auto names = method_names("longwave_daily");
    return plan.longwave.method && std::ranges::find(names, **plan.longwave.method) != names.end();
}

Longwave daily_longwave(const Plan& plan, Run& run) {
    return DailyResolver(plan, run).resolved(**plan.longwave.method);
}

}  // namespace sunbudget
