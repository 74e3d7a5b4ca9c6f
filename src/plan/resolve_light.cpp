#include <fmt/format.h>

#include <algorithm>

#include "resolve_parts.hpp"
#include "sunbudget/base/text.hpp"
#include "sunbudget/base/units.hpp"
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

Source open_elevation(const PlanRaster& raster, const ResolveOptions& options, Run& run) {
    SourceSpec spec;
    spec.name = raster_of(raster);
    spec.limits = limits_of(options);
    const auto info = inspect(spec.name, spec.limits);
    const auto metres = metres_in(info.unit);
    if (!metres)
        throw Error(Cause::input, "heights in the unit \"" + info.unit + "\" are not understood",
                    info.name.path.string(), "convert the raster to metres");
    if (*metres != 1.0) {
        spec.scaling = Scaling{info.scale.value_or(1) * *metres, info.offset.value_or(0) * *metres};
        run.assumptions.push_back("terrain.elevation: heights in \"" + info.unit + "\" are turned into metres");
    }
    return Source::open(spec, run.grid);
}

Geodetic middle_of(const Grid& grid) {
    const auto place = Locator(grid).at(grid.width / 2.0, grid.height / 2.0);
    // A projection may have no answer in the middle (a view of the globe has, its corners do not).
    return place.value_or(Geodetic{});
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

}  // namespace

void resolve_elevation(const Plan& plan, const ResolveOptions& options, Run& run, RunProblems& problems) {
    const bool needed = std::any_of(plan.outputs.layers.begin(), plan.outputs.layers.end(),
                                    [](const auto& name) { return layer(*name).needs_sun; });
    if (!plan.terrain.elevation) {
        if (needed) run.assumptions.emplace_back("no terrain.elevation: the ground is flat, at 0 m");
        return;
    }
    const auto& elevation = *plan.terrain.elevation;
    if (const auto* height = std::get_if<PlanHeight>(&*elevation)) {
        run.elevation_m = height->height_m;
        run.assumptions.push_back(fmt::format("the ground is flat, at {} m", height->height_m));
        return;
    }
    problems.attempt(elevation.place, [&] {
        auto source = open_elevation(std::get<PlanRaster>(*elevation), options, run);
        add_input(run, "terrain.elevation", source);
        run.elevation_m = std::move(source);
        run.assumptions.emplace_back(
            "terrain.elevation gives the air pressure alone: the ground is taken as flat, without slopes and shadows");
    });
}

void resolve_sky(const Plan& plan, Run& run, RunProblems& problems) {
    if (!plan.sky.turbidity) return;
    const auto& chosen = method("clear_sky", **plan.sky.model);
    const auto* parameter = chosen.parameter("turbidity");
    run.sky.turbidity = **plan.sky.turbidity;
    for (const double value : run.sky.turbidity) {
        const auto verdict = judge(*parameter, value);
        if (verdict == Verdict::fine) continue;
        if (verdict == Verdict::unusual) {
            run.warnings.push_back(fmt::format("sky.turbidity: {} is outside the usual {}", value, parameter->usual.text()));
            return;
        }
        problems.add(Cause::usage, plan.sky.turbidity->place,
                     fmt::format("turbidity {} is outside {}", value, parameter->allowed.text()), parameter->text);
        return;
    }
}

void resolve_time(const Plan& plan, Run& run, RunProblems& problems) {
    const auto& time = plan.time;
    if (!time.at && !time.from) return;
    TimePlan times;
    if (time.zone) times.zone = (**time.zone).zone;
    if (time.step_s) times.step_s = **time.step_s;
    if (time.at) {
        problems.attempt(time.at->place, [&] {
            const auto middle = middle_of(run.grid);
            const auto utc = resolve((**time.at).written, times.zone, middle.longitude_rad);
            times.instant = times.zone.kind() == ZoneKind::solar_true && !(**time.at).written.offset_s
                                ? utc_from_true_solar(utc)
                                : utc;
            if (times.zone.is_solar() && !(**time.at).written.offset_s)
                run.assumptions.push_back(fmt::format("{} is the sun's time in the middle of the grid: {} everywhere",
                                                      times.zone.name(), format_utc(*times.instant)));
        });
    } else {
        DailyWindow hours;
        if (time.hours) hours = {(**time.hours).begin_h, (**time.hours).end_h};
        const auto* named = time.totals ? std::get_if<std::vector<NamedPeriod>>(&**time.totals) : nullptr;
        times.periods = named != nullptr ? periods_of(named_spans(*named), hours, times.zone)
                                         : periods_of(**time.from, **time.to, totals_of(time), hours, times.zone);
    }
    run.times = std::move(times);
    for (const auto* family : {"sun_position", "air_mass"})
        run.methods.push_back(&method(family, method_names(family).front()));
    run.methods.push_back(&method("clear_sky", plan.sky.model ? **plan.sky.model : method_names("clear_sky").front()));
}

}  // namespace sunbudget
