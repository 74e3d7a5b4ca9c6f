#pragma once

#include <cstddef>
#include <vector>

#include "weather_rows.hpp"

namespace sunbudget {

/// When a table's rows were measured.
struct WeatherLayout {
    /// A row's interval, laid over a year where the year is typical.
    struct Placed {
        TimeSpan span;
        std::size_t row;
    };
    std::vector<Placed> placed;  ///< in order, never overlapping
    bool days = false;           ///< rows stand for days of the zone
    double interval_s = 0;       ///< of most intervals
};

/// errors  adds to the problems; the layout is of no use then
[[nodiscard]] WeatherLayout lay_out(const WeatherRows& table, const WeatherFormat& format,
                                    WeatherProblems& problems);

}  // namespace sunbudget
