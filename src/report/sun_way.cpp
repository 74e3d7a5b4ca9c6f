#include "sun_way.hpp"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <numbers>

#include "sunbudget/base/units.hpp"

namespace sunbudget {

namespace {

constexpr double full_circle = 2 * std::numbers::pi;
constexpr double path_step_s = 600;

SunPlace place_of(const Run& run, const PixelAccount& account) {
    double height_m = run.constant_height_m;
    for (const auto& term : account.probe.terms())
        if (term.name == "height" && !std::isnan(term.value)) height_m = term.value;
    SunPlace place{account.place->latitude_rad, account.place->longitude_rad, height_m, run.sky};
    // The pixel's own is among the terms; the light beside the sun's way is open ground's.
    if (waits_for_ground(place.sky))
        place.sky[SkyParameter::ground_albedo].fill(place.ground_albedo);
    return place;
}

CivilDate middle_day(const TimePlan& times, std::size_t band, double longitude_rad) {
    if (times.instant) return times.zone.local(*times.instant, longitude_rad).date;
    const auto& days = times.periods[band].days;
    return days[days.size() / 2].date;
}

std::optional<bool> seen(const PixelAccount& account, const SunMoment& moment) {
    const auto horizon_rad = horizon_at(account, moment.azimuth_rad);
    return horizon_rad ? std::optional(moment.elevation_refracted_rad > *horizon_rad)
                       : std::nullopt;
}

}  // namespace

std::vector<SunWay> sun_ways(const Run& run, const PixelAccount& account, std::size_t most) {
    std::vector<SunWay> ways;
    if (!run.times || !account.place) return ways;
    const auto place = place_of(run, account);
    const auto& zone = run.times->zone;
    for (std::size_t band = 0; band < std::min(most, run.times->bands()); ++band) {
        const auto date = middle_day(*run.times, band, place.longitude_rad);
        SunWay way{band, sun_days(place, zone, date, date, path_step_s).front(), {}, {}, {}};
        for (const auto& moment : sun_moments(place, zone, date, date, path_step_s))
            if (moment.elevation_refracted_rad > 0) {
                way.moments.push_back(moment);
                way.seen.push_back(seen(account, moment));
            }
        if (run.times->instant) way.instant = sun_moment(place, zone, *run.times->instant);
        ways.push_back(std::move(way));
    }
    return ways;
}

std::optional<double> horizon_at(const PixelAccount& account, double azimuth_rad) {
    const auto& points = account.probe.horizon();
    if (points.empty()) return std::nullopt;
    const auto next = std::ranges::lower_bound(points, azimuth_rad, {}, &HorizonPoint::azimuth_rad);
    const auto& after = next == points.end() ? points.front() : *next;
    const auto& before = next == points.begin() ? points.back() : *std::prev(next);
    const double gap = std::fmod(after.azimuth_rad - before.azimuth_rad + full_circle, full_circle);
    // Directions that no sun and no sky asked for were not looked along.
    constexpr double widest_gap = 0.5;
    if (points.size() > 1 && gap > widest_gap) return std::nullopt;
    if (points.size() == 1 &&
        std::abs(azimuth_rad - after.azimuth_rad) > path_step_s * full_circle / seconds_per_day)
        return std::nullopt;
    const double share =
        gap > 0 ? std::fmod(azimuth_rad - before.azimuth_rad + full_circle, full_circle) / gap : 0;
    const double found =
        std::atan(before.tangent) + share * (std::atan(after.tangent) - std::atan(before.tangent));
    return std::isnan(found) ? std::nullopt : std::optional(found);
}

std::string sky_plot(const PixelAccount& account, const SunWay& way) {
    constexpr int columns = 72, rows = 12;
    double top_deg = 10;
    const auto see = [&](double angle_rad) {
        top_deg = std::max(top_deg, deg_from_rad(angle_rad) + 1);
    };
    for (const auto& moment : way.moments) see(moment.elevation_refracted_rad);
    for (const auto& point : account.probe.horizon()) see(std::atan(point.tangent));
    const double step_deg = std::ceil(top_deg / rows);
    std::vector<std::string> lines(rows, std::string(columns, ' '));
    for (int c = 0; c < columns; ++c)
        if (const auto horizon_rad = horizon_at(account, (c + 0.5) * full_circle / columns))
            for (int r = 0; r < rows && (r + 0.5) * step_deg < deg_from_rad(*horizon_rad); ++r)
                lines[static_cast<std::size_t>(r)][static_cast<std::size_t>(c)] = '#';
    const auto put = [&](const SunMoment& moment, char sign) {
        const auto c =
            static_cast<std::size_t>(moment.azimuth_rad / full_circle * columns) % columns;
        const auto r = static_cast<std::size_t>(
            std::max(0.0, deg_from_rad(moment.elevation_refracted_rad)) / step_deg);
        if (r < lines.size()) lines[r][c] = sign;
    };
    for (std::size_t i = 0; i < way.moments.size(); ++i)
        put(way.moments[i], way.seen[i].value_or(true) ? '*' : 'o');
    if (way.instant && way.instant->elevation_refracted_rad > 0) put(*way.instant, '@');
    std::string text;
    for (int r = rows - 1; r >= 0; --r)
        text += fmt::format("  {:>3.0f} |{}|\n", (r + 1) * step_deg,
                            lines[static_cast<std::size_t>(r)]);
    text += "      +" + std::string(columns, '-') + "+\n";
    text += "       N                 E                 S                 W                 N\n";
    return text;
}

}  // namespace sunbudget
