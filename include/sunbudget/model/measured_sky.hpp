#pragma once

#include <cstddef>
#include <memory>
#include <string>
#include <vector>

#include "sunbudget/model/light_shares.hpp"
#include "sunbudget/model/sky.hpp"
#include "sunbudget/model/time_plan.hpp"
#include "sunbudget/model/weather_record.hpp"

namespace sunbudget {

/// A day whose record has less than this share of its clear-sky light is missing; else its gaps take the day's
/// own mean.
inline constexpr double day_needs = 0.9;
/// A month (or the part of one that a period holds) with fewer of its days is missing, and the period with
/// it; else the missing days take the mean of the month's others.
inline constexpr double month_needs = 0.8;

/// What a record makes of a run's light, in figures.
struct MeasuredReport {
    std::string from;                  ///< "global and diffuse", "cloud"
    std::size_t days = 0;              ///< of the run, with a sun over the station
    std::size_t days_missing = 0;      ///< by the rule
    std::size_t days_with_gaps = 0;    ///< filled by their own mean
    double gap_h = 0;                  ///< sunlit hours without a value, missing days included
    std::vector<TimeSpan> first_gaps;  ///< of them, ten at most
    std::size_t split_intervals = 0;   ///< where sky light was worked out from the global
    /// Global against beam on the horizontal plus diffuse, where all three are measured and the sun is above 5 degrees.
    struct {
        std::size_t intervals = 0;
        double global_mean_w_m2 = 0, difference_mean_w_m2 = 0, difference_rms_w_m2 = 0;
    } closure;
    double left_out_share =
        0;  ///< of the measured light: more than any sky gives at its sun (sensors at low sun)
};

/// The light of a run as a station measured it.
struct MeasuredSky {
    std::shared_ptr<const LightShares> shares;
    std::vector<bool> thin;  ///< by band: too little was measured
    MeasuredReport report;
};

/// Beam and sky light of a record as shares of the clear sky's at the station, interval by interval: at the
/// station itself the clear sky times the shares has exactly the measured means.
///
/// - beam and diffuse are taken as measured; where one is missing it follows from global and the other
/// - global alone is split at hourly or longer steps: rows of less than an hour by the share of their hour,
///   rows of 12 hours or more by the daily relation
/// - without sunlight the cloud column counts: hourly by Kasten & Czeplak, rows above 3 hours as period means
///
/// errors  Error(input) when the record has neither global, nor beam and diffuse, nor cloud; when
///         `stop_at_gaps` and the sun shines on a gap; when no band has enough
[[nodiscard]] MeasuredSky measured_sky(const WeatherRecord& record, const Station& station,
                                       const Sky& clear, const TimePlan& times, bool stop_at_gaps);

/// The record has what measured_sky needs.
[[nodiscard]] bool has_light(const WeatherRecord& record);

}  // namespace sunbudget
