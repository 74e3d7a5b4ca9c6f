#include "sunbudget/model/weather_record.hpp"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <limits>
#include <map>
#include <numeric>

#include "sunbudget/base/text.hpp"
#include "sunbudget/base/units.hpp"
#include "sunbudget/physics/sun.hpp"
#include "weather_table.hpp"

namespace sunbudget {

namespace {

constexpr double no_value = std::numeric_limits<double>::quiet_NaN();
constexpr std::size_t no_line = 0;

bool is_one_of(Weather quantity, std::initializer_list<Weather> some) {
    return std::find(some.begin(), some.end(), quantity) != some.end();
}
bool is_humidity(Weather quantity) {
    return is_one_of(quantity, {Weather::relative_humidity, Weather::relative_humidity_max,
                                Weather::relative_humidity_min});
}

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

class Reader {
  public:
    Reader(std::string_view text, const WeatherFormat& format)
        : format_(format), table_(text, format), clock_(table_, format), problems_(format.file) {}

    WeatherRecord read() {
        find_columns();
        problems_.throw_if_any();
        table_.each_row(
            [&](std::size_t line, const WeatherCells& cells) { take_row(line, cells); });
        look_at_humidity();
        problems_.throw_if_any();
        lay_out();
        problems_.throw_if_any();
        fill();
        return std::move(record_);
    }

  private:
    const WeatherFormat& format_;
    WeatherTable table_;
    WeatherClock clock_;
    WeatherProblems problems_;
    std::vector<Column> columns_;
    std::vector<Row> rows_;
    WeatherRecord record_;

    /// A row's interval, laid over a year where the year is typical.
    struct Placed {
        TimeSpan span;
        std::size_t row;
    };
    std::vector<Placed> placed_;

    void find_columns();
    void add_column(std::size_t quantity, std::size_t index);
    void take_row(std::size_t line, const WeatherCells& cells);
    [[nodiscard]] double value_of(Column& column, std::size_t line, const WeatherCells& cells);
    void look_at_humidity();
    void look_at_extremes(const Row& row);
    [[nodiscard]] bool is_missing(std::string_view text) const;
    [[nodiscard]] std::optional<double> number_in(std::string_view text) const;
    void lay_out();
    void lay_row(std::size_t row, std::optional<int> year);
    [[nodiscard]] UtcSeconds utc_of(const CivilDate& date, double seconds,
                                    const WeatherTime& time) const;
    void find_interval();
    void check_order();
    void fill();
};

void Reader::find_columns() {
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
    if (columns_.empty() && !problems_.any())
        problems_.add(no_line, {}, "no column of the table is known",
                      "say weather.columns: {global: NAME, ...}");
}

void Reader::add_column(std::size_t q, std::size_t index) {
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
    Column column{quantity, index, *unit, std::nullopt};
    if (const auto& flag = format_.flags[q]) {
        column.flag = table_.index_of(*flag);
        if (!column.flag)
            problems_.add(no_line, weather_names[q],
                          "the table has no column \"" + flag->name + "\" of flags",
                          suggestion(flag->name, header));
    }
    record_.notes.push_back(fmt::format("{}: column {}, {}", weather_names[q],
                                        index < header.size()
                                            ? "\"" + name_and_unit(header[index]).name + "\""
                                            : std::to_string(index + 1),
                                        unit->name));
    columns_.push_back(std::move(column));
}

bool Reader::is_missing(std::string_view text) const {
    if (text.empty()) return true;
    const auto word = lower_case(text);
    return word == "na" || word == "nan" || word == "null" || word == "-";
}

std::optional<double> Reader::number_in(std::string_view text) const {
    if (!format_.decimal_comma) return parse_number(text);
    std::string with_point(text);
    std::replace(with_point.begin(), with_point.end(), ',', '.');
    return parse_number(with_point);
}

void Reader::take_row(std::size_t line, const WeatherCells& cells) {
    Row row{line, {}, {}};
    try {
        row.time = clock_.at(cells);
    } catch (const Error& error) {
        const auto& problem = error.problems().front();
        return problems_.add(line, "time", problem.what, problem.todo);
    }
    row.values.reserve(columns_.size());
    for (auto& column : columns_) row.values.push_back(value_of(column, line, cells));
    look_at_extremes(row);
    rows_.push_back(std::move(row));
}

/// The highest of a day is not below the lowest.
void Reader::look_at_extremes(const Row& row) {
    const auto value = [&](Weather quantity) {
        for (std::size_t c = 0; c < columns_.size(); ++c)
            if (columns_[c].quantity == quantity) return row.values[c];
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

double Reader::value_of(Column& column, std::size_t line, const WeatherCells& cells) {
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
void Reader::look_at_humidity() {
    for (const auto& column : columns_)
        if (is_one_of(column.quantity,
                      {Weather::relative_humidity, Weather::relative_humidity_max}) &&
            column.unit.name == "%" && column.highest <= 1 && column.highest > 0)
            problems_.add(no_line, weather_names[static_cast<std::size_t>(column.quantity)],
                          "no value is above " + shortest(column.highest) + " %",
                          "say weather.units: {relative_humidity: \"1\"} if these are fractions");
}

UtcSeconds Reader::utc_of(const CivilDate& date, double seconds, const WeatherTime& time) const {
    if (time.offset_s) return Zone().to_utc(date, seconds) - *time.offset_s;
    const auto utc = seconds < seconds_per_day
                         ? format_.zone.to_utc(date, seconds, format_.longitude_rad)
                         : format_.zone.to_utc(next_day(date), 0, format_.longitude_rad);
    return format_.zone.kind() == ZoneKind::solar_true ? utc_from_true_solar(utc) : utc;
}

/// Puts a row where it belongs; the interval's end waits for find_interval() where it is not known yet.
void Reader::lay_row(std::size_t r, std::optional<int> year) {
    const auto& row = rows_[r];
    auto date = row.time.date;
    auto seconds = row.time.seconds_of_day;
    // The midnight that ends a day belongs to that day, also where the next is of another year.
    if (format_.stamp == Stamp::end && seconds == 0.0) {
        date = civil_from_days(days_from_civil(date) - 1);
        seconds = seconds_per_day;
    }
    if (year) {
        date.year = *year;
        if (!is_valid(date)) return;  // 29 February of a year that has none
    }
    try {
        if (seconds) {
            const auto utc = utc_of(date, *seconds, row.time);
            placed_.push_back({{utc, utc}, r});
            return;
        }
        const auto begin = format_.zone.day_start(date, format_.longitude_rad);
        const auto end = format_.zone.day_start(next_day(date), format_.longitude_rad);
        const bool by_sun = format_.zone.kind() == ZoneKind::solar_true;
        placed_.push_back(
            {{by_sun ? utc_from_true_solar(begin) : begin, by_sun ? utc_from_true_solar(end) : end},
             r});
    } catch (const Error& error) {
        const auto& problem = error.problems().front();
        problems_.add(row.line, "time", problem.what,
                      problem.todo +
                          "; if the table's clock never changes give weather.zone as an offset, "
                          "such as +01:00");
    }
}

void Reader::lay_out() {
    const bool some_days = std::any_of(rows_.begin(), rows_.end(),
                                       [](const Row& r) { return !r.time.seconds_of_day; });
    const bool all_days = std::all_of(rows_.begin(), rows_.end(),
                                      [](const Row& r) { return !r.time.seconds_of_day; });
    if (some_days != all_days)
        return problems_.add(no_line, "time", "some rows have a time of day and some have none",
                             {});
    record_.days = all_days;
    if (!format_.typical) {
        for (std::size_t r = 0; r < rows_.size(); ++r) lay_row(r, std::nullopt);
    } else {
        const auto is_leap_day = [](const Row& row) {
            return row.time.date.month == 2 && row.time.date.day == 29;
        };
        const bool has_leap_day = std::any_of(rows_.begin(), rows_.end(), is_leap_day);
        for (int year = format_.typical->first; year <= format_.typical->last; ++year)
            for (std::size_t r = 0; r < rows_.size(); ++r) {
                lay_row(r, year);
                auto& date = rows_[r].time.date;
                if (has_leap_day || date.month != 2 || date.day != 28 ||
                    days_in_month(year, 2) != 29)
                    continue;
                date.day = 29;
                lay_row(r, year);
                date.day = 28;
            }
        std::stable_sort(placed_.begin(), placed_.end(), [](const Placed& a, const Placed& b) {
            return a.span.begin < b.span.begin;
        });
    }
    if (problems_.any()) return;
    find_interval();
    if (!problems_.any()) check_order();
}

void Reader::find_interval() {
    if (record_.days) {
        record_.interval_s = seconds_per_day;
        return;
    }
    std::map<long, std::size_t> distances;
    for (std::size_t i = 1; i < placed_.size(); ++i) {
        const double distance_s = placed_[i].span.begin - placed_[i - 1].span.begin;
        if (distance_s > 0) ++distances[std::lround(distance_s)];
    }
    const auto usual =
        std::max_element(distances.begin(), distances.end(),
                         [](const auto& a, const auto& b) { return a.second < b.second; });
    if (!format_.interval_s && usual == distances.end())
        return problems_.add(no_line, "time", "the rows do not show how long their intervals are",
                             "say weather.interval, such as 1 h");
    record_.interval_s =
        format_.interval_s ? *format_.interval_s : static_cast<double>(usual->first);
    if (record_.interval_s > seconds_per_day)
        return problems_.add(
            no_line, "time",
            fmt::format("the rows stand {} days apart",
                        shortest(record_.interval_s / seconds_per_day)),
            "a weather table has a row a day or more; monthly means of cloud go into sky.cloud");
    const double before = format_.stamp == Stamp::start    ? 0
                          : format_.stamp == Stamp::middle ? 0.5
                                                           : 1;
    for (auto& placed : placed_) {
        placed.span.begin -= before * record_.interval_s;
        placed.span.end = placed.span.begin + record_.interval_s;
    }
}

void Reader::check_order() {
    constexpr double slack_s = 1;  // stamps in decimal hours are rounded
    for (std::size_t i = 1; i < placed_.size(); ++i) {
        auto& span = placed_[i].span;
        const auto& last = placed_[i - 1].span;
        if (span.begin >= last.end - slack_s) {
            span.begin = std::max(span.begin, last.end);
            continue;
        }
        const auto& row = rows_[placed_[i].row];
        const auto other = rows_[placed_[i - 1].row].line;
        if (span.begin < last.begin)
            problems_.add(row.line, "time",
                          fmt::format("the row lies before that of line {}", other),
                          "sort the rows; if the months come from different years say "
                          "weather.years: typical");
        else
            problems_.add(
                row.line, "time",
                fmt::format("the row's interval of {} s begins before that of line {} has ended",
                            shortest(record_.interval_s), other),
                "remove one of them, or say how long intervals are: weather.interval");
    }
}

void Reader::fill() {
    for (std::size_t i = 0; i < placed_.size(); ++i) {
        record_.intervals.push_back(placed_[i].span);
        if (i > 0 && placed_[i].span.begin > placed_[i - 1].span.end + 1)
            record_.gaps.push_back({placed_[i - 1].span.end, placed_[i].span.begin});
    }
    for (std::size_t c = 0; c < columns_.size(); ++c) {
        const auto& column = columns_[c];
        const auto limits = weather_limits(column.quantity);
        auto& values = record_.columns[static_cast<std::size_t>(column.quantity)];
        values.reserve(placed_.size());
        for (const auto& [span, r] : placed_) {
            const double value = column.unit.energy ? rows_[r].values[c] / (span.end - span.begin)
                                                    : rows_[r].values[c];
            if (value < limits.low || value > limits.high)
                problems_.add(
                    rows_[r].line, weather_names[static_cast<std::size_t>(column.quantity)],
                    fmt::format("{} {} in {} s is {:.0f} W/m2, no value a station measures",
                                shortest(rows_[r].values[c] / column.unit.factor), column.unit.name,
                                shortest(span.end - span.begin), value),
                    "look at the column, its unit and weather.interval");
            // A wet or a dry sensor errs a little beyond the scale's ends.
            values.push_back(is_humidity(column.quantity) && !std::isnan(value)
                                 ? std::clamp(value, 0.0, 1.0)
                                 : value);
        }
    }
    problems_.throw_if_any();
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
    return Reader(text, format).read();
}

}  // namespace sunbudget
