#include "weather_layout.hpp"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <map>
#include <optional>
#include <utility>

#include "sunbudget/base/text.hpp"
#include "sunbudget/base/units.hpp"
#include "sunbudget/physics/sun.hpp"

namespace sunbudget {

namespace {

constexpr std::size_t no_line = 0;

class RowPlacer {
  public:
    RowPlacer(const WeatherRows& table, const WeatherFormat& format, WeatherProblems& problems)
        : format_(format), rows_(table.rows), problems_(problems) {}

    WeatherLayout built() {
        lay_out();
        return std::move(found_);
    }

  private:
    void lay_out();
    void lay_typical();
    void lay_row(std::size_t row, WeatherTime time, std::optional<int> year);
    [[nodiscard]] TimeSpan span_of(const WeatherTime& time) const;
    [[nodiscard]] UtcSeconds utc_of(const WeatherTime& time) const;
    void find_interval();
    [[nodiscard]] std::optional<double> usual_distance_s() const;
    void check_order();

    const WeatherFormat& format_;
    const std::vector<WeatherRows::Row>& rows_;
    WeatherProblems& problems_;
    WeatherLayout found_;
};

UtcSeconds RowPlacer::utc_of(const WeatherTime& time) const {
    const auto& date = time.date;
    const double seconds = *time.seconds_of_day;
    if (time.offset_s) return Zone().to_utc(date, seconds) - *time.offset_s;
    const auto utc = seconds < seconds_per_day
                         ? format_.zone.to_utc(date, seconds, format_.longitude_rad)
                         : format_.zone.to_utc(next_day(date), 0, format_.longitude_rad);
    return format_.zone.kind() == ZoneKind::solar_true ? utc_from_true_solar(utc) : utc;
}

/// The day, or the stamp as an interval without length.
TimeSpan RowPlacer::span_of(const WeatherTime& time) const {
    if (time.seconds_of_day) {
        const auto utc = utc_of(time);
        return {utc, utc};
    }
    const auto begin = format_.zone.day_start(time.date, format_.longitude_rad);
    const auto end = format_.zone.day_start(next_day(time.date), format_.longitude_rad);
    const bool by_sun = format_.zone.kind() == ZoneKind::solar_true;
    return {by_sun ? utc_from_true_solar(begin) : begin, by_sun ? utc_from_true_solar(end) : end};
}

/// Puts a row where it belongs; the interval's end waits for find_interval() where it is not known yet.
void RowPlacer::lay_row(std::size_t r, WeatherTime time, std::optional<int> year) {
    // The midnight that ends a day belongs to that day, also where the next is of another year.
    if (format_.stamp == Stamp::end && time.seconds_of_day == 0.0) {
        time.date = civil_from_days(days_from_civil(time.date) - 1);
        time.seconds_of_day = seconds_per_day;
    }
    if (year) {
        time.date.year = *year;
        if (!is_valid(time.date)) return;  // 29 February of a year that has none
    }
    try {
        found_.placed.push_back({span_of(time), r});
    } catch (const Error& error) {
        const auto& problem = error.problems().front();
        problems_.add(rows_[r].line, "time", problem.what,
                      problem.todo +
                          "; if the table's clock never changes give weather.zone as an offset, "
                          "such as +01:00");
    }
}

/// The rows once for each year they stand for.
void RowPlacer::lay_typical() {
    const auto is_leap_day = [](const WeatherRows::Row& row) {
        return row.time.date.month == 2 && row.time.date.day == 29;
    };
    const bool has_leap_day = std::any_of(rows_.begin(), rows_.end(), is_leap_day);
    for (int year = format_.typical->first; year <= format_.typical->last; ++year)
        for (std::size_t r = 0; r < rows_.size(); ++r) {
            auto time = rows_[r].time;
            lay_row(r, time, year);
            if (has_leap_day || time.date.month != 2 || time.date.day != 28 ||
                days_in_month(year, 2) != 29)
                continue;
            time.date.day = 29;
            lay_row(r, time, year);
        }
    std::ranges::stable_sort(found_.placed, {},
                             [](const auto& placed) { return placed.span.begin; });
}

void RowPlacer::lay_out() {
    const auto is_day = [](const WeatherRows::Row& r) { return !r.time.seconds_of_day; };
    const bool some_days = std::any_of(rows_.begin(), rows_.end(), is_day);
    found_.days = std::all_of(rows_.begin(), rows_.end(), is_day);
    if (some_days != found_.days)
        return problems_.add(no_line, "time", "some rows have a time of day and some have none",
                             {});
    if (format_.typical)
        lay_typical();
    else
        for (std::size_t r = 0; r < rows_.size(); ++r) lay_row(r, rows_[r].time, std::nullopt);
    if (problems_.any()) return;
    find_interval();
    if (!problems_.any()) check_order();
}

/// The commonest distance between stamps.
std::optional<double> RowPlacer::usual_distance_s() const {
    std::map<long, std::size_t> distances;
    for (std::size_t i = 1; i < found_.placed.size(); ++i) {
        const double distance_s = found_.placed[i].span.begin - found_.placed[i - 1].span.begin;
        if (distance_s > 0) ++distances[std::lround(distance_s)];
    }
    const auto usual =
        std::max_element(distances.begin(), distances.end(),
                         [](const auto& a, const auto& b) { return a.second < b.second; });
    if (usual == distances.end()) return std::nullopt;
    return static_cast<double>(usual->first);
}

void RowPlacer::find_interval() {
    if (found_.days) {
        found_.interval_s = seconds_per_day;
        return;
    }
    const auto interval_s = format_.interval_s ? format_.interval_s : usual_distance_s();
    if (!interval_s)
        return problems_.add(no_line, "time", "the rows do not show how long their intervals are",
                             "say weather.interval, such as 1 h");
    found_.interval_s = *interval_s;
    if (found_.interval_s > seconds_per_day)
        return problems_.add(
            no_line, "time",
            fmt::format("the rows stand {} days apart",
                        shortest(found_.interval_s / seconds_per_day)),
            "a weather table has a row a day or more; monthly means of cloud go into sky.cloud");
    const double before = format_.stamp == Stamp::start    ? 0
                          : format_.stamp == Stamp::middle ? 0.5
                                                           : 1;
    for (auto& placed : found_.placed) {
        placed.span.begin -= before * found_.interval_s;
        placed.span.end = placed.span.begin + found_.interval_s;
    }
}

void RowPlacer::check_order() {
    constexpr double slack_s = 1;  // stamps in decimal hours are rounded
    for (std::size_t i = 1; i < found_.placed.size(); ++i) {
        auto& span = found_.placed[i].span;
        const auto& last = found_.placed[i - 1].span;
        if (span.begin >= last.end - slack_s) {
            span.begin = std::max(span.begin, last.end);
            continue;
        }
        const auto& row = rows_[found_.placed[i].row];
        const auto other = rows_[found_.placed[i - 1].row].line;
        if (span.begin < last.begin)
            problems_.add(row.line, "time",
                          fmt::format("the row lies before that of line {}", other),
                          "sort the rows; if the months come from different years say "
                          "weather.years: typical");
        else
            problems_.add(
                row.line, "time",
                fmt::format("the row's interval of {} s begins before that of line {} has ended",
                            shortest(found_.interval_s), other),
                "remove one of them, or say how long intervals are: weather.interval");
    }
}

}  // namespace

WeatherLayout lay_out(const WeatherRows& table, const WeatherFormat& format,
                      WeatherProblems& problems) {
    return RowPlacer(table, format, problems).built();
}

}  // namespace sunbudget
