#pragma once

#include <array>
#include <cstddef>
#include <functional>
#include <string>
#include <vector>

#include "sunbudget/base/time.hpp"
#include "sunbudget/model/time_plan.hpp"
#include "sunbudget/model/weather_record.hpp"

namespace sunbudget {

/// Methods that give the net longwave of whole days and nothing else. In the order of their rows among the
/// methods, family "longwave_daily".
enum class DailyMethod { fao56, asce2005 };

/// A day's air at the height of its station, in the papers' own units.
struct DailyAir {
    CivilDate date;
    double min_celsius = 0;
    double max_celsius = 0;
    double vapour_kpa = 0;
    double relative_sunlight = 1;  ///< Rs/Rso: the day's sunlight over a clear day's
};

/// Net longwave by one of those methods, in the place of what comes down and goes up.
struct DailyNet {
    DailyMethod method = DailyMethod::fao56;
    std::vector<DailyAir> days;  ///< in order; days that are not known are not there

    /// Nothing for a day that is not there.
    [[nodiscard]] const DailyAir* on(const CivilDate& date) const;
};

/// A day's mean, downward positive: mostly negative.
///
/// in      rise_m     from the station up to the ground, lapse_k_m how much colder for each metre; relative
///                    humidity and relative sunlight are kept
/// errors  none; NaN in gives NaN out
/// source  physics/fao56_balance.hpp; the move to another height is none of the papers'
[[nodiscard]] double daily_net_longwave_w_m2(DailyMethod method, const DailyAir& day, double rise_m,
                                             double lapse_k_m);

/// Clear-sky light of a day after both papers, Rso = (0.75 + 2e-5 z) Ra.
[[nodiscard]] double daily_clear_mj_m2(const CivilDate& date, double latitude_rad, double height_m);

/// Every day of a run once, in order.
[[nodiscard]] std::vector<CivilDate> dates_of(const TimePlan& times);

/// Days of a weather table, as the daily methods take them.
struct DailyRecord {
    std::vector<DailyAir> days;
    std::string humidity_from, sunlight_from;  ///< in words
    std::size_t left_out = 0;                  ///< days that lack something
    std::array<bool, weather_quantities> used{};
};

/// Takes the run's days from a record, by the clock of the run at the station:
///
/// - temperature: the highest and the lowest of the day's rows, of the columns of extremes where there are any
/// - vapour, in FAO's order of preference: dew point; the day's highest and lowest relative humidity; vapour
///   pressure; mean relative humidity
/// - relative sunlight: global, its gaps as bright as the rest of the day; else the mean cloud; else `otherwise`
///
/// A day needs 90 % of its hours, and of its light.
///
/// errors  Error(input) where the table cannot give what the methods need
[[nodiscard]] DailyRecord daily_air(const WeatherRecord& record, const Station& station,
                                    const TimePlan& times,
                                    const std::function<double(const CivilDate&)>& otherwise);

}  // namespace sunbudget
