#include <algorithm>
#include <array>
#include <span>

#include "weather_table.hpp"

namespace sunbudget {

namespace {

struct Row {
    std::string_view name;  ///< as help names it
    double factor;
    double offset = 0;
    bool energy = false;
    std::string_view also = {};  ///< other spellings, with blanks on both sides
};

constexpr std::array irradiance{Row{"W/m2", 1, 0, false, " W/m^2 Wm-2 W/m\xc2\xb2 w/m2 "},
                                Row{"kW/m2", 1000},
                                Row{"J/m2", 1, 0, true, " J/m^2 Jm-2 "},
                                Row{"kJ/m2", 1e3, 0, true, " kJ/m^2 "},
                                Row{"MJ/m2", 1e6, 0, true, " MJ/m^2 MJm-2 "},
                                Row{"J/cm2", 1e4, 0, true, " J/cm^2 "},
                                Row{"Wh/m2", 3600, 0, true, " Wh/m^2 "},
                                Row{"kWh/m2", 3.6e6, 0, true, " kWh/m^2 "}};
// 0 degC is 273.15 K by definition; a Fahrenheit degree is 5/9 K, 32 degF the ice point.
constexpr std::array temperature{Row{"degC", 1, 273.15, false,
                                     " C celsius \xc2\xb0"
                                     "C deg_C "},
                                 Row{"K", 1, 0, false, " kelvin "},
                                 Row{"degF", 5.0 / 9, 273.15 - 32 * 5.0 / 9, false,
                                     " F \xc2\xb0"
                                     "F "}};
constexpr std::array share{Row{"%", 0.01, 0, false, " percent "},
                           Row{"1", 1, 0, false, " fraction "}};
constexpr std::array cloud_share{Row{"okta", 0.125, 0, false, " oktas "}, Row{"tenths", 0.1},
                                 Row{"%", 0.01, 0, false, " percent "},
                                 Row{"1", 1, 0, false, " fraction "}};
constexpr std::array pressure{Row{"hPa", 1, 0, false, " mbar mb "}, Row{"kPa", 10},
                              Row{"Pa", 0.01}};
constexpr std::array speed{Row{"m/s", 1, 0, false, " ms-1 "}, Row{"km/h", 1 / 3.6},
                           Row{"knots", 1852.0 / 3600, 0, false, " kn kt "}, Row{"mph", 0.44704}};

std::span<const Row> rows_of(Weather quantity) {
    switch (quantity) {
        case Weather::global:
        case Weather::beam:
        case Weather::diffuse:
        case Weather::longwave_down:
            return irradiance;
        case Weather::cloud:
            return cloud_share;
        case Weather::relative_humidity:
        case Weather::relative_humidity_max:
        case Weather::relative_humidity_min:
            return share;
        case Weather::vapour_pressure:
        case Weather::pressure:
            return pressure;
        case Weather::wind:
            return speed;
        case Weather::air_temperature:
        case Weather::air_temperature_max:
        case Weather::air_temperature_min:
        case Weather::dew_point:
        case Weather::surface_temperature:
            break;
    }
    return temperature;
}

}  // namespace

std::vector<std::string> weather_units(Weather quantity) {
    std::vector<std::string> names;
    for (const auto& row : rows_of(quantity)) names.emplace_back(row.name);
    return names;
}

std::optional<WeatherUnit> weather_unit(Weather quantity, std::string_view name) {
    for (const auto& row : rows_of(quantity)) {
        const bool other = row.also.find(" " + std::string(name) + " ") != std::string_view::npos;
        if (row.name == name || (!name.empty() && other))
            return WeatherUnit{std::string(row.name), row.factor, row.offset, row.energy};
    }
    return std::nullopt;
}

/// Wider than any record (common practice): a value outside is a wrong unit, column or sensor. Short
/// means of sunlight go beyond 1361 W m-2 beside bright clouds, and sensors show a little below 0 at night.
WeatherLimits weather_limits(Weather quantity) {
    switch (quantity) {
        case Weather::global:
            return {-50, 2000};
        case Weather::beam:
            return {-50, 1500};
        case Weather::diffuse:
            return {-50, 1200};
        case Weather::cloud:
            return {0, 1};
        case Weather::air_temperature:
        case Weather::air_temperature_max:
        case Weather::air_temperature_min:
            return {180, 335};
        case Weather::dew_point:
            return {170, 315};
        case Weather::surface_temperature:
            return {170, 380};
        case Weather::relative_humidity:
        case Weather::relative_humidity_max:
        case Weather::relative_humidity_min:
            return {-0.02, 1.1};  // sensors near saturation and in dry air
        case Weather::vapour_pressure:
            return {0, 80};
        case Weather::pressure:
            return {300, 1100};
        case Weather::wind:
            return {0, 110};
        case Weather::longwave_down:
            return {30, 700};
    }
    return {0, 0};
}

}  // namespace sunbudget
