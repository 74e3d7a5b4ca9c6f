#include "weather_rows.hpp"

#include <fmt/format.h>

#include <algorithm>
#include <utility>

#include "sunbudget/base/text.hpp"

namespace sunbudget {

namespace {

constexpr double no_value = std::numeric_limits<double>::quiet_NaN();
constexpr std::size_t no_line = 0;

class RowReader {
  public:
    RowReader(std::string_view text, const WeatherFormat& format, WeatherProblems& problems)
        : format_(format), table_(text, format), clock_(table_, format), problems_(problems) {}

    WeatherRows read() {
        find_columns();
        problems_.throw_if_any();
        table_.each_row(
            [&](std::size_t line, const WeatherCells& cells) { take_row(line, cells); });
        look_at_humidity();
        return std::move(found_);
    }

  private:
    void find_columns();
    void add_column(std::size_t quantity, std::size_t index);
    void take_row(std::size_t line, const WeatherCells& cells);
    [[nodiscard]] double value_of(WeatherRows::Column& column, std::size_t line,
                                  const WeatherCells& cells);
    void look_at_humidity();
    void look_at_extremes(const WeatherRows::Row& row);
    [[nodiscard]] bool is_missing(std::string_view text) const;
    [[nodiscard]] std::optional<double> number_in(std::string_view text) const;

    const WeatherFormat& format_;
    WeatherTable table_;
    WeatherClock clock_;
    WeatherProblems& problems_;
    WeatherRows found_;
};

void RowReader::find_columns() {
    const bool any_declared = std::any_of(format_.columns.begin(), format_.columns.end(),
                                          [](const auto& c) { return c.has_value(); });
    for (std::size_t q = 0; q < weather_quantities; ++q) {
        const auto& declared = format_.columns[q];
        if (!declared) {
            // The header's own names, unless the plan says which columns to take.
            if (any_declared) continue;
            if (const auto index = table_.index_of({weather_names[q], 0})) add_column(q, *index);
            continue;
        }
        if (const auto index = table_.index_of(*declared))
            add_column(q, *index);
        else
            problems_.add(no_line, weather_names[q],
                          "the table has no column \"" + declared->name + "\"",
                          format_.header ? suggestion(declared->name, table_.header())
                                         : "without a header give its number");
    }
    if (found_.columns.empty() && !problems_.any())
        problems_.add(no_line, {}, "no column of the table is known",
                      "say weather.columns: {global: NAME, ...}");
}

void RowReader::add_column(std::size_t q, std::size_t index) {
    const auto quantity = static_cast<Weather>(q);
    const auto& header = table_.header();
    const auto in_header =
        index < header.size() ? name_and_unit(header[index]).unit : std::string();
    const auto name = format_.units[q].value_or(in_header);
    const auto unit = weather_unit(quantity, name);
    const auto units = joined(weather_units(quantity), ", ");
    if (!unit)
        return problems_.add(
            no_line, weather_names[q],
            name.empty() ? "nothing says in which unit it is"
                         : "the unit \"" + name + "\" is not known for it",
            "say weather.units: {" + std::string(weather_names[q]) + ": ...}, one of " + units);
    WeatherRows::Column column{quantity, index, *unit, std::nullopt};
    if (const auto& flag = format_.flags[q]) {
        column.flag = table_.index_of(*flag);
        if (!column.flag)
            problems_.add(no_line, weather_names[q],
                          "the table has no column \"" + flag->name + "\" of flags",
                          suggestion(flag->name, header));
    }
    found_.notes.push_back(fmt::format("{}: column {}, {}", weather_names[q],
                                       index < header.size()
                                           ? "\"" + name_and_unit(header[index]).name + "\""
                                           : std::to_string(index + 1),
                                       unit->name));
    found_.columns.push_back(std::move(column));
}

bool RowReader::is_missing(std::string_view text) const {
    if (text.empty()) return true;
    const auto word = lower_case(text);
    return word == "na" || word == "nan" || word == "null" || word == "-";
}

std::optional<double> RowReader::number_in(std::string_view text) const {
    if (!format_.decimal_comma) return parse_number(text);
    std::string with_point(text);
    std::replace(with_point.begin(), with_point.end(), ',', '.');
    return parse_number(with_point);
}

void RowReader::take_row(std::size_t line, const WeatherCells& cells) {
    WeatherRows::Row row{line, {}, {}};
    try {
        row.time = clock_.at(cells);
    } catch (const Error& error) {
        const auto& problem = error.problems().front();
        return problems_.add(line, "time", problem.what, problem.todo);
    }
    row.values.reserve(found_.columns.size());
    for (auto& column : found_.columns) row.values.push_back(value_of(column, line, cells));
    look_at_extremes(row);
    found_.rows.push_back(std::move(row));
}

/// The highest of a day is not below the lowest.
void RowReader::look_at_extremes(const WeatherRows::Row& row) {
    const auto value = [&](Weather quantity) {
        for (std::size_t c = 0; c < found_.columns.size(); ++c)
            if (found_.columns[c].quantity == quantity) return row.values[c];
        return no_value;
    };
    for (const auto& [most, least] :
         {std::pair{Weather::air_temperature_max, Weather::air_temperature_min},
          std::pair{Weather::relative_humidity_max, Weather::relative_humidity_min}})
        if (value(most) < value(least))
            problems_.add(
                row.line, weather_names[static_cast<std::size_t>(most)],
                "lies below " + std::string(weather_names[static_cast<std::size_t>(least)]),
                "look at the columns, or empty the cells");
}

double RowReader::value_of(WeatherRows::Column& column, std::size_t line,
                           const WeatherCells& cells) {
    const auto* name = weather_names[static_cast<std::size_t>(column.quantity)];
    if (column.index >= cells.size()) {
        problems_.add(line, name,
                      fmt::format("the row has {} cells, not {}", cells.size(), column.index + 1),
                      "an empty cell means no value");
        return no_value;
    }
    const auto text = trimmed(cells[column.index]);
    if (is_missing(text)) return no_value;
    const auto number = number_in(text);
    if (!number) {
        problems_.add(line, name, "\"" + std::string(text) + "\" is no number",
                      "an empty cell or NaN means no value");
        return no_value;
    }
    if (std::find(format_.missing.begin(), format_.missing.end(), *number) != format_.missing.end())
        return no_value;
    if (column.flag) {
        const auto flag =
            *column.flag < cells.size() ? number_in(trimmed(cells[*column.flag])) : std::nullopt;
        if (!flag ||
            std::find(format_.good.begin(), format_.good.end(), *flag) == format_.good.end())
            return no_value;
    }
    column.highest = std::max(column.highest, *number);
    const double value = *number * column.unit.factor + column.unit.offset;
    const auto limits = weather_limits(column.quantity);
    if (!column.unit.energy && !(value >= limits.low && value <= limits.high)) {
        problems_.add(
            line, name,
            shortest(*number) + " " + column.unit.name + " is no value a station measures",
            "look at the column and its unit, name it in weather.missing, or empty the cell");
        return no_value;
    }
    return value;
}

/// A fraction read as per cent is dry beyond any desert all along.
void RowReader::look_at_humidity() {
    for (const auto& column : found_.columns)
        if ((column.quantity == Weather::relative_humidity ||
             column.quantity == Weather::relative_humidity_max) &&
            column.unit.name == "%" && column.highest <= 1 && column.highest > 0)
            problems_.add(no_line, weather_names[static_cast<std::size_t>(column.quantity)],
                          "no value is above " + shortest(column.highest) + " %",
                          "say weather.units: {relative_humidity: \"1\"} if these are fractions");
}

}  // namespace

WeatherRows read_rows(std::string_view text, const WeatherFormat& format,
                      WeatherProblems& problems) {
    return RowReader(text, format, problems).read();
}

}  // namespace sunbudget
