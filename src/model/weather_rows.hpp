#pragma once

#include <cstddef>
#include <limits>
#include <optional>
#include <string>
#include <string_view>
#include <vector>

#include "weather_table.hpp"

namespace sunbudget {

/// A table's rows as they stand, its cells turned into numbers.
struct WeatherRows {
    /// A column in use.
    struct Column {
        Weather quantity;
        std::size_t index;
        WeatherUnit unit;
        std::optional<std::size_t> flag;
        double highest = -std::numeric_limits<double>::infinity();  ///< in the table's unit
    };
    struct Row {
        std::size_t line;
        WeatherTime time;
        std::vector<double> values;  ///< by column, record's units but for energies
    };
    std::vector<Column> columns;
    std::vector<Row> rows;
    std::vector<std::string> notes;  ///< columns and units as understood, a line each
};

/// errors  throws what it finds wrong with the columns; adds to the problems what is wrong with the rows
[[nodiscard]] WeatherRows read_rows(std::string_view text, const WeatherFormat& format,
                                    WeatherProblems& problems);

}  // namespace sunbudget
