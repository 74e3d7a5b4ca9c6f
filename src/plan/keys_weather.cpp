#include "keys_parts.hpp"
#include "names.hpp"

namespace sunbudget {

using namespace forms;

namespace {

/// A number, one for each month, or a raster in a unit that is named.
std::vector<Form> field_forms(const Form& one, const std::vector<std::string>& units) {
    std::vector<Key> keys{{"raster",
                           {of(ValueKind::raster)},
                           "a value for each pixel, taken as it is there",
                           {},
                           true}};
    if (!units.empty()) keys.push_back({"unit", {choice(units)}, "of the raster", {}, true});
    keys.push_back(
        {"scale", {number_above(0)}, "value = stored value * scale + offset, in that unit", {}});
    keys.push_back({"offset", {number()}, "see scale", {}});
    return {one, list(one, 12, 12), map(std::move(keys))};
}

std::vector<Key> one_key_a_quantity(const std::vector<Form>& forms, const std::string& doc) {
    std::vector<Key> keys;
    for (const auto* name : weather_names) keys.push_back({name, forms, doc});
    return keys;
}

Form weather_columns_form() {
    const std::vector<Form> column{of(ValueKind::text), integer(1, 10000)};
    std::vector<Key> keys;
    for (const auto* name : weather_time_names)
        keys.push_back({name, column,
                        std::string(name) == "time" ? "instants, or days" : "a part of the time"});
    const auto quantities =
        one_key_a_quantity(column, "by name in the header, or by number from 1");
    keys.insert(keys.end(), quantities.begin(), quantities.end());
    return map(std::move(keys));
}

Form weather_units_form() {
    std::vector<Key> keys;
    for (std::size_t i = 0; i < weather_quantities; ++i)
        keys.push_back({weather_names[i],
                        {choice(weather_units(static_cast<Weather>(i)))},
                        "of the column; energies are sums over the interval"});
    return map(std::move(keys));
}

}  // namespace

// Steps from a minute to a day; heights as of the terrain.
Form weather_form() {
    std::vector<Rule> rules;
    for (const auto* key :
         {"columns", "units", "flags", "good_flags", "missing", "separator", "decimal", "header",
          "skip", "comment", "time_form", "stamp", "interval", "zone", "years", "gaps", "station"})
        rules.push_back(needs(key, {"table"}));
    for (const auto* key : {"air_temperature", "air_temperature_max", "air_temperature_min",
                            "relative_humidity", "dew_point", "vapour_pressure"})
        rules.push_back(at_most_one({"table", key}));
    rules.push_back(needs("air_temperature_max", {"air_temperature_min"}));
    rules.push_back(needs("air_temperature_min", {"air_temperature_max"}));
    rules.push_back(at_most_one({"relative_humidity", "dew_point"}));
    rules.push_back(at_most_one({"relative_humidity", "vapour_pressure"}));
    rules.push_back(at_most_one({"dew_point", "vapour_pressure"}));
    return map(
        {{"table", {of(ValueKind::path)}, "a station's record, rows in order of time"},
         {"columns",
          {weather_columns_form()},
          "which columns to take; default: those with the names of quantities"},
         {"units",
          {weather_units_form()},
          "of the columns; default: what stands in brackets in the header, as in air_temperature "
          "[degC]"},
         {"flags",
          {map(one_key_a_quantity({of(ValueKind::text), integer(1, 10000)},
                                  "the column with this quantity's quality"))},
          "columns of quality numbers: values with other ones than good_flags are missing"},
         {"good_flags", {number(), list(number(), 1)}, "flags of values that count", "0"},
         {"missing",
          {number(), list(number(), 1)},
          "numbers that mean no value, such as -9999; empty cells and NaN always do"},
         {"separator", {choice(separator_names)}, "between cells", "auto"},
         {"decimal", {choice(decimal_names)}, "sign in numbers", "point"},
         {"header", {choice(header_names)}, "none: columns go by their numbers", "line"},
         {"skip", {integer(0, 10000)}, "lines in front that are left out", "0"},
         {"comment", {of(ValueKind::text)}, "lines that begin so are left out", "#"},
         {"time_form",
          {of(ValueKind::text)},
          "how times are written, such as DD/MM/YYYY hh:mm; default: 2025-06-21T12:00 or "
          "202506211200"},
         {"stamp", {choice(stamp_names)}, "what a row's time is of its interval", "start"},
         {"interval",
          {duration(60, 86400)},
          "length of a row's interval; default: as the rows are apart"},
         {"zone",
          {of(ValueKind::zone)},
          "of the rows' times: UTC, an offset, an IANA name, solar-mean or solar-true",
          "UTC"},
         {"years",
          {choice(years_names)},
          "typical: the rows stand for every year, whatever theirs is",
          "own"},
         {"gaps",
          {choice(gaps_names)},
          "report: a day needs 90 % of its light and a month 80 % of its days, else no data; "
          "smaller gaps take the day's or month's mean; stop: a sunlit gap stops the run",
          "report"},
         {"station",
          {list(number(-180, 180), 2, 2)},
          "[latitude, longitude] in degrees; default: the middle of the grid"},
         {"station_elevation",
          {length(-500, 9000)},
          "height above sea level at which table or numbers hold; default: that of the ground "
          "where it is one height, numbers hold at every height"},
         {"air_temperature", field_forms(temperature(), {"degC", "K"}),
          "without a table: one temperature, one per month, or {raster, unit, scale, offset}"},
         {"air_temperature_max",
          {temperature(), list(temperature(), 12, 12)},
          "the day's highest, for longwave.method fao56 and asce2005 without a table: one, or one "
          "per month"},
         {"air_temperature_min",
          {temperature(), list(temperature(), 12, 12)},
          "the day's lowest, likewise"},
         {"relative_humidity", field_forms(number(0, 1), {}), "as air_temperature, from 0 to 1"},
         {"dew_point", field_forms(temperature(), {"degC", "K"}), "as air_temperature"},
         {"vapour_pressure",
          field_forms(quantity(ValueKind::pressure, 0, 100), {"hPa", "kPa", "Pa"}),
          "as air_temperature"},
         {"lapse",
          {quantity(ValueKind::lapse, -50, 50), list(quantity(ValueKind::lapse, -50, 50), 12, 12)},
          "how much colder the air is for each km up; negative in an inversion",
          "6.5 K/km"},
         {"wind",
          {choice(wind_names), quantity(ValueKind::speed, 0, 110),
           list(quantity(ValueKind::speed, 0, 110), 12, 12)},
          "below 2, 2 to 6, 6 to 10 m/s, or a speed: for a balanced surface temperature and the "
          "solar reflectance index; default: the table's wind at the instant, else medium"},
         {"pressure",
          {quantity(ValueKind::pressure, 300, 1100),
           list(quantity(ValueKind::pressure, 300, 1100), 12, 12)},
          "of the air, for the clear sky and for refraction: one, or one per month; default: the "
          "table's column, else the standard atmosphere's"},
         {"pressure_at",
          {choice(pressure_at_names)},
          "where the pressure holds: at the station, or brought down to the sea; default: "
          "station"}},
        std::move(rules));
}

}  // namespace sunbudget
