#include <fmt/format.h>

#include <algorithm>
#include <array>
#include <cmath>
#include <numeric>

#include "resolve_parts.hpp"
#include "sunbudget/base/text.hpp"
#include "sunbudget/base/units.hpp"
#include "sunbudget/model/neighbourhood.hpp"
#include "sunbudget/physics/sun.hpp"
#include "sunbudget/raster/locator.hpp"

namespace sunbudget {

namespace {

/// Metres in the unit a file states for its heights; nothing for a unit we do not know.
std::optional<double> metres_in(const std::string& unit) {
    const auto name = lower_case(trimmed(unit));
    for (const auto* metre : {"", "m", "metre", "metres", "meter", "meters"})
        if (name == metre) return 1.0;
    for (const auto* foot : {"ft", "foot", "feet", "international foot"})
        if (name == foot) return 0.3048;
    for (const auto* foot : {"us-ft", "ftus", "us survey foot", "us_survey_foot", "foot_us", "sft"})
        if (name == foot) return 1200.0 / 3937.0;
    return std::nullopt;
}

Source open_elevation(RasterName name, std::optional<HeightUnit> unit,
                      const ResolveOptions& options, Run& run) {
    SourceSpec spec;
    spec.name = std::move(name);
    spec.limits = limits_of(options);
    auto info = inspect(spec.name, spec.limits);
    if (unit) info.unit = std::array{"m", "ft", "us-ft"}[static_cast<std::size_t>(*unit)];
    const auto metres = metres_in(info.unit);
    if (!metres)
        throw Error(Cause::input, "heights in the unit \"" + info.unit + "\" are not understood",
                    info.name.path.string(), "say terrain.unit: m, ft or us-ft");
    if (*metres != 1.0) {
        spec.scaling = Scaling{info.scale.value_or(1) * *metres, info.offset.value_or(0) * *metres};
        run.assumptions.push_back("terrain.elevation: heights in \"" + info.unit +
                                  "\" are turned into metres");
    }
    return Source::open(spec, run.grid);
}

Totals totals_of(const PlanTime& time) {
    if (!time.totals) return Totals::whole;
    const auto* kind = std::get_if<Totals>(&**time.totals);
    return kind == nullptr ? Totals::whole : *kind;
}

std::vector<NamedSpan> named_spans(const std::vector<NamedPeriod>& periods) {
    std::vector<NamedSpan> spans;
    for (const auto& period : periods) spans.push_back({*period.name, *period.from, *period.to});
    return spans;
}

/// One day a month, where that is allowed.
void thin_days(const Plan& plan, const Run& run, TimePlan& times, RunProblems& problems) {
    // Beyond this the length of a month's days changes too much within the month (Klein 1977).
    constexpr double farthest_deg = 60;
    const Locator locator(run.grid);
    for (const double u : {0.0, 0.5, 1.0})
        for (const double v : {0.0, 0.5, 1.0}) {
            const auto place = locator.at(u * run.grid.width, v * run.grid.height);
            if (!place || std::abs(deg_from_rad(place->latitude_rad)) <= farthest_deg) continue;
            problems.add(
                Cause::usage, plan.time.days->place,
                fmt::format("one day for a month does not hold at {:.1f} degrees of latitude",
                            deg_from_rad(place->latitude_rad)),
                "beyond 60 degrees write days: all");
            return;
        }
    for (auto& period : times.periods) period = with_mid_month_days(period);
}

bool needs_sun(const Plan& plan) {
    return std::any_of(plan.outputs.layers.begin(), plan.outputs.layers.end(),
                       [](const auto& name) { return layer(*name).needs_sun; });
}

bool needs_time(const Plan& plan) {
    return std::any_of(plan.outputs.layers.begin(), plan.outputs.layers.end(),
                       [](const auto& name) { return layer(*name).needs_time(); });
}

}  // namespace

bool needs_light(const Plan& plan) {
    return needs_sun(plan) ||
           (needs_time(plan) && plan.surface_temperature &&
            std::holds_alternative<HeatSource>((**plan.surface_temperature).value));
}

Geodetic middle_of(const Grid& grid) {
    const auto place = Locator(grid).at(grid.width / 2.0, grid.height / 2.0);
    // A projection may have no answer in the middle (a view of the globe has, its corners do not).
    return place.value_or(Geodetic{});
}

void resolve_elevation(const Plan& plan, const ResolveOptions& options, Run& run,
                       RunProblems& problems) {
    const bool needed = needs_light(plan);
    if (!plan.terrain.elevation) {
        if (needed)
            run.assumptions.emplace_back(
                "no terrain.elevation: the ground is level and open, at 0 m");
        return;
    }
    const auto& terrain = plan.terrain;
    if (const auto* height = std::get_if<PlanLength>(&**terrain.elevation)) {
        run.constant_height_m = height->m;
        run.assumptions.push_back(fmt::format("the ground is level and open, at {} m", height->m));
        return;
    }
    const std::optional<HeightUnit> unit =
        terrain.unit ? std::optional(**terrain.unit) : std::nullopt;
    Terrain found;
    problems.attempt(terrain.elevation->place, [&] {
        for (const auto& raster : std::get<std::vector<PlanRaster>>(**terrain.elevation)) {
            found.elevation.push_back(open_elevation(raster_of(raster), unit, options, run));
            add_input(run, "terrain.elevation", found.elevation.back());
        }
    });
    if (terrain.slope_from) {
        if (const auto* path = std::get_if<PlanPath>(&**terrain.slope_from))
            problems.attempt(terrain.slope_from->place, [&] {
                std::vector<Source> other;
                other.push_back(open_elevation({path->file, 1, {}}, unit, options, run));
                add_input(run, "terrain.slope_from", other.back());
                found.slope_from = std::move(other);
            });
        else if (std::get<SlopeFrom>(**terrain.slope_from) == SlopeFrom::flat)
            found.slope_from = Terrain::Flat{};
    }
    if (terrain.directions) found.directions = **terrain.directions;
    if (terrain.reach) found.sight.reach_m = (**terrain.reach).m;
    run.terrain = std::move(found);
    run.methods.push_back(&method("horizon", "terrain-horizons"));
    if (!run.has_surface() && needed)
        run.assumptions.push_back(fmt::format(
            "no surface: the ground in view is taken to reflect {}", albedo_where_unknown));
}

namespace {

/// Says what a number of the sky's is worth; false where it is refused.
bool judge_number(const Parameter& parameter, double value, const Place& place, Run& run,
                  RunProblems& problems) {
    const auto verdict = judge(parameter, value);
    if (verdict == Verdict::refused)
        problems.add(Cause::usage, place,
                     fmt::format("{} {}, expected a number {}", parameter.name, value,
                                 parameter.allowed.text()),
                     parameter.text);
    if (verdict == Verdict::unusual)
        run.warnings.push_back(fmt::format("sky.{}: {} is outside the usual {}", parameter.name,
                                           value, parameter.usual.text()));
    return verdict == Verdict::fine;
}

std::vector<Source> open_months(const PlanRaster& raster, const ResolveOptions& options,
                                const Run& run) {
    SourceSpec spec;
    spec.name = raster_of(raster);
    spec.limits = limits_of(options);
    const int bands = raster.band.empty() ? inspect(spec.name, spec.limits).bands : 1;
    if (bands != 1 && bands != 12)
        throw Error(
            Cause::input,
            fmt::format("the raster has {} bands, expected one, or twelve for the months", bands),
            spec.name.path.string(), "name the band: PATH:N");
    std::vector<Source> months;
    for (int band = 1; band <= bands; ++band) {
        if (bands == 12) spec.name.band = band;
        months.push_back(Source::open(spec, run.grid));
    }
    return months;
}

/// Values of a source at places spread evenly over the grid.
std::vector<double> sample(const Source& source, const Grid& grid) {
    constexpr long side = 16;
    Reader reader(source);
    Plane<float> pixel;
    std::vector<double> values;
    for (long r = 0; r < side; ++r)
        for (long c = 0; c < side; ++c) {
            reader.read({(2 * c + 1) * grid.width / (2 * side),
                         (2 * r + 1) * grid.height / (2 * side), 1, 1},
                        pixel);
            if (!std::isnan(pixel.at(0, 0))) values.push_back(static_cast<double>(pixel.at(0, 0)));
        }
    return values;
}

void resolve_sky_raster(SkyParameter id, const Given<PlanSkyNumbers>& given,
                        const Parameter& parameter, const ResolveOptions& options, Run& run,
                        RunProblems& problems) {
    problems.attempt(given.place, [&] {
        SkyRaster raster{id, open_months(std::get<PlanRaster>(*given), options, run),
                         parameter.allowed.low, parameter.allowed.high};
        for (std::size_t month = 0; month < raster.months.size(); ++month) {
            const auto values = sample(raster.months[month], run.grid);
            if (values.empty())
                throw Error(Cause::input, "no value in any of 256 places spread over the grid",
                            raster.months[month].info().name.path.string(),
                            "give a raster that covers the grid");
            // Of many values beyond the range one is enough to say so.
            const auto odd = std::find_if(values.begin(), values.end(), [&](double v) {
                return judge(parameter, v) != Verdict::fine;
            });
            if (odd != values.end() && !judge_number(parameter, *odd, given.place, run, problems) &&
                judge(parameter, *odd) == Verdict::refused)
                return;
            const double mean = std::accumulate(values.begin(), values.end(), 0.0) /
                                static_cast<double>(values.size());
            if (raster.months.size() == 1)
                run.sky[id].fill(mean);
            else
                run.sky[id][month] = mean;
        }
        add_input(run, "sky." + parameter.name, raster.months.front());
        run.assumptions.push_back(
            fmt::format("sky.{}: shadows are weighed by the light of its mean, {:.3g}",
                        parameter.name, run.sky[id][0]));
        run.sky_raster = std::move(raster);
    });
}

void resolve_sky_parameter(SkyParameter id, const Plan& plan, const ResolveOptions& options,
                           Run& run, RunProblems& problems) {
    const auto& given = plan.sky[id];
    const auto* parameter = method("clear_sky", name_of(run.sky.model)).parameter(name_of(id));
    if (!given || parameter == nullptr) return;
    if (std::holds_alternative<PlanRaster>(**given))
        return resolve_sky_raster(id, *given, *parameter, options, run, problems);
    run.sky[id] = std::get<Monthly>(**given);
    for (const double value : run.sky[id])
        if (!judge_number(*parameter, value, given->place, run, problems)) break;
    if (given->place.is_default && needs_light(plan))
        run.assumptions.push_back(fmt::format("sky.{} is not given: {}{}", parameter->name,
                                              *parameter->default_value,
                                              parameter->unit == "1" ? "" : " " + parameter->unit));
}

}  // namespace

void resolve_sky(const Plan& plan, const ResolveOptions& options, Run& run, RunProblems& problems) {
    if (plan.sky.model) run.sky = Sky(clear_model_named(**plan.sky.model));
    if (plan.sky.diffuse) run.sky.diffuse = diffuse_model_named(**plan.sky.diffuse);
    for (std::size_t i = 0; i < sky_parameter_count; ++i)
        resolve_sky_parameter(static_cast<SkyParameter>(i), plan, options, run, problems);
    if (plan.sky.uncertainty) run.light_uncertainty = **plan.sky.uncertainty;
    if (waits_for_ground(run.sky) && !run.has_surface() && !run.terrain && needs_light(plan))
        run.assumptions.push_back(
            fmt::format("no surface: the ground that lights the sky is taken to reflect {}",
                        albedo_where_unknown));
}

void resolve_time(const Plan& plan, Run& run, RunProblems& problems) {
    const auto& time = plan.time;
    if (!time.at && !time.from) return;
    if (!needs_time(plan)) {
        run.assumptions.emplace_back("no layer needs the sun: the plan's time is not used");
        return;
    }
    TimePlan times;
    if (time.zone) times.zone = (**time.zone).zone;
    if (time.step_s) times.step_s = **time.step_s;
    if (time.at) {
        problems.attempt(time.at->place, [&] {
            const auto middle = middle_of(run.grid);
            const auto utc = resolve((**time.at).written, times.zone, middle.longitude_rad);
            times.instant =
                times.zone.kind() == ZoneKind::solar_true && !(**time.at).written.offset_s
                    ? utc_from_true_solar(utc)
                    : utc;
            if (times.zone.is_solar() && !(**time.at).written.offset_s)
                run.assumptions.push_back(
                    fmt::format("{} is the sun's time in the middle of the grid: {} everywhere",
                                times.zone.name(), format_utc(*times.instant)));
        });
    } else {
        DailyWindow hours;
        if (time.hours) hours = {(**time.hours).begin_h, (**time.hours).end_h};
        const auto* named =
            time.totals ? std::get_if<std::vector<NamedPeriod>>(&**time.totals) : nullptr;
        times.periods = named != nullptr ? periods_of(named_spans(*named), hours, times.zone)
                                         : periods_of(**time.from, **time.to, totals_of(time),
                                                      hours, times.zone);
    }
    if (time.days && **time.days == DayChoice::mid_month) thin_days(plan, run, times, problems);
    run.times = std::move(times);
    if (!needs_light(plan)) return;
    for (const auto* family : {"sun_position", "air_mass"})
        run.methods.push_back(&method(family, method_names(family).front()));
    if (run.terrain)
        run.methods.push_back(&method("diffuse_sky", plan.sky.diffuse
                                                         ? **plan.sky.diffuse
                                                         : method_names("diffuse_sky").front()));
    run.methods.push_back(&method(
        "clear_sky", plan.sky.model ? **plan.sky.model : method_names("clear_sky").front()));
}

}  // namespace sunbudget
