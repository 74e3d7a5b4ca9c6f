#include "sunbudget/model/weather_record.hpp"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>

#include "sunbudget/base/text.hpp"
#include "weather_layout.hpp"
#include "weather_rows.hpp"

namespace sunbudget {

namespace {

bool is_humidity(Weather quantity) {
    return quantity == Weather::relative_humidity || quantity == Weather::relative_humidity_max ||
           quantity == Weather::relative_humidity_min;
}

/// The record of rows that have been placed.
WeatherRecord filled(const WeatherRows& table, const WeatherLayout& layout,
                     WeatherProblems& problems) {
    const auto& placed = layout.placed;
    WeatherRecord record;
    record.interval_s = layout.interval_s;
    record.days = layout.days;
    record.notes = table.notes;
    for (std::size_t i = 0; i < placed.size(); ++i) {
        record.intervals.push_back(placed[i].span);
        if (i > 0 && placed[i].span.begin > placed[i - 1].span.end + 1)
            record.gaps.push_back({placed[i - 1].span.end, placed[i].span.begin});
    }
    for (std::size_t c = 0; c < table.columns.size(); ++c) {
        const auto& column = table.columns[c];
        const auto limits = weather_limits(column.quantity);
        auto& values = record.columns[static_cast<std::size_t>(column.quantity)];
        values.reserve(placed.size());
        for (const auto& [span, r] : placed) {
            const double value = column.unit.energy
                                     ? table.rows[r].values[c] / (span.end - span.begin)
                                     : table.rows[r].values[c];
            if (value < limits.low || value > limits.high)
                problems.add(
                    table.rows[r].line, weather_names[static_cast<std::size_t>(column.quantity)],
                    fmt::format("{} {} in {} s is {:.0f} W/m2, no value a station measures",
                                shortest(table.rows[r].values[c] / column.unit.factor),
                                column.unit.name, shortest(span.end - span.begin), value),
                    "look at the column, its unit and weather.interval");
            // A wet or a dry sensor errs a little beyond the scale's ends.
            values.push_back(is_humidity(column.quantity) && !std::isnan(value)
                                 ? std::clamp(value, 0.0, 1.0)
                                 : value);
        }
    }
    problems.throw_if_any();
    return record;
}

}  // namespace

std::optional<std::size_t> WeatherRecord::at(UtcSeconds utc) const {
    const auto after =
        std::upper_bound(intervals.begin(), intervals.end(), utc,
                         [](UtcSeconds t, const TimeSpan& s) { return t < s.begin; });
    if (after == intervals.begin()) return std::nullopt;
    const auto index = static_cast<std::size_t>(after - intervals.begin()) - 1;
    return utc < intervals[index].end ? std::optional(index) : std::nullopt;
}

std::size_t WeatherRecord::missing(Weather quantity) const {
    const auto column = values(quantity);
    return static_cast<std::size_t>(
        std::count_if(column.begin(), column.end(), [](double v) { return std::isnan(v); }));
}

WeatherRecord read_weather(std::string_view text, const WeatherFormat& format) {
    WeatherProblems problems(format.file);
    const auto table = read_rows(text, format, problems);
    problems.throw_if_any();
    const auto layout = lay_out(table, format, problems);
    problems.throw_if_any();
    return filled(table, layout, problems);
}

}  // namespace sunbudget
