#include <fmt/format.h>

#include <algorithm>
#include <array>
#include <cmath>
#include <numbers>
#include <optional>

#include "resolve_parts.hpp"
#include "sunbudget/base/text.hpp"
#include "sunbudget/base/units.hpp"
#include "sunbudget/model/measured_sky.hpp"
#include "sunbudget/physics/air_mass.hpp"
#include "sunbudget/physics/cloudy_sky.hpp"
#include "sunbudget/physics/integrate.hpp"

namespace sunbudget {

namespace {

// Common practice: a pyranometer's record, and light worked out from clouds or sunshine.
constexpr double measured_uncertainty = 0.05, cloud_uncertainty = 0.10;

/// The plan's own figure stands above ours.
void trust(const Plan& plan, double uncertainty, Run& run) {
    if (!plan.sky.uncertainty) run.light_uncertainty = uncertainty;
}

std::string thin_text(const Run& run) {
    std::string names;
    std::size_t count = 0;
    for (std::size_t band = 0; band < run.light.thin.size(); ++band) {
        if (!run.light.thin[band]) continue;
        constexpr std::size_t told = 5;
        if (++count <= told) names += (count > 1 ? ", " : "") + run.times->periods[band].name;
        if (count == told + 1) names += ", ...";
    }
    return names;
}

void tell(Run& run, const MeasuredReport& report) {
    if (report.gap_h > 0)
        run.warnings.push_back(
            fmt::format("weather.table: no light for {:.1f} sunlit hours, the first from {}; days "
                        "with gaps filled by "
                        "their own mean: {}, days missing: {}",
                        report.gap_h, format_utc(report.first_gaps.front().begin),
                        report.days_with_gaps, report.days_missing));
    if (const auto thin = thin_text(run); !thin.empty())
        run.warnings.push_back(
            "weather.table: too few days for " + thin +
            ": no data there (a day needs 90 % of its light, a month 80 % of its days)");
    if (report.closure.intervals > 0) {
        const auto& c = report.closure;
        constexpr double most = 0.05;  // what the instruments are trusted with
        const auto text = fmt::format(
            "global less beam and diffuse is {:+.1f} W/m2 in the mean of {:.0f}, rms {:.1f}",
            c.difference_mean_w_m2, c.global_mean_w_m2, c.difference_rms_w_m2);
        if (std::abs(c.difference_mean_w_m2) > most * c.global_mean_w_m2)
            run.warnings.push_back("weather.table: " + text +
                                   ": look at the columns, units and stamps");
        else
            run.assumptions.push_back("weather.table: beam and diffuse are taken; " + text);
    }
    constexpr double worth_telling = 0.01;
    if (report.left_out_share > worth_telling)
        run.warnings.push_back(
            fmt::format("weather.table: {:.1f} % of its light is left out, being more than any sky "
                        "gives at its sun: look at weather.stamp, "
                        "weather.zone and weather.station",
                        report.left_out_share * 100));
}

/// Shares of the clear sky's light are worked out at one place, so they need its one clear sky.
void refuse_sky_raster(const Run& run) {
    if (run.sky_raster)
        throw Error(Cause::usage, "sky parameters from a raster do not go with this", {},
                    "give the number at the station, or one per month");
}

void measure(const Plan& plan, Run& run) {
    refuse_sky_raster(run);
    if (plan.time.days && **plan.time.days == DayChoice::mid_month)
        throw Error(Cause::usage, "one day cannot stand for a month under a measured sky", {},
                    "remove time.days");
    auto sky = measured_sky(run.weather->record, run.weather->station, run.sky, *run.times,
                            run.weather->stop_at_gaps);
    run.sky.measured = sky.shares;
    run.light.measured = sky.report;
    run.light.thin = sky.thin;
    const bool by_cloud = sky.report.from == "cloud";
    for (const auto quantity : {Weather::global, Weather::beam, Weather::diffuse, Weather::cloud})
        if (run.weather->record.has(quantity) && by_cloud == (quantity == Weather::cloud))
            run.use(quantity);
    trust(plan, by_cloud ? cloud_uncertainty : measured_uncertainty, run);
    run.assumptions.push_back("weather.table: the light of the run is the station's (" +
                              sky.report.from +
                              "), taken to each pixel's height, horizon and slope");
    run.methods.push_back(&method("real_sky", by_cloud ? "kasten-czeplak1980" : "measured"));
    tell(run, sky.report);
}

/// The mean over a band's days.
double overcast_of(const Plan& plan, const TimePlan& times, std::size_t band) {
    if (times.instant) return overcast_in(plan, times.zone.local(*times.instant).date.month);
    double sum = 0, days = 0;
    for (const auto& day : times.periods[band].days) {
        sum += overcast_in(plan, day.date.month) * day.weight;
        days += day.weight;
    }
    return sum / days;
}

/// Rasters that dim the clear sky's light.
void take_rasters(const Plan& plan, const std::vector<PlanRaster>& rasters, const char* key,
                  const ResolveOptions& options, Run& run) {
    run.light.rasters = band_rasters(rasters, key, options, run);
    for (std::size_t band = 0; band < run.times->bands(); ++band)
        run.light.overcast.push_back(overcast_of(plan, *run.times, band));
    trust(plan, cloud_uncertainty, run);
}

void take_mean_cloud(const Plan& plan, const Monthly& clouds, Run& run) {
    auto& months = run.sky.mean_cloud.emplace();
    for (std::size_t m = 0; m < months.size(); ++m) {
        // At an instant there is one sky, not a mixture of skies.
        months[m] = run.times->instant ? cloud_at_an_hour(clouds[m])
                                       : cloud_over_a_period(
                                             clouds[m], overcast_in(plan, static_cast<int>(m) + 1));
    }
    trust(plan, cloud_uncertainty, run);
    run.methods.push_back(
        &method("real_sky", run.times->instant ? "kasten-czeplak1980" : "mean-cloud"));
}

void take_cloud(const Plan& plan, const ResolveOptions& options, Run& run) {
    if (const auto* months = std::get_if<Monthly>(&**plan.sky.cloud))
        return take_mean_cloud(plan, *months, run);
    take_rasters(plan, std::get<std::vector<PlanRaster>>(**plan.sky.cloud), "sky.cloud", options,
                 run);
    run.light.rasters_are_cloud = true;
    run.methods.push_back(
        &method("real_sky", run.times->instant ? "kasten-czeplak1980" : "mean-cloud"));
}

void take_index(const Plan& plan, const ResolveOptions& options, Run& run) {
    take_rasters(plan, **plan.sky.index, "sky.index", options, run);
    run.methods.push_back(&method("real_sky", "clear-sky-index"));
}

/// What a month has at a place, by a year's sun.
struct Month {
    double extraterrestrial = 0, direct = 0, diffuse = 0, daylight_h = 0, days = 0;
};

std::array<Month, 12> months_of(const Run& run, const Geodetic& place) {
    const int year =
        run.times->zone.local(run.times->earliest() + 2 * seconds_per_day, place.longitude_rad)
            .date.year;
    const CivilDate first{year, 1, 1}, end{year + 1, 1, 1};
    const SunTrack track(Zone().day_start(first) - 2 * seconds_per_day,
                         Zone().day_start(end) + 2 * seconds_per_day);
    const double height_m = run.terrain ? 0 : run.constant_height_m,
                 pressure = pressure_ratio(height_m);
    std::array<Month, 12> months;
    for (CivilDate date = first; date < end; date = next_day(date)) {
        auto& month = months[static_cast<std::size_t>(date.month - 1)];
        month.days += 1;
        const auto span = span_of(DayPart{date}, Zone::parse("solar-mean"), place.longitude_rad);
        for_each_sunlit_step(
            track, span.begin, span.end, 600, place.latitude_rad, place.longitude_rad,
            [&](const SunSample& sample) {
                const double e0 = extraterrestrial_normal(sample.sun.distance_au),
                             sine = sample.sin_elevation, s = sample.duration_s;
                const auto clear = sky_moment(
                    run.sky, {sample.utc, date.month, e0, std::asin(sine), height_m, pressure});
                month.extraterrestrial += e0 * sine * s;
                month.direct += clear.beam_normal_w_m2 * sine * s;
                month.diffuse += clear.diffuse_w_m2 * s;
                month.daylight_h += s / 3600;
            });
    }
    return months;
}

void take_sunshine(const Plan& plan, Run& run) {
    refuse_sky_raster(run);
    if (run.times->instant)
        throw Error(Cause::usage, "hours of sunshine say nothing of an instant", {},
                    "give time.from and time.to, or sky.cloud");
    const auto place = middle_of(run.grid);
    const auto sky = months_of(run, place);
    const auto [a, b] = plan.sky.angstrom ? **plan.sky.angstrom : std::array{0.25, 0.50};
    std::array<LightShare, 12> shares;
    for (std::size_t m = 0; m < shares.size(); ++m) {
        const auto& month = sky[m];
        const double hours = (**plan.sky.sunshine)[m], longest = month.daylight_h / month.days;
        constexpr double slack_h = 0.2;  // recorders see the sun a little beyond the geometric day
        if (hours > longest + slack_h)
            throw Error(Cause::usage,
                        fmt::format("{} h of sunshine a day in month {}, whose days have {:.1f} h",
                                    shortest(hours), m + 1, longest),
                        {}, "write hours a day, January first");
        if (month.extraterrestrial <= 0) continue;
        const double clearness = angstrom_prescott(std::min(1.0, hours / longest), a, b);
        const double global = clearness * month.extraterrestrial;
        const double diffuse =
            global * erbs1982_monthly(clearness, longest / 24 * std::numbers::pi);
        shares[m] = {month.direct > 0 ? (global - diffuse) / month.direct : 0,
                     month.diffuse > 0 ? diffuse / month.diffuse : 0, 0};
    }
    run.sky.mean_cloud = shares;
    trust(plan, cloud_uncertainty, run);
    run.assumptions.push_back(
        fmt::format("sky.sunshine: worked out for the middle of the grid, latitude {:.2f}",
                    deg_from_rad(place.latitude_rad)));
    run.methods.push_back(&method("real_sky", "angstrom-prescott"));
}

}  // namespace

std::vector<Source> band_rasters(const std::vector<PlanRaster>& rasters, const char* key,
                                 const ResolveOptions& options, Run& run) {
    const std::size_t bands = run.times->bands();
    if (rasters.size() > 1 && rasters.size() != bands)
        throw Error(Cause::usage, fmt::format("{} rasters for {} periods", rasters.size(), bands),
                    {}, "name one for each period, or one for all");
    std::vector<RasterName> names;
    for (const auto& raster : rasters) names.push_back(raster_of(raster));
    if (rasters.size() == 1 && rasters.front().band.empty() && bands > 1) {
        const auto info = inspect(names.front(), limits_of(options));
        if (info.bands > 1 && static_cast<std::size_t>(info.bands) != bands)
            throw Error(
                Cause::input,
                fmt::format("the raster has {} bands for {} periods", info.bands, bands),
                names.front().path.string(),
                "name a band for all of them, such as " + rasters.front().path.given + ":1");
        if (info.bands > 1) {
            names.assign(bands, names.front());
            for (std::size_t b = 0; b < bands; ++b) names[b].band = static_cast<int>(b) + 1;
        }
    }
    std::vector<Source> sources;
    for (auto& name : names) {
        SourceSpec spec;
        spec.name = std::move(name);
        spec.limits = limits_of(options);
        sources.push_back(Source::open(spec, run.grid));
        add_input(run, key, sources.back());
    }
    return sources;
}

double overcast_in(const Plan& plan, int month) {
    constexpr double published = 0.25;  // Kasten & Czeplak 1980
    return plan.sky.overcast ? (**plan.sky.overcast)[static_cast<std::size_t>(month - 1)]
                             : published;
}

void resolve_clouds(const Plan& plan, const ResolveOptions& options, Run& run,
                    RunProblems& problems) {
    if (!run.times || !needs_light(plan)) return;
    const bool measured = run.weather && has_light(run.weather->record);
    const auto clouds = plan.sky.cloud      ? std::optional(plan.sky.cloud->place)
                        : plan.sky.sunshine ? std::optional(plan.sky.sunshine->place)
                        : plan.sky.index    ? std::optional(plan.sky.index->place)
                                            : std::nullopt;
    if (measured && clouds) {
        problems.add(Cause::usage, *clouds, "the weather table has the light of the run already",
                     "remove this, or name only other columns in weather.columns");
        return;
    }
    if (measured) problems.attempt(plan.weather->table->place, [&] { measure(plan, run); });
    if (plan.sky.cloud)
        problems.attempt(plan.sky.cloud->place, [&] { take_cloud(plan, options, run); });
    if (plan.sky.index)
        problems.attempt(plan.sky.index->place, [&] { take_index(plan, options, run); });
    if (plan.sky.sunshine)
        problems.attempt(plan.sky.sunshine->place, [&] { take_sunshine(plan, run); });
}

}  // namespace sunbudget
