#pragma once

#include <functional>
#include <optional>
#include <string>
#include <string_view>
#include <vector>

#include "sunbudget/base/error.hpp"
#include "sunbudget/model/weather_record.hpp"

namespace sunbudget {

/// Cells of a table's line; views into the text.
using WeatherCells = std::vector<std::string_view>;

/// Collects what is wrong with a table; the first ten problems are told, the others counted.
class WeatherProblems {
  public:
    explicit WeatherProblems(const std::string& file) : file_(file) {}
    void add(std::size_t line, std::string_view column, std::string what, std::string todo = {});
    [[nodiscard]] bool any() const { return count_ > 0; }
    void throw_if_any() const;

  private:
    std::string file_;
    std::size_t count_ = 0;
    std::vector<Problem> told_;
};

/// The rows of a text, header apart.
class WeatherTable {
  public:
    /// Throws Error(input) when there is no row.
    WeatherTable(std::string_view text, const WeatherFormat& format);

    [[nodiscard]] const std::vector<std::string>& header() const { return header_; }
    /// Index of a column; nothing when the header lacks it.
    [[nodiscard]] std::optional<std::size_t> index_of(const WeatherColumn& column) const;
    /// Calls visit(line number from 1, cells).
    void each_row(const std::function<void(std::size_t, const WeatherCells&)>& visit) const;

  private:
    std::string_view text_;
    const WeatherFormat& format_;
    char separator_ = ',';
    std::vector<std::string> header_;  ///< names without units
    std::size_t first_row_ = 0, first_line_ = 1;

    [[nodiscard]] WeatherCells cells_of(std::string_view line) const;
    /// The next line that counts, from `at` on, which moves behind it.
    [[nodiscard]] std::optional<std::string_view> next_line(std::size_t& at,
                                                            std::size_t& number) const;
};

/// A header cell "air [degC]" in its two parts; the unit may be missing.
struct NameAndUnit {
    std::string name, unit;
};
[[nodiscard]] NameAndUnit name_and_unit(std::string_view header_cell);

/// How a unit turns into the record's own: value * factor + offset, per interval for energies.
struct WeatherUnit {
    std::string name;
    double factor = 1;
    double offset = 0;
    bool energy = false;  ///< a sum over the interval: divided by its seconds
};
/// Nothing for a unit the quantity has not.
[[nodiscard]] std::optional<WeatherUnit> weather_unit(Weather quantity, std::string_view name);

/// What a quantity can be anywhere, in the record's units.
struct WeatherLimits {
    double low, high;
};
[[nodiscard]] WeatherLimits weather_limits(Weather quantity);

/// A row's time as written. `seconds_of_day` may be 86400; nothing: the row stands for the day.
struct WeatherTime {
    CivilDate date;
    std::optional<double> seconds_of_day;
    std::optional<double> offset_s;
};

/// Finds the time in a row's cells.
class WeatherClock {
  public:
    /// Throws Error(input) when no column or not enough columns make a time.
    WeatherClock(const WeatherTable& table, const WeatherFormat& format);
    /// Throws Error(input) for what is no time, without the row's place.
    [[nodiscard]] WeatherTime at(const WeatherCells& cells) const;

  private:
    const WeatherFormat& format_;
    std::array<std::optional<std::size_t>, weather_time_names.size()> index_;

    [[nodiscard]] WeatherTime from_parts(const WeatherCells& cells) const;
};

/// "DD/MM/YYYY hh:mm": YYYY, MM, DD, DDD (day of the year), hh, mm, ss; anything else stands for itself.
[[nodiscard]] WeatherTime weather_time(std::string_view text, std::string_view form);
/// 2025-06-21T12:00 with a blank for the T, seconds and an offset allowed; 2025-06-21; 202506211200; 20250621.
[[nodiscard]] WeatherTime weather_time(std::string_view text);

}  // namespace sunbudget
