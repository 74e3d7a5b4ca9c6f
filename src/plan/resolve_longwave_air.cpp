#include <fmt/format.h>

#include <algorithm>
#include <cmath>

#include "heat_parts.hpp"
#include "sunbudget/model/air_record.hpp"
#include "sunbudget/physics/humidity.hpp"

namespace sunbudget {

namespace {

/// The air that the sky's heat radiation is made from.
class AirResolver : HeatPart {
  public:
    using HeatPart::HeatPart;
    void numbers(const PlanWeather& weather, Longwave& found);
    void table(Longwave& found);

  private:
    void humidity(const PlanWeather& weather, Longwave& found);
    [[nodiscard]] AirWants wanted() const;
    void check_columns(const Longwave& found) const;
    void use_columns(const AirRecord& air, const AirWants& wants);
    void tell_clouds(const AirRecord& air, const AirWants& wants);
};

/// Air in numbers or rasters: one moment for each month.
void AirResolver::numbers(const PlanWeather& weather, Longwave& found) {
    if (weather.station_elevation) found.height_m = (**weather.station_elevation).m;
    if (weather.lapse)
        for (std::size_t month = 0; month < 12; ++month)
            found.lapse_k_m[month] = (**weather.lapse).k_km[month] / 1000;
    if (const auto* months = std::get_if<Monthly>(&(**weather.air_temperature).value))
        for (std::size_t month = 0; month < 12; ++month)
            found.months[month].temperature_k = (*months)[month];
    else
        problems_.attempt(weather.air_temperature->place, [&] {
            found.temperature_k =
                opened("weather.air_temperature",
                       std::get<PlanFieldRaster>((**weather.air_temperature).value));
        });
    humidity(weather, found);
    if (run_.terrain && !found.height_m && !found.by_pixel())
        run_.assumptions.emplace_back(
            "weather.station_elevation: none, the air's numbers hold at every height");
}

void AirResolver::humidity(const PlanWeather& weather, Longwave& found) {
    const auto take = [&](const auto& given, HumidityAs as, const std::string& role,
                          auto&& to_hpa) {
        if (!given) return;
        found.humidity_as = as;
        if (const auto* months = std::get_if<Monthly>(&(**given).value)) {
            found.humidity_numbers = *months;
            for (std::size_t m = 0; m < 12; ++m)
                found.months[m].vapour_pressure_hpa =
                    to_hpa((*months)[m], found.months[m].temperature_k);
        } else {
            problems_.attempt(given->place, [&] {
                found.humidity = opened(role, std::get<PlanFieldRaster>((**given).value));
            });
        }
    };
    take(
        weather.relative_humidity, HumidityAs::relative, "weather.relative_humidity",
        [](double share, double kelvin) { return share * saturation_vapour_pressure_hpa(kelvin); });
    take(weather.dew_point, HumidityAs::dew_point, "weather.dew_point",
         [](double dew_k, double) { return saturation_vapour_pressure_hpa(dew_k); });
    take(weather.vapour_pressure, HumidityAs::vapour_pressure, "weather.vapour_pressure",
         [](double hpa, double) { return hpa; });
}

AirWants AirResolver::wanted() const {
    AirWants wants;
    wants.measured =
        !plan_.longwave.down && (!plan_.longwave.method || **plan_.longwave.method == "measured");
    wants.cloud = !plan_.longwave.cloud && !plan_.longwave.down;
    if (plan_.longwave.cloud_method)
        wants.law = chosen<LongwaveCloud>("longwave_cloud", **plan_.longwave.cloud_method);
    wants.surface = plan_.surface_temperature &&
                    std::holds_alternative<SurfaceTable>(plan_.surface_temperature->value.value);
    return wants;
}

void AirResolver::check_columns(const Longwave& found) const {
    const auto& weather = *run_.weather;
    if (plan_.longwave.method && **plan_.longwave.method == "measured" &&
        !weather.record.has(Weather::longwave_down))
        throw Error(Cause::input, "the weather table has no longwave_down", {},
                    "name its column in weather.columns, or choose a formula");
    const bool needs_air_itself = run_.terrain || run_.heat.surface == SurfaceFrom::balance ||
                                  !std::isnan(found.surface_above_air_k);
    if (needs_air_itself && !weather.record.has(Weather::air_temperature))
        throw Error(Cause::input, "the weather table has no air_temperature", {},
                    "name its column in weather.columns");
}

/// Which columns the longwave is made from: a humidity stands in where one before it has no value, and the formula
/// with its clouds where the measured longwave has none.
void AirResolver::use_columns(const AirRecord& air, const AirWants& wants) {
    const auto& record = run_.weather->record;
    const auto use = [&](Weather quantity) {
        if (record.has(quantity)) run_.use(quantity);
    };
    const auto empty = [&](Weather quantity, std::size_t row) {
        return !record.has(quantity) || std::isnan(record.values(quantity)[row]);
    };
    use(Weather::air_temperature);
    for (std::size_t row = 0; row < record.intervals.size(); ++row)
        for (const auto humidity :
             {Weather::vapour_pressure, Weather::dew_point, Weather::relative_humidity})
            if (!empty(humidity, row)) {
                use(humidity);
                break;
            }
    if (wants.surface) use(Weather::surface_temperature);
    const bool measured = air.cloud_from == "longwave_down";
    if (measured) use(Weather::longwave_down);
    if (!wants.cloud || (measured && record.missing(Weather::longwave_down) == 0)) return;
    if (record.has(Weather::cloud)) return use(Weather::cloud);
    if (!record.has(Weather::global)) return;
    use(Weather::global);
    if (!plan_.weather->pressure) use(Weather::pressure);  // of the clear sky it is held against
}

void AirResolver::table(Longwave& found) {
    const auto& weather = *run_.weather;
    found.height_m = weather.station.height_m;
    for (std::size_t month = 0; month < 12; ++month)
        found.lapse_k_m[month] =
            plan_.weather->lapse ? (**plan_.weather->lapse).k_km[month] / 1000 : 0.0065;
    const auto wants = wanted();
    check_columns(found);
    auto air = air_record(weather.record, weather.station, run_.sky, wants);
    use_columns(air, wants);
    found.rows = std::move(air.rows);
    if (found.rows.empty())
        throw Error(Cause::input,
                    "no row of the weather table has all that longwave needs: temperature, "
                    "humidity and what else the plan takes from it");
    tell_clouds(air, wants);
    if (air.left_out > 0)
        run_.assumptions.push_back(
            fmt::format("longwave: {} of {} rows of the table lack something and are left out; "
                        "days covered less than {:.0f} % do not "
                        "count, periods with less than {:.0f} % of their days have no value",
                        air.left_out, weather.record.intervals.size(), air_day_needs * 100,
                        air_band_needs * 100));
}

/// Where the clouds are from, among methods and assumptions.
void AirResolver::tell_clouds(const AirRecord& air, const AirWants& wants) {
    const auto& weather = *run_.weather;
    if (air.cloud_from.empty() && wants.cloud)
        run_.assumptions.emplace_back(
            "longwave.cloud: the table tells no cloud, the sky counts as clear");
    if (air.cloud_from == "longwave_down")
        run_.assumptions.emplace_back(
            "longwave: as measured, at other heights in proportion to the clear sky's");
    if (air.cloud_from == "cloud")
        run_.methods.push_back(&method(
            "longwave_cloud", method_names("longwave_cloud")[static_cast<std::size_t>(wants.law)]));
    if (air.cloud_from == "global") {
        run_.methods.push_back(&method("longwave_cloud", "crawford-duchon1999"));
        if (air.night_rows > 0)
            run_.assumptions.push_back(
                fmt::format("longwave: cloud of {} of {} rows (sun below 10 degrees, or no "
                            "sunlight measured) interpolated between those "
                            "that tell it, {} of them before the first or after the last",
                            air.night_rows, weather.record.intervals.size(), air.first_rows));
    }
}

}  // namespace

void resolve_longwave_air(const Plan& plan, const ResolveOptions& options, Run& run,
                          RunProblems& problems, Longwave& found) {
    AirResolver air(plan, options, run, problems);
    if (run.weather)
        air.table(found);
    else if (plan.weather->air_temperature)
        air.numbers(*plan.weather, found);
}

}  // namespace sunbudget
