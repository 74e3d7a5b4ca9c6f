#pragma once

#include <optional>
#include <string>
#include <utility>
#include <vector>

#include "sunbudget/base/time.hpp"
#include "sunbudget/base/units.hpp"

namespace sunbudget {

/// A part of one day by the clock of the run's zone: [begin_s, end_s) in seconds from midnight.
/// An end of 86400 means the end of the day, also where that day has 23 or 25 hours.
struct DayPart {
    CivilDate date;
    double begin_s = 0;
    double end_s = seconds_per_day;
    double weight = 1;  ///< how many days it stands for
};

/// One output band: the days it sums over.
struct Period {
    std::string name;           ///< what the band is called: "2025-06", "2025", "heat wave"
    std::vector<DayPart> days;  ///< in order, at least one
    double duration_s = 0;      ///< the hours summed, night included
};

enum class Totals { whole, hour, day, month, season, year };

struct NamedSpan {
    std::string name;
    CivilDate from, to;  ///< both inclusive
};

/// The hours of each day that count, [0, 24] by default.
struct DailyWindow {
    double begin_h = 0;
    double end_h = 24;
};

/// When a run looks at the sun: one instant, or periods walked at a step.
struct TimePlan {
    std::optional<UtcSeconds> instant;  ///< periods are empty then
    std::vector<Period> periods;
    Zone zone;
    double step_s = 600;

    [[nodiscard]] std::size_t bands() const { return instant ? 1 : periods.size(); }
    /// First and last moment at any longitude on Earth, a day of margin included: for the sun track.
    [[nodiscard]] UtcSeconds earliest() const;
    [[nodiscard]] UtcSeconds latest() const;
};

/// Cuts [from, to] (inclusive) into periods. Hours are the clock's, the last one shorter where the daily window
/// ends within it. Seasons are the meteorological ones, December to
/// February and so on; a part of a month, season or year at either end of the span makes a shorter
/// period whose name gives its dates.
[[nodiscard]] std::vector<Period> periods_of(CivilDate from, CivilDate to, Totals totals,
                                             DailyWindow hours, const Zone& zone);
/// Replaces the days of each month of a period by one, with the weight of the days it stands for: the
/// day whose declination is nearest to the month's mean.
/// source  Klein 1977, Solar Energy 19, 325-329: 17 Jan, 16 Feb, 16 Mar, 15 Apr, 15 May, 11 Jun, 17 Jul,
///         16 Aug, 15 Sep, 15 Oct, 14 Nov, 10 Dec
[[nodiscard]] Period with_mid_month_days(const Period& period);

/// The same for spans named by the user.
[[nodiscard]] std::vector<Period> periods_of(const std::vector<NamedSpan>& spans, DailyWindow hours,
                                             const Zone& zone);

/// The moments at which a part of a day begins and ends at a longitude.
struct UtcSpan {
    UtcSeconds begin = 0;
    UtcSeconds end = 0;
};
[[nodiscard]] UtcSpan span_of(const DayPart& part, const Zone& zone, double longitude_rad);

}  // namespace sunbudget
