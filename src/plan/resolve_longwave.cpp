#include <fmt/format.h>

#include <algorithm>
#include <cmath>

#include "heat_parts.hpp"
#include "sunbudget/base/text.hpp"

namespace sunbudget {

namespace {

/// The formula, the air, the ground's temperature where it comes in numbers, and the clouds.
class LongwaveResolver : HeatPart {
  public:
    using HeatPart::HeatPart;
    void resolve();

  private:
    [[nodiscard]] bool is_measured() const {
        return plan_.longwave.method && **plan_.longwave.method == "measured";
    }
    void ground_numbers(Longwave& found) const;
    void clouds(Longwave& found);
    void down(Longwave& found);
};

/// use(air, month from 0) for the numbers of each month and each row of a table.
template <class Use>
void each_moment(Longwave& found, Use use) {
    for (std::size_t month = 0; month < 12; ++month) use(found.months[month], month);
    for (auto& row : found.rows) {
        const auto month = Zone().local((row.span.begin + row.span.end) / 2).date.month;
        use(row.air, static_cast<std::size_t>(month - 1));
    }
}

bool has_measured(const Longwave& found) {
    return std::ranges::any_of(
        found.rows, [](const AirRow& row) { return !std::isnan(row.air.longwave_down_w_m2); });
}

/// The ground's temperature, month by month.
void LongwaveResolver::ground_numbers(Longwave& found) const {
    if (const auto* months = std::get_if<Monthly>(&plan_.surface_temperature->value.value))
        each_moment(found,
                    [&](AirMoment& air, std::size_t month) { air.surface_k = (*months)[month]; });
}

void LongwaveResolver::clouds(Longwave& found) {
    const auto* given = plan_.longwave.cloud ? &plan_.longwave.cloud : nullptr;
    if (given == nullptr && !run_.weather && plan_.sky.cloud) {
        given = &plan_.sky.cloud;
        run_.assumptions.emplace_back("longwave.cloud: that of sky.cloud");
    } else if (given == nullptr && !run_.weather) {
        run_.assumptions.emplace_back("longwave.cloud: none, the sky counts as clear");
    }
    if (given == nullptr) return;
    if (has_measured(found))
        throw Error(Cause::usage, "the weather table's longwave_down has its clouds in it", {},
                    "leave longwave.cloud out, or choose a formula in longwave.method");
    const auto law = plan_.longwave.cloud_method ? **plan_.longwave.cloud_method
                                                 : method_names("longwave_cloud").front();
    found.cloud_law = chosen<LongwaveCloud>("longwave_cloud", law);
    run_.methods.push_back(&method("longwave_cloud", law));
    if (const auto* months = std::get_if<Monthly>(&***given))
        return each_moment(found, [&](AirMoment& air, std::size_t month) {
            air.cloud = cloud_terms(found.cloud_law, (*months)[month]);
        });
    if (given == &plan_.longwave.cloud)
        found.clouds = band_rasters(std::get<std::vector<PlanRaster>>(***given), "longwave.cloud",
                                    options_, run_);
}

/// What the sky sends down, in the place of a formula.
void LongwaveResolver::down(Longwave& found) {
    const auto& given = plan_.longwave.down;
    run_.assumptions.emplace_back(
        "longwave.down: as given, with its clouds; numbers at other heights in proportion to the "
        "clear sky's");
    if (const auto* months = std::get_if<Monthly>(&**given))
        return each_moment(found, [&](AirMoment& air, std::size_t month) {
            air.longwave_down_w_m2 = (*months)[month];
        });
    found.down_w_m2 =
        band_rasters(std::get<std::vector<PlanRaster>>(**given), "longwave.down", options_, run_);
}

void LongwaveResolver::resolve() {
    const auto place = plan_.weather ? plan_.weather->place : Place{};
    problems_.attempt(place, [&] {
        // What was wrong with the weather or the time is said already.
        if (!run_.times || !plan_.weather || (plan_.weather->table && !run_.weather)) return;
        Longwave found;
        const auto formula = plan_.longwave.method && !is_measured()
                                 ? **plan_.longwave.method
                                 : method_names("longwave").front();
        found.formula = chosen<LongwaveFormula>("longwave", formula);
        if (const auto& ground = plan_.surface_temperature)
            if (const auto* above = std::get_if<PlanDifference>(&ground->value.value))
                found.surface_above_air_k = above->k;
        resolve_longwave_air(plan_, options_, run_, problems_, found);
        if (plan_.surface_temperature) ground_numbers(found);
        if (plan_.longwave.down)
            down(found);
        else
            clouds(found);
        if (!run_.weather && is_measured())
            throw Error(Cause::usage, "there is no weather table with measured longwave", {},
                        "choose a formula");
        if (!plan_.longwave.down) run_.methods.push_back(&method("longwave", formula));
        if (run_.terrain)
            run_.assumptions.emplace_back(
                "longwave of the ground in view: a black body's at the pixel's own surface "
                "temperature, where that is not known "
                "or balanced at the air's");
        run_.heat.longwave = std::move(found);
        find_thin_bands(run_);
    });
}

}  // namespace

void share_clouds(const Plan& plan, Run& run) {
    const bool own = run.weather || plan.longwave.cloud || plan.longwave.down;
    if (run.heat.longwave && !run.heat.longwave->daily && !own && run.light.rasters_are_cloud)
        run.heat.longwave->clouds = run.light.rasters;
}

void find_thin_bands(Run& run) {
    const auto& longwave = *run.heat.longwave;
    if (longwave.rows.empty() && !longwave.daily) return;
    const PointLongwave point(*run.times, longwave);
    const double longitude_rad = middle_of(run.grid).longitude_rad;
    std::vector<std::string> names;
    for (std::size_t band = 0; band < run.times->bands(); ++band) {
        const bool thin =
            std::isnan(point.at(band, longitude_rad, longwave.height_m.value_or(0)).sky_w_m2);
        run.heat.thin.push_back(thin);
        if (thin)
            names.push_back(run.times->instant ? format_utc(*run.times->instant)
                                               : run.times->periods[band].name);
    }
    if (names.size() == run.times->bands())
        throw Error(Cause::input,
                    "too little is known of every period for longwave: " + joined(names, ", "), {},
                    "choose a time that the weather table covers");
    if (!names.empty())
        run.warnings.push_back("longwave: no value where the weather table covers too little: " +
                               joined(names, ", "));
}

void resolve_longwave(const Plan& plan, const ResolveOptions& options, Run& run,
                      RunProblems& problems) {
    LongwaveResolver(plan, options, run, problems).resolve();
}

}  // namespace sunbudget
