#include "sunbudget/model/time_plan.hpp"

#include <fmt/format.h>

#include <algorithm>
#include <array>
#include <cmath>
#include <numbers>

#include "sunbudget/base/error.hpp"
#include "sunbudget/physics/sun.hpp"

namespace sunbudget {

namespace {

/// The first day that no longer belongs to the month, season or year of `date`.
CivilDate end_of_bin(const CivilDate& date, Totals totals) {
    switch (totals) {
        case Totals::hour:
        case Totals::day:
            return next_day(date);
        case Totals::month:
            return date.month == 12 ? CivilDate{date.year + 1, 1, 1}
                                    : CivilDate{date.year, date.month + 1, 1};
        case Totals::season: {
            const int first = date.month / 3 * 3 + 3;  // 3, 6, 9, 12 or, for December, 15
            return first > 12 ? CivilDate{date.year + 1, first - 12, 1}
                              : CivilDate{date.year, first, 1};
        }
        case Totals::year:
            return {date.year + 1, 1, 1};
        case Totals::whole:
            break;
    }
    return {9999, 12, 31};
}

/// The first day of the bin that ends before `end`.
CivilDate start_of_bin(const CivilDate& date, Totals totals) {
    switch (totals) {
        case Totals::hour:
        case Totals::day:
            return date;
        case Totals::month:
            return {date.year, date.month, 1};
        case Totals::season: {
            const int first = date.month / 3 * 3;  // 0 stands for the December before
            return first == 0 ? CivilDate{date.year - 1, 12, 1} : CivilDate{date.year, first, 1};
        }
        case Totals::year:
            return {date.year, 1, 1};
        case Totals::whole:
            break;
    }
    return date;
}

std::string span_name(const CivilDate& from, const CivilDate& to) {
    return from == to ? format_date(from) : format_date(from) + " to " + format_date(to);
}

/// A whole month or year goes by its own name, anything else by its days.
std::string bin_name(const CivilDate& from, const CivilDate& end, Totals totals) {
    const CivilDate last = civil_from_days(days_from_civil(end) - 1);
    const bool whole = from == start_of_bin(from, totals) && end == end_of_bin(from, totals);
    if (!whole || totals == Totals::whole) return span_name(from, last);
    switch (totals) {
        case Totals::month:
            return fmt::format("{:04}-{:02}", from.year, from.month);
        case Totals::season:
            return fmt::format("{:04}-{:02} to {:04}-{:02}", from.year, from.month, last.year,
                               last.month);
        case Totals::year:
            return fmt::format("{:04}", from.year);
        default:
            return span_name(from, last);
    }
}

Period period_of(std::string name, const CivilDate& from, const CivilDate& end, DailyWindow hours,
                 const Zone& zone) {
    Period period{std::move(name), {}, 0};
    for (CivilDate day = from; day < end; day = next_day(day)) {
        const DayPart part{day, hours.begin_h * 3600, hours.end_h * 3600};
        const auto span = span_of(part, zone, 0);
        period.duration_s += (span.end - span.begin) * part.weight;
        period.days.push_back(part);
    }
    return period;
}

/// The hours of one day, named by their beginning.
void add_hours(std::vector<Period>& periods, const CivilDate& day, DailyWindow hours,
               const Zone& zone) {
    for (double begin_h = hours.begin_h; begin_h < hours.end_h; begin_h += 1) {
        const DailyWindow one{begin_h, std::min(begin_h + 1, hours.end_h)};
        const auto minutes = static_cast<int>(std::lround(begin_h * 60));
        periods.push_back(
            period_of(fmt::format("{}T{:02}:{:02}", format_date(day), minutes / 60, minutes % 60),
                      day, next_day(day), one, zone));
    }
}

}  // namespace

UtcSeconds TimePlan::earliest() const {
    if (instant) return *instant - seconds_per_day;
    double first = 1e18;
    for (const auto& period : periods)
        first = std::min(first, static_cast<double>(days_from_civil(period.days.front().date)));
    return (first - 2) * seconds_per_day;
}

UtcSeconds TimePlan::latest() const {
    if (instant) return *instant + seconds_per_day;
    double last = -1e18;
    for (const auto& period : periods)
        last = std::max(last, static_cast<double>(days_from_civil(period.days.back().date)));
    return (last + 3) * seconds_per_day;
}

std::vector<Period> periods_of(CivilDate from, CivilDate to, Totals totals, DailyWindow hours,
                               const Zone& zone) {
    const CivilDate end = next_day(to);
    std::vector<Period> periods;
    for (CivilDate start = from; start < end;) {
        if (totals == Totals::hour) {
            add_hours(periods, start, hours, zone);
            start = next_day(start);
            continue;
        }
        const CivilDate stop =
            std::min(end, totals == Totals::whole ? end : end_of_bin(start, totals));
        periods.push_back(period_of(bin_name(start, stop, totals), start, stop, hours, zone));
        start = stop;
    }
    return periods;
}

Period with_mid_month_days(const Period& period) {
    constexpr std::array mean_day{17, 16, 16, 15, 15, 11, 17, 16, 15, 15, 14, 10};
    Period thinned{period.name, {}, period.duration_s};
    for (const auto& day : period.days) {
        const auto& date = day.date;
        const bool same_month = !thinned.days.empty() &&
                                thinned.days.back().date.year == date.year &&
                                thinned.days.back().date.month == date.month;
        if (same_month) {
            thinned.days.back().weight += day.weight;
            continue;
        }
        thinned.days.push_back(day);
        thinned.days.back().date.day = mean_day[static_cast<std::size_t>(date.month - 1)];
    }
    return thinned;
}

std::vector<Period> periods_of(const std::vector<NamedSpan>& spans, DailyWindow hours,
                               const Zone& zone) {
    std::vector<Period> periods;
    for (const auto& span : spans)
        periods.push_back(period_of(span.name, span.from, next_day(span.to), hours, zone));
    return periods;
}

UtcSpan span_of(const DayPart& part, const Zone& zone, double longitude_rad) {
    const auto moment = [&](double seconds) {
        if (seconds <= 0) return zone.day_start(part.date, longitude_rad);
        if (seconds >= seconds_per_day) return zone.day_start(next_day(part.date), longitude_rad);
        try {
            return zone.to_utc(part.date, seconds, longitude_rad);
        } catch (const Error&) {
            // A clock change skips or repeats just this moment: a daily window is no reason to stop,
            // it keeps its distance from midnight.
            return zone.day_start(part.date, longitude_rad) + seconds;
        }
    };
    UtcSpan span{moment(part.begin_s), moment(part.end_s)};
    if (zone.kind() == ZoneKind::solar_true) {
        span.begin = utc_from_true_solar(span.begin);
        span.end = utc_from_true_solar(span.end);
    }
    return span;
}

}  // namespace sunbudget
