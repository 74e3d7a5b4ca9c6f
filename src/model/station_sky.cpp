#include "station_sky.hpp"

#include <algorithm>
#include <cmath>

#include "sunbudget/physics/air_mass.hpp"
#include "sunbudget/physics/integrate.hpp"

namespace sunbudget {

namespace {

constexpr double piece_s = 300;  // the clear sky is smooth: finer changes no share by 0.1 %
constexpr double hour_s = 3600;
constexpr double clean_turbidity =
    2;  // the lower end of what is usual: the cleanest beam of a split
constexpr double air_alone =
    1;  // turbidity of air without water and dust: no measured beam is above

}  // namespace

StationSky::StationSky(const Station& station, const Sky& clear, const TimePlan& times)
    : station_(station),
      clear_(clear),
      clean_(ClearModel::esra2000),
      air_(ClearModel::esra2000),
      times_(times),
      track_(times.earliest() - 2 * seconds_per_day, times.latest() + 2 * seconds_per_day),
      pressure_(pressure_ratio(station.height_m)) {
    clean_[SkyParameter::turbidity].fill(clean_turbidity);
    air_[SkyParameter::turbidity].fill(air_alone);
    clean_.pressure = air_.pressure = clear.pressure;
    clear_.diffuse = DiffuseModel::liu_jordan1963;  // the parts are not asked for
}

void StationSky::each_piece(const TimeSpan& span,
                            const std::function<void(const Piece&)>& visit) const {
    const auto up = up_direction(station_.latitude_rad, station_.longitude_rad);
    const auto sine_at = [&](UtcSeconds utc) {
        return sin_elevation(track_.at(utc), station_.latitude_rad, station_.longitude_rad);
    };
    const auto add = [&](const TimeSpan& lit) {
        const double count = std::max(1.0, std::ceil((lit.end - lit.begin) / piece_s));
        const double step_s = (lit.end - lit.begin) / count;
        for (double i = 0; i < count; ++i) {
            const UtcSeconds middle = lit.begin + (i + 0.5) * step_s;
            const auto sun = track_.at(middle);
            const double sine = with_parallax(dot(sun_direction(sun), up), sun.distance_au);
            if (sine > 0) visit({middle, step_s, sun, sine});
        }
    };
    // Most intervals are day or night all through: the costly search is for the others.
    const bool is_short = span.end - span.begin <= hour_s;
    const double first = sine_at(span.begin), last = sine_at(span.end);
    constexpr double far_from_horizon = 0.2;  // the sine changes by 0.26 an hour at most
    if (is_short && first > far_from_horizon && last > far_from_horizon) return add(span);
    if (is_short && first < -far_from_horizon && last < -far_from_horizon) return;
    for (const auto& lit : sunlit(span)) add(lit);
}

SkyMoment StationSky::moment(const Sky& sky, const Piece& piece) const {
    const int month = times_.zone.local(piece.middle_utc, station_.longitude_rad).date.month;
    return sky_moment(sky, {piece.middle_utc, month, extraterrestrial_normal(piece.sun.distance_au),
                            std::asin(piece.sine), station_.height_m, pressure_});
}

StationSky::Light StationSky::clear_light(const Piece& piece) const {
    const auto clear = moment(clear_, piece);
    return {clear.beam_normal_w_m2 * piece.sine * piece.s, clear.diffuse_w_m2 * piece.s};
}

ClearSums StationSky::clear_sums(const TimeSpan& span) const {
    ClearSums sums;
    each_piece(span, [&](const Piece& piece) {
        const auto& [utc, s, sun, sine] = piece;
        const auto clear = moment(clear_, piece);
        const double e0 = extraterrestrial_normal(sun.distance_au);
        sums.lit_s += s;
        sums.extraterrestrial += e0 * sine * s;
        sums.direct += clear.beam_normal_w_m2 * sine * s;
        sums.diffuse += clear.diffuse_w_m2 * s;
        sums.beam += clear.beam_normal_w_m2 * s;
        sums.clean_direct += moment(clean_, piece).beam_normal_w_m2 * sine * s;
        sums.most_direct += moment(air_, piece).beam_normal_w_m2 * sine * s;
        constexpr double low_sine = 0.08716;  // sin 5 deg
        if (sine < low_sine) sums.low_sun_s += s;
    });
    return sums;
}

std::vector<TimeSpan> StationSky::sunlit(const TimeSpan& span) const {
    return sunlit_spans(track_, span.begin, span.end, station_.latitude_rad,
                        station_.longitude_rad);
}

double StationSky::sunset_angle_rad(UtcSeconds utc) const {
    return sunset_hour_angle_rad(station_.latitude_rad, track_.at(utc).declination_rad);
}

TimeSpan StationSky::span_of_day(const CivilDate& date) const {
    const auto span = span_of(DayPart{date}, times_.zone, station_.longitude_rad);
    return {span.begin, span.end};
}

}  // namespace sunbudget
