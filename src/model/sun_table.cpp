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

}  // namespace

SunMoment sun_moment(const SunPlace& place, const Zone& zone, UtcSeconds utc) {
    const auto sun = sun_state(utc);
    const auto seen = horizontal(sun, place.latitude_rad, place.longitude_rad, place.height_m);
    const double pressure = pressure_ratio(place.height_m);
    SunMoment moment;
    moment.utc = utc;
    moment.elevation_rad = seen.elevation_rad;
    moment.elevation_refracted_rad = seen.elevation_rad + refraction(seen.elevation_rad, sea_level_hpa * pressure);
    moment.azimuth_rad = seen.azimuth_rad;
    moment.distance_au = sun.distance_au;
    moment.extraterrestrial_w_m2 = extraterrestrial_normal(sun.distance_au);
    if (moment.elevation_refracted_rad > 0) moment.air_mass = relative_air_mass(moment.elevation_refracted_rad);
    const int month = zone.local(utc, place.longitude_rad).date.month;
    if (seen.elevation_rad <= 0) return moment;
    const auto light = sky_moment(place.sky, {utc, month, moment.extraterrestrial_w_m2, seen.elevation_rad, place.height_m, pressure});
    moment.beam_w_m2 = light.beam_normal_w_m2;
    moment.diffuse_w_m2 = light.diffuse_w_m2;
    moment.global_w_m2 = light.diffuse_w_m2 + light.beam_normal_w_m2 * std::sin(seen.elevation_rad);
    return moment;
}

std::vector<SunDayRow> sun_days(const SunPlace& place, const Zone& zone, CivilDate from, CivilDate to, double step_s) {
    const double margin_s = 2 * seconds_per_day;
    const SunTrack track(zone.day_start(from, place.longitude_rad) - margin_s,
                         zone.day_start(next_day(to), place.longitude_rad) + margin_s);
    const double pressure = pressure_ratio(place.height_m);
    std::vector<SunDayRow> rows;
    for (CivilDate date = from; date <= to; date = next_day(date)) {
        const auto span = whole_day(date, zone, place.longitude_rad);
        const auto day = sun_day(track, span.begin, span.end, place.latitude_rad, place.longitude_rad);
        const auto light = light_totals(track, span.begin, span.end, step_s, place.latitude_rad, place.longitude_rad,
                                        [&](UtcSeconds utc, double normal_w_m2, double elevation_rad) {
                                            const auto sky = sky_moment(place.sky, {utc, date.month, normal_w_m2, elevation_rad,
                                                                                    place.height_m, pressure});
                                            return ClearSky{sky.beam_normal_w_m2, sky.diffuse_w_m2};
                                        });
        SunDayRow row{date, day.sunrise, day.transit, day.sunset, day.day_length_s, 0,
                      light.extraterrestrial_j_m2, light.direct_j_m2, light.diffuse_j_m2};
        const UtcSeconds noon = day.transit.value_or((span.begin + span.end) / 2);
        row.transit_elevation_rad = horizontal(track.at(noon), place.latitude_rad, place.longitude_rad, place.height_m).elevation_rad;
        rows.push_back(row);
    }
    return rows;
}

std::vector<SunMoment> sun_moments(const SunPlace& place, const Zone& zone, CivilDate from, CivilDate to, double step_s) {
    const auto begin = whole_day(from, zone, place.longitude_rad).begin;
    const auto end = whole_day(to, zone, place.longitude_rad).end;
    std::vector<SunMoment> moments;
    for (long i = 0; begin + static_cast<double>(i) * step_s < end; ++i)
        moments.push_back(sun_moment(place, zone, begin + static_cast<double>(i) * step_s));
    return moments;
}

}  // namespace sunbudget
