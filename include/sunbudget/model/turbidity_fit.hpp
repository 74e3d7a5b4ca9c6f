#pragma once

#include <array>
#include <cstddef>
#include <optional>
#include <span>
#include <vector>

#include "sunbudget/model/weather_record.hpp"

namespace sunbudget {

/// An hour of a record with the sun up, and the sun over it.
struct SunHour {
    UtcSeconds middle = 0;
    /// The sun at the rows' middles, or at steps of 5 minutes in longer rows.
    struct Sample {
        double extraterrestrial_normal_w_m2, sine, seconds;
        std::size_t row;
    };
    std::vector<Sample> samples;
    double lowest_sine = 1;
    /// Means over the samples' time; NaN where not measured. Global is beam on the horizontal plus diffuse
    /// where both are.
    double global_w_m2 = 0, beam_w_m2 = 0, diffuse_w_m2 = 0;
};

/// The hours of a record: rows of at most an hour, the sun always above `lowest_elevation_rad`, every row of
/// the hour measured.
/// errors  Error(input) for rows longer than an hour and for a record without global and without beam
[[nodiscard]] std::vector<SunHour> sun_hours(const WeatherRecord& record, const Station& station,
                                             double lowest_elevation_rad);

/// Means of an hour under esra2000.
struct HourLight {
    double global_w_m2 = 0, beam_w_m2 = 0, diffuse_w_m2 = 0;
};
[[nodiscard]] HourLight clear_hour(const SunHour& hour, double turbidity, double pressure_ratio);

/// The turbidity from 1 to 9 under which esra2000 comes nearest (least squares) to the hours' global light, or
/// to their beam, which tells it best of a single hour.
enum class FitTo { global, beam };
[[nodiscard]] double fitted_turbidity(std::span<const SunHour> hours, double pressure_ratio,
                                      FitTo to);

/// Turbidity of a month of any year.
struct MonthTurbidity {
    double turbidity = 0;      ///< median of the clear hours
    double low = 0, high = 0;  ///< between them lie two thirds of the hours
    std::size_t hours = 0, days = 0;
};
struct TurbidityFit {
    std::array<std::optional<MonthTurbidity>, 12> months;
    std::size_t hours = 0, clear_hours = 0;
    FitTo to = FitTo::global;
};

/// Monthly Linke turbidity from the clear hours of a record. An hour is clear when the sun is above 10 degrees,
/// its fitted turbidity is between 1 and 7, that of an hour beside it on the same day differs by less than 0.5
/// (clouds change faster than air), where diffuse is measured it is within half of the model's, and where rows
/// are shorter than 20 minutes they follow the model's course within 5 %.
/// errors  as sun_hours
[[nodiscard]] TurbidityFit fit_turbidity(const WeatherRecord& record, const Station& station);

}  // namespace sunbudget
