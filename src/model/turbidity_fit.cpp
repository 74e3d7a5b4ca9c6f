#include "sunbudget/model/turbidity_fit.hpp"

#include <algorithm>
#include <cmath>
#include <limits>
#include <map>
#include <set>

#include "sunbudget/base/error.hpp"
#include "sunbudget/base/units.hpp"
#include "sunbudget/physics/air_mass.hpp"
#include "sunbudget/physics/clear_sky.hpp"
#include "sunbudget/physics/sun.hpp"
#include "sunbudget/physics/sun_place.hpp"

namespace sunbudget {

namespace {

constexpr double hour_s = 3600, sample_s = 300;
constexpr double lowest_turbidity = 1, highest_turbidity = 9;

double value_of(const WeatherRecord& record, Weather quantity, std::size_t row) {
    if (!record.has(quantity)) return std::numeric_limits<double>::quiet_NaN();
    const double value = record.values(quantity)[row];
    return value < 0 ? 0 : value;  // NaN stays
}

/// Adds a row to its hour; the means are sums until the hour is closed.
void add_row(SunHour& hour, const WeatherRecord& record, const Station& station,
             const SunTrack& track, std::size_t row) {
    const auto& span = record.intervals[row];
    const double count = std::max(1.0, std::ceil((span.end - span.begin) / sample_s));
    const double step_s = (span.end - span.begin) / count;
    double sines = 0;
    for (double i = 0; i < count; ++i) {
        const auto sun = track.at(span.begin + (i + 0.5) * step_s);
        const double sine = sin_elevation(sun, station.latitude_rad, station.longitude_rad);
        hour.samples.push_back({extraterrestrial_normal(sun.distance_au), sine, step_s, row});
        hour.lowest_sine = std::min(hour.lowest_sine, sine);
        sines += sine / count;
    }
    const double length_s = span.end - span.begin;
    const double beam = value_of(record, Weather::beam, row),
                 diffuse = value_of(record, Weather::diffuse, row);
    const double parts = beam * sines + diffuse;
    hour.beam_w_m2 += beam * length_s;
    hour.diffuse_w_m2 += diffuse * length_s;
    hour.global_w_m2 +=
        (std::isnan(parts) ? value_of(record, Weather::global, row) : parts) * length_s;
}

double seconds_of(const SunHour& hour) {
    double seconds = 0;
    for (const auto& sample : hour.samples) seconds += sample.seconds;
    return seconds;
}

/// How far the rows of an hour stray from the model's course, over their mean.
double unsteadiness(const SunHour& hour, const WeatherRecord& record, double turbidity,
                    double pressure) {
    double squares = 0, sum = 0;
    for (const auto& sample : hour.samples) {
        const auto clear = esra2000(sample.extraterrestrial_normal_w_m2, std::asin(sample.sine),
                                    turbidity, pressure);
        const double beam = value_of(record, Weather::beam, sample.row),
                     diffuse = value_of(record, Weather::diffuse, sample.row);
        const double parts = beam * sample.sine + diffuse;
        const double global =
            std::isnan(parts) ? value_of(record, Weather::global, sample.row) : parts;
        const double modelled =
            clear.beam_normal_w_m2 * sample.sine + clear.diffuse_horizontal_w_m2;
        squares += (global - modelled) * (global - modelled);
        sum += global;
    }
    const auto n = static_cast<double>(hour.samples.size());
    return sum > 0 ? std::sqrt(squares / n) / (sum / n) : 1;
}

double quantile(std::vector<double>& values, double share) {
    std::sort(values.begin(), values.end());
    const double at = share * static_cast<double>(values.size() - 1);
    const auto below = static_cast<std::size_t>(at);
    const auto above = std::min(below + 1, values.size() - 1);
    return values[below] + (at - static_cast<double>(below)) * (values[above] - values[below]);
}

}  // namespace

std::vector<SunHour> sun_hours(const WeatherRecord& record, const Station& station,
                               double lowest_elevation_rad) {
    if (!record.has(Weather::global) && !record.has(Weather::beam))
        throw Error(Cause::input, "the table has neither global nor beam light", {},
                    "name its column: weather.columns: {global: NAME}");
    if (record.interval_s > hour_s)
        throw Error(Cause::input, "the rows stand for more than an hour each", {},
                    "turbidity shows in hours, not in days");
    const SunTrack track(record.intervals.front().begin - hour_s,
                         record.intervals.back().end + hour_s);
    std::vector<SunHour> hours;
    for (std::size_t first = 0; first < record.intervals.size();) {
        const auto hour_of = [&](std::size_t row) {
            return std::floor((record.intervals[row].begin + record.intervals[row].end) / 2 /
                              hour_s);
        };
        SunHour hour;
        hour.middle = (hour_of(first) + 0.5) * hour_s;
        std::size_t last = first;
        for (; last < record.intervals.size() && hour_of(last) == hour_of(first); ++last)
            add_row(hour, record, station, track, last);
        first = last;
        const double seconds = seconds_of(hour);
        constexpr double whole = 0.95;
        const bool known = !std::isnan(hour.global_w_m2) || !std::isnan(hour.beam_w_m2);
        if (hour.lowest_sine < std::sin(lowest_elevation_rad) || seconds < whole * hour_s || !known)
            continue;
        for (auto* value : {&hour.global_w_m2, &hour.beam_w_m2, &hour.diffuse_w_m2})
            *value /= seconds;
        hours.push_back(std::move(hour));
    }
    return hours;
}

HourLight clear_hour(const SunHour& hour, double turbidity, double pressure_ratio) {
    HourLight sum;
    double seconds = 0;
    for (const auto& sample : hour.samples) {
        const auto clear = esra2000(sample.extraterrestrial_normal_w_m2, std::asin(sample.sine),
                                    turbidity, pressure_ratio);
        sum.beam_w_m2 += clear.beam_normal_w_m2 * sample.seconds;
        sum.diffuse_w_m2 += clear.diffuse_horizontal_w_m2 * sample.seconds;
        sum.global_w_m2 +=
            (clear.beam_normal_w_m2 * sample.sine + clear.diffuse_horizontal_w_m2) * sample.seconds;
        seconds += sample.seconds;
    }
    return {sum.global_w_m2 / seconds, sum.beam_w_m2 / seconds, sum.diffuse_w_m2 / seconds};
}

double fitted_turbidity(std::span<const SunHour> hours, double pressure_ratio, FitTo to) {
    const auto squares = [&](double turbidity) {
        double sum = 0;
        for (const auto& hour : hours) {
            const auto clear = clear_hour(hour, turbidity, pressure_ratio);
            const double off = to == FitTo::beam ? clear.beam_w_m2 - hour.beam_w_m2
                                                 : clear.global_w_m2 - hour.global_w_m2;
            sum += off * off;
        }
        return sum;
    };
    // Light falls with turbidity all the way: the squares have one valley.
    constexpr double golden = 0.6180339887498949;
    double low = lowest_turbidity, high = highest_turbidity;
    double a = high - golden * (high - low), b = low + golden * (high - low);
    double at_a = squares(a), at_b = squares(b);
    constexpr double fine_enough = 1e-4;
    while (high - low > fine_enough) {
        if (at_a < at_b) {
            high = b, b = a, at_b = at_a;
            a = high - golden * (high - low), at_a = squares(a);
        } else {
            low = a, a = b, at_a = at_b;
            b = low + golden * (high - low), at_b = squares(b);
        }
    }
    return (low + high) / 2;
}

TurbidityFit fit_turbidity(const WeatherRecord& record, const Station& station) {
    constexpr double lowest_elevation_rad = rad_from_deg(10), highest_clear = 7, edge = 0.01,
                     steady = 0.5, diffuse_within = 0.5, course_within = 0.05, short_row_s = 1200;
    TurbidityFit fit;
    fit.to = record.has(Weather::beam) ? FitTo::beam : FitTo::global;
    const double pressure = pressure_ratio(station.height_m);
    struct Candidate {
        UtcSeconds middle;
        double turbidity;
    };
    std::vector<Candidate> candidates;
    for (const auto& hour : sun_hours(record, station, lowest_elevation_rad)) {
        ++fit.hours;
        if (std::isnan(fit.to == FitTo::beam ? hour.beam_w_m2 : hour.global_w_m2)) continue;
        const double turbidity = fitted_turbidity({&hour, 1}, pressure, fit.to);
        if (turbidity < lowest_turbidity + edge || turbidity > highest_clear) continue;
        const auto clear = clear_hour(hour, turbidity, pressure);
        if (std::abs(hour.diffuse_w_m2 - clear.diffuse_w_m2) > diffuse_within * clear.diffuse_w_m2)
            continue;
        if (record.interval_s <= short_row_s && !std::isnan(hour.global_w_m2) &&
            unsteadiness(hour, record, turbidity, pressure) > course_within)
            continue;
        candidates.push_back({hour.middle, turbidity});
    }
    std::array<std::vector<double>, 12> by_month;
    std::array<std::set<CivilDate>, 12> days;
    for (std::size_t i = 0; i < candidates.size(); ++i) {
        const auto steady_beside = [&](std::size_t j) {
            return j < candidates.size() &&
                   std::abs(candidates[j].middle - candidates[i].middle) <= hour_s + 1 &&
                   std::abs(candidates[j].turbidity - candidates[i].turbidity) < steady;
        };
        if (!steady_beside(i + 1) && !(i > 0 && steady_beside(i - 1))) continue;
        const double longitude_rad = station.longitude_rad;
        const auto date = Zone::parse("solar-mean").local(candidates[i].middle, longitude_rad).date;
        by_month[static_cast<std::size_t>(date.month - 1)].push_back(candidates[i].turbidity);
        days[static_cast<std::size_t>(date.month - 1)].insert(date);
        ++fit.clear_hours;
    }
    for (std::size_t m = 0; m < by_month.size(); ++m) {
        auto& values = by_month[m];
        if (values.empty()) continue;
        fit.months[m] = MonthTurbidity{quantile(values, 0.5), quantile(values, 1.0 / 6),
                                       quantile(values, 5.0 / 6), values.size(), days[m].size()};
    }
    return fit;
}

}  // namespace sunbudget
