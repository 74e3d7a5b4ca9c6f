#pragma once

#include <array>
#include <cstddef>
#include <optional>
#include <span>
#include <string>
#include <string_view>
#include <vector>

#include "sunbudget/base/time.hpp"
#include "sunbudget/physics/sun_day.hpp"

namespace sunbudget {

/// What a weather table may tell. Inside, units are W m-2 (means over the interval), K, hPa, m/s and 1.
enum class Weather {
    global,   ///< sunlight on the horizontal
    beam,     ///< straight from the sun, on a plane facing it
    diffuse,  ///< from the sky, on the horizontal
    cloud,    ///< share of the sky
    air_temperature,
    relative_humidity,  ///< [0, 1]
    dew_point,
    vapour_pressure,
    pressure,  ///< at the station
    wind,
    longwave_down,
    surface_temperature,
    air_temperature_max,  ///< of the row's interval
    air_temperature_min,
    relative_humidity_max,  ///< [0, 1]
    relative_humidity_min,
};
inline constexpr std::size_t weather_quantities = 16;
/// As a plan names them, in the order of the enumeration.
inline constexpr std::array<const char*, weather_quantities> weather_names{"global",
                                                                           "beam",
                                                                           "diffuse",
                                                                           "cloud",
                                                                           "air_temperature",
                                                                           "relative_humidity",
                                                                           "dew_point",
                                                                           "vapour_pressure",
                                                                           "pressure",
                                                                           "wind",
                                                                           "longwave_down",
                                                                           "surface_temperature",
                                                                           "air_temperature_max",
                                                                           "air_temperature_min",
                                                                           "relative_humidity_max",
                                                                           "relative_humidity_min"};
/// The columns that make up a time: either `time`, or a day and an hour in parts.
inline constexpr std::array<const char*, 7> weather_time_names{
    "time", "year", "month", "day", "day_of_year", "hour", "minute"};

/// Units a quantity may have in a table, the plainest spelling first: for help and messages.
[[nodiscard]] std::vector<std::string> weather_units(Weather quantity);

/// A column by its name in the header, or by its number from 1.
struct WeatherColumn {
    std::string name;
    int number = 0;
    friend bool operator==(const WeatherColumn&, const WeatherColumn&) = default;
};

enum class Separator { automatic, comma, semicolon, tab, blanks };
enum class Stamp { start, middle, end };

/// A station: where a table was measured. Places in radians, heights in metres.
struct Station {
    double latitude_rad = 0;
    double longitude_rad = 0;
    double height_m = 0;
};

/// How a table is laid out.
struct WeatherFormat {
    std::string file;  ///< in messages
    Separator separator = Separator::automatic;
    std::string comment = "#";  ///< lines that start so are left out
    int skip = 0;               ///< lines before the header, or before the rows without one
    bool header = true;
    bool decimal_comma = false;
    std::vector<double> missing;  ///< numbers that mean "no value"
    std::array<std::optional<WeatherColumn>, weather_time_names.size()> time_columns;
    std::array<std::optional<WeatherColumn>, weather_quantities> columns;
    std::array<std::optional<std::string>, weather_quantities> units;
    std::array<std::optional<WeatherColumn>, weather_quantities> flags;  ///< quality of each value
    std::vector<double> good{0};  ///< flags of values that count
    std::string
        time_form;  ///< "DD/MM/YYYY hh:mm"; empty: 2025-06-21T12:00, with a blank, or 202506211200
    Stamp stamp = Stamp::start;
    Zone zone;
    double longitude_rad = 0;          ///< of the clock, in solar zones
    std::optional<double> interval_s;  ///< nothing: the usual distance of the stamps
    /// A typical year: the rows' own years do not count, the rows stand for each of these years. Where a
    /// year has a 29 February and the table none, the 28th stands for it too.
    struct Years {
        int first, last;
    };
    std::optional<Years> typical;
};

/// A weather table: intervals in order, never overlapping, each with a value or NaN for every quantity that
/// the table has.
struct WeatherRecord {
    std::vector<TimeSpan> intervals;
    std::array<std::vector<double>, weather_quantities> columns;  ///< empty: not in the table
    double interval_s = 0;                                        ///< of most intervals
    bool days = false;               ///< rows stand for days of the zone
    std::vector<TimeSpan> gaps;      ///< between rows
    std::vector<std::string> notes;  ///< columns and units as understood, a line each

    [[nodiscard]] bool has(Weather quantity) const {
        return !columns[static_cast<std::size_t>(quantity)].empty();
    }
    [[nodiscard]] std::span<const double> values(Weather quantity) const {
        return columns[static_cast<std::size_t>(quantity)];
    }
    /// The interval that holds an instant; nothing in a gap or outside the record.
    [[nodiscard]] std::optional<std::size_t> at(UtcSeconds utc) const;
    /// How many rows have no value of it.
    [[nodiscard]] std::size_t missing(Weather quantity) const;
};

/// Reads a table.
///
/// errors  Error(input) with up to ten problems, each naming the file's line and column: a column that is
///         not there, a unit that is neither declared nor in the header, a cell that is no number, a value no
///         station measures, a local time that clocks skip or show twice, rows out of order or overlapping
[[nodiscard]] WeatherRecord read_weather(std::string_view text, const WeatherFormat& format);

}  // namespace sunbudget
