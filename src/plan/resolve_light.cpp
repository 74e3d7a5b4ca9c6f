#include <fmt/format.h>

#include <algorithm>
#include <array>
#include <cmath>

#include "resolve_parts.hpp"
#include "sunbudget/base/text.hpp"
#include "sunbudget/base/units.hpp"
#include "sunbudget/physics/sun.hpp"
#include "sunbudget/model/neighbourhood.hpp"
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

Source open_elevation(RasterName name, std::optional<HeightUnit> unit, const ResolveOptions& options, Run& run) {
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
        run.assumptions.push_back("terrain.elevation: heights in \"" + info.unit + "\" are turned into metres");
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
            problems.add(Cause::usage, plan.time.days->place,
                         fmt::format("one day for a month does not hold at {:.1f} degrees of latitude", deg_from_rad(place->latitude_rad)),
                         "beyond 60 degrees write days: all");
            return;
        }
    for (auto& period : times.periods) period = with_mid_month_days(period);
}

bool needs_sun(const Plan& plan) {
    return std::any_of(plan.outputs.layers.begin(), plan.outputs.layers.end(),
                       [](const auto& name) { return layer(*name).needs_sun; });
}

}  // namespace

Geodetic middle_of(const Grid& grid) {
    const auto place = Locator(grid).at(grid.width / 2.0, grid.height / 2.0);
    // A projection may have no answer in the middle (a view of the globe has, its corners do not).
    return place.value_or(Geodetic{});
}

void resolve_elevation(const Plan& plan, const ResolveOptions& options, Run& run, RunProblems& problems) {
    const bool needed = needs_sun(plan);
    if (!plan.terrain.elevation) {
        if (needed) run.assumptions.emplace_back("no terrain.elevation: the ground is level and open, at 0 m");
        return;
    }
    const auto& terrain = plan.terrain;
    if (const auto* height = std::get_if<PlanLength>(&**terrain.elevation)) {
        run.constant_height_m = height->m;
        run.assumptions.push_back(fmt::format("the ground is level and open, at {} m", height->m));
        return;
    }
    const std::optional<HeightUnit> unit = terrain.unit ? std::optional(**terrain.unit) : std::nullopt;
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
        run.assumptions.push_back(fmt::format("no surface: the ground in view is taken to reflect {}", albedo_where_unknown));
}

void resolve_sky(const Plan& plan, Run& run, RunProblems& problems) {
    if (plan.sky.diffuse) {
        constexpr std::array models{std::pair{"hay-davies1980", DiffuseModel::hay_davies1980},
                                    std::pair{"liu-jordan1963", DiffuseModel::liu_jordan1963},
                                    std::pair{"perez1990", DiffuseModel::perez1990}};
        for (const auto& [name, model] : models)
            if (**plan.sky.diffuse == name) run.sky.diffuse = model;
    }
    if (!plan.sky.turbidity) return;
    const auto& chosen = method("clear_sky", **plan.sky.model);
    const auto* parameter = chosen.parameter("turbidity");
    run.sky[SkyParameter::turbidity] = **plan.sky.turbidity;
    for (const double value : **plan.sky.turbidity) {
        const auto verdict = judge(*parameter, value);
        if (verdict == Verdict::fine) continue;
        if (verdict == Verdict::unusual) {
            run.warnings.push_back(fmt::format("sky.turbidity: {} is outside the usual {}", value, parameter->usual.text()));
            return;
        }
        problems.add(Cause::usage, plan.sky.turbidity->place,
                     fmt::format("turbidity {}, expected a number {}", value, parameter->allowed.text()), parameter->text);
        return;
    }
}

void resolve_time(const Plan& plan, Run& run, RunProblems& problems) {
    const auto& time = plan.time;
    if (!time.at && !time.from) return;
    if (!needs_sun(plan)) {
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
    if (time.days && **time.days == DayChoice::mid_month) thin_days(plan, run, times, problems);
    run.times = std::move(times);
    for (const auto* family : {"sun_position", "air_mass"})
        run.methods.push_back(&method(family, method_names(family).front()));
    if (run.terrain) run.methods.push_back(&method("diffuse_sky", plan.sky.diffuse ? **plan.sky.diffuse : method_names("diffuse_sky").front()));
    run.methods.push_back(&method("clear_sky", plan.sky.model ? **plan.sky.model : method_names("clear_sky").front()));
}

}  // namespace sunbudget
