#include "sunbudget/model/sun_table.hpp"

#include <algorithm>
#include <cmath>

#include "sunbudget/physics/air_mass.hpp"
#include "sunbudget/physics/clear_sky.hpp"
#include "sunbudget/physics/integrate.hpp"
#include "sunbudget/physics/sun_day.hpp"
#include "sunbudget/physics/sun_place.hpp"

namespace sunbudget {

namespace {

UtcSpan whole_day(const CivilDate& date, const Zone& zone, double longitude_rad) {
    return span_of(DayPart{date, 0, seconds_per_day}, zone, longitude_rad);
}

constexpr double sea_level_hpa = 1013.25;

/// Direct, diffuse and reflected light on the place's slope, as the rasters have it: level ground gets
/// exactly the horizontal light.
double on_slope_w_m2(const SunPlace& place, const SkyMoment& light, const Horizontal& sun) {
    const double sine = std::sin(sun.elevation_rad);
    const double facing =
        std::max(0.0, sine * std::cos(place.slope_rad) +
                          std::cos(sun.elevation_rad) * std::sin(place.slope_rad) *
                              std::cos(sun.azimuth_rad - place.slope_azimuth_rad));
    const double sky_view = (1 + std::cos(place.slope_rad)) / 2;
    const double even = light.diffuse_w_m2 - light.parts.circumsolar_normal_w_m2 * sine;
    const double global = light.beam_normal_w_m2 * sine + light.diffuse_w_m2;
    return (light.beam_normal_w_m2 + light.parts.circumsolar_normal_w_m2) * facing +
           even * sky_view + light.parts.horizon_w_m2 * std::sin(place.slope_rad) +
           (1 - sky_view) * place.ground_albedo * global;
}

void add_light(const SunPlace& place, const SunTrack& track, const UtcSpan& span, double step_s,
               SunDayRow& row) {
    const double pressure = pressure_ratio(place.height_m);
    for_each_sunlit_step(
        track, span.begin, span.end, step_s, place.latitude_rad, place.longitude_rad,
        [&](const SunSample& sample) {
            const auto seen =
                horizontal(sample.sun, place.latitude_rad, place.longitude_rad, place.height_m);
            const double outside = extraterrestrial_normal(sample.sun.distance_au);
            const double elevation_rad = std::asin(sample.sin_elevation);
            const auto light = sky_moment(place.sky, {sample.utc, row.date.month, outside,
                                                      elevation_rad, place.height_m, pressure});
            row.extraterrestrial_j_m2 += outside * sample.sin_elevation * sample.duration_s;
            row.direct_j_m2 += light.beam_normal_w_m2 * sample.sin_elevation * sample.duration_s;
            row.diffuse_j_m2 += light.diffuse_w_m2 * sample.duration_s;
            row.on_slope_j_m2 +=
                on_slope_w_m2(place, light, {elevation_rad, seen.azimuth_rad}) * sample.duration_s;
        });
}

}  // namespace

SunMoment sun_moment(const SunPlace& place, const Zone& zone, UtcSeconds utc) {
    const auto sun = sun_state(utc);
    const auto seen = horizontal(sun, place.latitude_rad, place.longitude_rad, place.height_m);
    const double pressure = pressure_ratio(place.height_m);
    SunMoment moment;
    moment.utc = utc;
    moment.elevation_rad = seen.elevation_rad;
    moment.elevation_refracted_rad =
        seen.elevation_rad + refraction(seen.elevation_rad, sea_level_hpa * pressure);
    moment.azimuth_rad = seen.azimuth_rad;
    moment.distance_au = sun.distance_au;
    moment.extraterrestrial_w_m2 = extraterrestrial_normal(sun.distance_au);
    if (moment.elevation_refracted_rad > 0)
        moment.air_mass = relative_air_mass(moment.elevation_refracted_rad);
    const int month = zone.local(utc, place.longitude_rad).date.month;
    if (seen.elevation_rad <= 0) return moment;
    const auto light = sky_moment(place.sky, {utc, month, moment.extraterrestrial_w_m2,
                                              seen.elevation_rad, place.height_m, pressure});
    moment.beam_w_m2 = light.beam_normal_w_m2;
    moment.diffuse_w_m2 = light.diffuse_w_m2;
    moment.global_w_m2 = light.diffuse_w_m2 + light.beam_normal_w_m2 * std::sin(seen.elevation_rad);
    moment.on_slope_w_m2 = on_slope_w_m2(place, light, seen);
    return moment;
}

std::vector<SunDayRow> sun_days(const SunPlace& place, const Zone& zone, CivilDate from,
                                CivilDate to, double step_s) {
    const double margin_s = 2 * seconds_per_day;
    const SunTrack track(zone.day_start(from, place.longitude_rad) - margin_s,
                         zone.day_start(next_day(to), place.longitude_rad) + margin_s);
    std::vector<SunDayRow> rows;
    for (CivilDate date = from; date <= to; date = next_day(date)) {
        const auto span = whole_day(date, zone, place.longitude_rad);
        const auto day =
            sun_day(track, span.begin, span.end, place.latitude_rad, place.longitude_rad);
        const auto seen = sun_day(track, span.begin, span.end, place.latitude_rad,
                                  place.longitude_rad, almanac_horizon_rad);
        SunDayRow row;
        row.date = date;
        row.sunrise = day.sunrise;
        row.transit = day.transit;
        row.sunset = day.sunset;
        row.sunrise_apparent = seen.sunrise;
        row.sunset_apparent = seen.sunset;
        row.day_length_s = day.day_length_s;
        add_light(place, track, span, step_s, row);
        const UtcSeconds noon = day.transit.value_or((span.begin + span.end) / 2);
        row.transit_elevation_rad =
            horizontal(track.at(noon), place.latitude_rad, place.longitude_rad, place.height_m)
                .elevation_rad;
        rows.push_back(row);
    }
    return rows;
}

std::vector<SunMoment> sun_moments(const SunPlace& place, const Zone& zone, CivilDate from,
                                   CivilDate to, double step_s) {
    const auto begin = whole_day(from, zone, place.longitude_rad).begin;
    const auto end = whole_day(to, zone, place.longitude_rad).end;
    std::vector<SunMoment> moments;
    for (long i = 0; begin + static_cast<double>(i) * step_s < end; ++i)
        moments.push_back(sun_moment(place, zone, begin + static_cast<double>(i) * step_s));
    return moments;
}

}  // namespace sunbudget
