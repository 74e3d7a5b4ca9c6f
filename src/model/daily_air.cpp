#include "sunbudget/model/daily_air.hpp"

#include <algorithm>
#include <cmath>
#include <limits>
#include <set>

#include "sunbudget/base/error.hpp"
#include "sunbudget/base/units.hpp"
#include "sunbudget/model/longwave.hpp"
#include "sunbudget/physics/fao56.hpp"
#include "sunbudget/physics/fao56_balance.hpp"
#include "sunbudget/physics/sun.hpp"
#include "sunbudget/physics/sun_place.hpp"

namespace sunbudget {

namespace {

constexpr double nan_value = std::numeric_limits<double>::quiet_NaN();
constexpr double zero_celsius_k = 273.15;
constexpr double joules_per_mj = 1e6;
constexpr double hpa_per_kpa = 10;
constexpr double percent = 100;
/// The extremes of rows longer than this are not the day's.
constexpr double longest_row_s = 3 * 3600;
/// Light under a closed cover over the clear sky's (Kasten & Czeplak 1980).
constexpr double overcast = 0.25;
/// Between two looks at the sun.
constexpr double look_s = 600;

double mean_saturation_kpa(double min_celsius, double max_celsius) {
    return (fao56_saturation_kpa(min_celsius) + fao56_saturation_kpa(max_celsius)) / 2;
}

/// Which of a table's columns tells the humidity.
enum class Humidity { dew_point, extremes, vapour_pressure, relative };

/// A mean over the rows that have a value.
struct Mean {
    double sum = 0, seconds = 0;
    void add(double value, double s) {
        if (std::isnan(value)) return;
        sum += value * s;
        seconds += s;
    }
    [[nodiscard]] double value() const { return sum / seconds; }
};

class Builder {
  public:
    Builder(const WeatherRecord& record, const Station& station, const TimePlan& times,
            const std::function<double(const CivilDate&)>& otherwise)
        : record_(record),
          station_(station),
          times_(times),
          otherwise_(otherwise),
          track_(times.earliest(), times.latest()),
          up_(up_direction(station.latitude_rad, station.longitude_rad)) {}

    DailyRecord built() {
        choose_columns();
        for (const auto& date : dates_of(times_)) {
            const auto day = of_day(date);
            const bool whole = !std::isnan(day.min_celsius + day.max_celsius + day.vapour_kpa +
                                           day.relative_sunlight);
            if (whole)
                found_.days.push_back(day);
            else
                ++found_.left_out;
        }
        return std::move(found_);
    }

  private:
    [[nodiscard]] bool has(Weather quantity) const { return record_.has(quantity); }
    [[nodiscard]] double value(Weather quantity, std::size_t row) const {
        return record_.values(quantity)[row];
    }
    void use(Weather quantity) { found_.used[static_cast<std::size_t>(quantity)] = true; }
    [[nodiscard]] bool short_rows() const {
        return !record_.days && record_.interval_s <= longest_row_s;
    }

    void choose_columns();
    void choose_humidity();
    [[nodiscard]] DailyAir of_day(const CivilDate& date) const;
    [[nodiscard]] double vapour_kpa(std::size_t first, std::size_t last, const DailyAir& day) const;
    [[nodiscard]] double relative_sunlight(std::size_t first, std::size_t last,
                                           const TimeSpan& span, const CivilDate& date) const;
    [[nodiscard]] double measured_share(const TimeSpan& span) const;
    [[nodiscard]] double seconds(std::size_t row) const {
        return record_.intervals[row].end - record_.intervals[row].begin;
    }
    [[nodiscard]] Mean mean_of(Weather quantity, std::size_t first, std::size_t last) const {
        Mean mean;
        for (auto row = first; row < last; ++row) mean.add(value(quantity, row), seconds(row));
        return mean;
    }

    const WeatherRecord& record_;
    Station station_;
    const TimePlan& times_;
    const std::function<double(const CivilDate&)>& otherwise_;
    SunTrack track_;
    EarthVector up_;
    Weather highest_ = Weather::air_temperature, lowest_ = Weather::air_temperature;
    Weather most_humid_ = Weather::relative_humidity, least_humid_ = Weather::relative_humidity;
    Humidity humidity_ = Humidity::relative;
    DailyRecord found_;
};

void Builder::choose_columns() {
    const std::string needs = "the day's highest and lowest temperature";
    if (has(Weather::air_temperature_max) && has(Weather::air_temperature_min)) {
        highest_ = Weather::air_temperature_max;
        lowest_ = Weather::air_temperature_min;
    } else if (!has(Weather::air_temperature)) {
        throw Error(Cause::input,
                    "the weather table has neither air_temperature nor both air_temperature_max "
                    "and air_temperature_min",
                    {}, "name their columns in weather.columns");
    } else if (!short_rows()) {
        throw Error(Cause::input, "rows of more than 3 h do not show " + needs, {},
                    "name columns air_temperature_max and air_temperature_min in weather.columns");
    }
    use(highest_);
    use(lowest_);
    choose_humidity();
    if (has(Weather::global)) {
        use(Weather::global);
        found_.sunlight_from = "the table's global";
    } else if (has(Weather::beam) || has(Weather::diffuse)) {
        throw Error(Cause::input,
                    "the weather table has beam or diffuse light and no global, of which the "
                    "method takes its clouds",
                    {}, "name a column global, or leave the others out of weather.columns");
    } else if (has(Weather::cloud)) {
        use(Weather::cloud);
        found_.sunlight_from = "the table's mean cloud, 1 - 0.75 N";
    }
}

void Builder::choose_humidity() {
    if (has(Weather::dew_point)) {
        humidity_ = Humidity::dew_point;
        use(Weather::dew_point);
        found_.humidity_from = "dew_point";
        return;
    }
    const bool columns = has(Weather::relative_humidity_max) && has(Weather::relative_humidity_min);
    if (columns || (has(Weather::relative_humidity) && short_rows())) {
        humidity_ = Humidity::extremes;
        if (columns) {
            most_humid_ = Weather::relative_humidity_max;
            least_humid_ = Weather::relative_humidity_min;
        }
        use(most_humid_);
        use(least_humid_);
        found_.humidity_from = "the day's highest and lowest relative humidity";
    } else if (has(Weather::vapour_pressure)) {
        humidity_ = Humidity::vapour_pressure;
        use(Weather::vapour_pressure);
        found_.humidity_from = "vapour_pressure";
    } else if (has(Weather::relative_humidity)) {
        use(Weather::relative_humidity);
        found_.humidity_from = "mean relative humidity";
    } else {
        throw Error(Cause::input,
                    "the weather table has no humidity (dew_point, relative_humidity_max and "
                    "relative_humidity_min, vapour_pressure or relative_humidity)",
                    {}, "name its column in weather.columns");
    }
}

double Builder::vapour_kpa(std::size_t first, std::size_t last, const DailyAir& day) const {
    const double needed_s = air_day_needs * seconds_per_day;
    const auto if_enough = [&](const Mean& mean, double factor) {
        return mean.seconds < needed_s ? nan_value : mean.value() * factor;
    };
    switch (humidity_) {
        case Humidity::dew_point: {
            Mean mean;
            for (auto row = first; row < last; ++row)
                mean.add(fao56_saturation_kpa(value(Weather::dew_point, row) - zero_celsius_k),
                         seconds(row));
            return if_enough(mean, 1);
        }
        case Humidity::vapour_pressure:
            return if_enough(mean_of(Weather::vapour_pressure, first, last), 1 / hpa_per_kpa);
        case Humidity::relative:
            return if_enough(mean_of(Weather::relative_humidity, first, last),
                             mean_saturation_kpa(day.min_celsius, day.max_celsius));
        case Humidity::extremes:
            break;
    }
    double most = -1, least = 2, known_s = 0;
    for (auto row = first; row < last; ++row) {
        const double high = value(most_humid_, row), low = value(least_humid_, row);
        if (std::isnan(high + low)) continue;
        most = std::max(most, high);
        least = std::min(least, low);
        known_s += seconds(row);
    }
    if (known_s < needed_s) return nan_value;
    return fao56_vapour_pressure_kpa(day.min_celsius, day.max_celsius, most * percent,
                                     least * percent);
}

/// The share of a day's light that falls on rows with a global, by the height of the sun alone.
double Builder::measured_share(const TimeSpan& span) const {
    double all = 0, measured = 0;
    for (double utc = span.begin + look_s / 2; utc < span.end; utc += look_s) {
        const double sine = std::max(0.0, dot(sun_direction(track_.at(utc)), up_));
        const auto row = record_.at(utc);
        all += sine;
        if (row && !std::isnan(value(Weather::global, *row))) measured += sine;
    }
    return measured / all;
}

double Builder::relative_sunlight(std::size_t first, std::size_t last, const TimeSpan& span,
                                  const CivilDate& date) const {
    if (has(Weather::global)) {
        const double share = measured_share(span);
        if (!(share >= air_day_needs)) return nan_value;
        Mean mean;
        for (auto row = first; row < last; ++row) {
            const double global = value(Weather::global, row);
            mean.add(global < 0 ? 0 : global,
                     seconds(row));  // sensors show a little below 0 at night
        }
        return mean.sum / share / joules_per_mj /
               daily_clear_mj_m2(date, station_.latitude_rad, station_.height_m);
    }
    if (!has(Weather::cloud)) return otherwise_(date);
    const auto mean = mean_of(Weather::cloud, first, last);
    return mean.seconds < air_day_needs * seconds_per_day ? nan_value
                                                          : 1 - (1 - overcast) * mean.value();
}

/// NaN in what is not known.
DailyAir Builder::of_day(const CivilDate& date) const {
    const auto utc = span_of(DayPart{date}, times_.zone, station_.longitude_rad);
    const TimeSpan span{utc.begin, utc.end};
    const auto before = [](const TimeSpan& row, UtcSeconds t) {
        return (row.begin + row.end) / 2 < t;
    };
    const auto& rows = record_.intervals;
    const auto first = static_cast<std::size_t>(
        std::lower_bound(rows.begin(), rows.end(), span.begin, before) - rows.begin());
    const auto last = static_cast<std::size_t>(
        std::lower_bound(rows.begin(), rows.end(), span.end, before) - rows.begin());
    DailyAir day{date, std::numeric_limits<double>::infinity(),
                 -std::numeric_limits<double>::infinity(), nan_value, nan_value};
    double known_s = 0;
    for (auto row = first; row < last; ++row) {
        const double high = value(highest_, row), low = value(lowest_, row);
        if (std::isnan(high + low)) continue;
        day.max_celsius = std::max(day.max_celsius, high - zero_celsius_k);
        day.min_celsius = std::min(day.min_celsius, low - zero_celsius_k);
        known_s += seconds(row);
    }
    if (known_s < air_day_needs * (span.end - span.begin)) return day;
    day.vapour_kpa = vapour_kpa(first, last, day);
    day.relative_sunlight = relative_sunlight(first, last, span, date);
    return day;
}

}  // namespace

const DailyAir* DailyNet::on(const CivilDate& date) const {
    const auto found =
        std::lower_bound(days.begin(), days.end(), date,
                         [](const DailyAir& day, const CivilDate& d) { return day.date < d; });
    return found != days.end() && found->date == date ? &*found : nullptr;
}

double daily_net_longwave_w_m2(DailyMethod method, const DailyAir& day, double rise_m,
                               double lapse_k_m) {
    const double cooler_k = lapse_k_m * rise_m;
    const double low = day.min_celsius - cooler_k, high = day.max_celsius - cooler_k;
    // At the station itself the vapour stays as it was, to the bit.
    const double share = cooler_k == 0 ? 1
                                       : mean_saturation_kpa(low, high) /
                                             mean_saturation_kpa(day.min_celsius, day.max_celsius);
    const auto up = method == DailyMethod::fao56 ? fao56_net_longwave_mj_m2_day
                                                 : asce2005_net_longwave_mj_m2_day;
    return -up(low, high, day.vapour_kpa * share, day.relative_sunlight) * joules_per_mj /
           seconds_per_day;
}

double daily_clear_mj_m2(const CivilDate& date, double latitude_rad, double height_m) {
    return fao56_clear_share(height_m) *
           fao56_extraterrestrial_mj_m2_day(day_of_year(date), latitude_rad);
}

std::vector<CivilDate> dates_of(const TimePlan& times) {
    std::set<CivilDate> dates;
    for (const auto& period : times.periods)
        for (const auto& day : period.days) dates.insert(day.date);
    return {dates.begin(), dates.end()};
}

DailyRecord daily_air(const WeatherRecord& record, const Station& station, const TimePlan& times,
                      const std::function<double(const CivilDate&)>& otherwise) {
    return Builder(record, station, times, otherwise).built();
}

}  // namespace sunbudget
