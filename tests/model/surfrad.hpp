#pragma once

#include <array>
#include <fstream>
#include <sstream>
#include <string>

#include "sunbudget/base/units.hpp"
#include "sunbudget/model/weather_record.hpp"
#include "support/vectors.hpp"

namespace sunbudget::test {

/// Daily files of a network: two lines of head, columns of values and flags between blanks, stamps at the end.
inline WeatherFormat surfrad_format() {
    WeatherFormat format;
    format.file = "station.dat";
    format.separator = Separator::blanks;
    format.header = false;
    format.skip = 2;
    format.stamp = Stamp::end;
    format.missing = {-9999.9};
    const std::array<int, 7> time_numbers{0, 1, 3, 4, 0, 5, 6};
    for (std::size_t i = 0; i < time_numbers.size(); ++i)
        if (time_numbers[i] > 0) format.time_columns[i] = WeatherColumn{"", time_numbers[i]};
    const auto declare = [&](Weather quantity, int number, const char* unit) {
        const auto q = static_cast<std::size_t>(quantity);
        format.columns[q] = WeatherColumn{"", number};
        format.flags[q] = WeatherColumn{"", number + 1};
        format.units[q] = unit;
    };
    declare(Weather::global, 9, "W/m2");
    declare(Weather::beam, 13, "W/m2");
    declare(Weather::diffuse, 15, "W/m2");
    declare(Weather::longwave_down, 17, "W/m2");
    declare(Weather::air_temperature, 39, "degC");
    declare(Weather::relative_humidity, 41, "%");
    declare(Weather::wind, 43, "m/s");
    declare(Weather::pressure, 47, "hPa");
    return format;
}

inline std::string real_text(const std::string& name) {
    std::ifstream file(*real_data(name));
    std::stringstream text;
    text << file.rdbuf();
    return text.str();
}

/// The station of a daily file, from its second line.
inline Station surfrad_station(const std::string& text) {
    std::stringstream stream(text.substr(text.find('\n') + 1));
    double latitude = 0, longitude = 0, height = 0;
    stream >> latitude >> longitude >> height;
    return {rad_from_deg(latitude), rad_from_deg(longitude), height};
}

}  // namespace sunbudget::test
