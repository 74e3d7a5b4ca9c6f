#pragma once

#include <functional>
#include <vector>

#include "sunbudget/model/sky.hpp"
#include "sunbudget/model/time_plan.hpp"
#include "sunbudget/model/weather_record.hpp"

namespace sunbudget {

/// The clear sky's light on the station over the sunlit part of an interval, J m-2.
struct ClearSums {
    double lit_s = 0, extraterrestrial = 0, direct = 0, diffuse = 0, clean_direct = 0,
           most_direct = 0;
    double beam = 0;       ///< facing the sun
    double low_sun_s = 0;  ///< below 5 degrees
};

/// The clear sky and the sun over a station, on the days of a run.
class StationSky {
  public:
    /// `times` outlives it.
    StationSky(const Station& station, const Sky& clear, const TimePlan& times);

    /// A short stretch of time with the sun over the station.
    struct Piece {
        UtcSeconds middle_utc;
        double s;
        SunState sun;
        double sine;  ///< of the sun's elevation
    };
    void each_piece(const TimeSpan& span, const std::function<void(const Piece&)>& visit) const;
    /// The clear sky's beam on the horizontal and sky light of a piece, J m-2.
    struct Light {
        double direct, diffuse;
    };
    [[nodiscard]] Light clear_light(const Piece& piece) const;
    [[nodiscard]] ClearSums clear_sums(const TimeSpan& span) const;
    /// When the sun is up.
    [[nodiscard]] std::vector<TimeSpan> sunlit(const TimeSpan& span) const;
    [[nodiscard]] double sunset_angle_rad(UtcSeconds utc) const;
    [[nodiscard]] TimeSpan span_of_day(const CivilDate& date) const;

  private:
    [[nodiscard]] SkyMoment moment(const Sky& sky, const Piece& piece) const;

    Station station_;
    Sky clear_, clean_, air_;
    const TimePlan& times_;
    SunTrack track_;
    double pressure_;
};

}  // namespace sunbudget
