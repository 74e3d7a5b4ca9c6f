#include <fmt/format.h>

#include <algorithm>
#include <array>
#include <cmath>

#include "names.hpp"
#include "resolve_parts.hpp"
#include "sunbudget/base/text.hpp"
#include "sunbudget/base/units.hpp"
#include "sunbudget/model/air_record.hpp"
#include "sunbudget/physics/humidity.hpp"
#include "sunbudget/raster/product.hpp"
#include "sunbudget/tables/sensors.hpp"

namespace sunbudget {

namespace {

constexpr double zero_celsius_k = 273.15;

/// How a family's rows stand in the order of an enumeration.
template <class Enum>
Enum chosen(const std::string& family, const std::string& name) {
    const auto names = method_names(family);
    return static_cast<Enum>(std::ranges::find(names, name) - names.begin());
}

/// What makes a unit of the plan the one used inside.
Scaling unit_scaling(const std::string& unit) {
    if (unit == "degC") return {1, zero_celsius_k};
    if (unit == "kPa") return {10, 0};
    if (unit == "Pa") return {0.01, 0};
    return {1, 0};
}
Scaling after(const Scaling& first, const Scaling& second) {
    return {first.scale * second.scale, first.offset * second.scale + second.offset};
}

const CoverSurface* cover_of(const Run& run) {
    if (const auto* cover = std::get_if<CoverSurface>(&run.surface)) return cover;
    const auto* image = std::get_if<ReflectanceSurface>(&run.surface);
    return image != nullptr && image->fill ? &*image->fill : nullptr;
}

/// Resolves what is about heat, step by step.
class HeatResolver {
  public:
    HeatResolver(const Plan& plan, const ResolveOptions& options, Run& run, RunProblems& problems)
        : plan_(plan), options_(options), run_(run), problems_(problems) {}

    void resolve() {
        if (is_daily(plan_)) return daily();
        if (wants(&Layer::needs_surface_temperature)) surface();
        // A balance sends out heat radiation whether or not a layer of it is written.
        if (wants(&Layer::needs_emissivity) || run_.heat.surface == SurfaceFrom::balance)
            emissivity();
        if (wants_id(LayerId::sri) || run_.heat.surface == SurfaceFrom::balance) wind();
        const bool by_air =
            run_.heat.surface == SurfaceFrom::air || run_.heat.surface == SurfaceFrom::balance;
        if (wants(&Layer::needs_air) || (wants(&Layer::needs_surface_temperature) && by_air))
            longwave();
        if (wants_id(LayerId::sri)) run_.methods.push_back(&method("sri", "astm-e1980"));
    }

  private:
    [[nodiscard]] bool wants(bool Layer::*need) const {
        return std::ranges::any_of(plan_.outputs.layers,
                                   [&](const auto& id) { return layer(*id).*need; });
    }
    [[nodiscard]] bool wants_id(LayerId wanted) const {
        return std::ranges::any_of(plan_.outputs.layers,
                                   [&](const auto& id) { return *id == wanted; });
    }
    [[nodiscard]] Source opened(const std::string& role, const PlanRaster& raster,
                                std::optional<Scaling> scaling, std::optional<double> nodata = {}) {
        SourceSpec spec;
        spec.name = raster_of(raster);
        spec.limits = limits_of(options_);
        spec.scaling = scaling;
        spec.profile_nodata = nodata;
        auto source = Source::open(spec, run_.grid);
        add_input(run_, role, source);
        return source;
    }
    [[nodiscard]] Source opened(const std::string& role, const PlanFieldRaster& field) {
        const Scaling stored{field.scale, field.offset};
        const bool plain = field.unit.empty() && stored == Scaling{};
        return opened(
            role, field.raster,
            plain ? std::nullopt : std::optional(after(stored, unit_scaling(field.unit))));
    }

    void emissivity();
    void emissivity_from_classes(const Place& place);
    void emissivity_from_image(const Place& place);
    void surface();
    void surface_raster(const PlanSurfaceRaster& raster, const Place& place);
    void surface_quality(const PlanSurfaceRaster& raster, const Product& product);
    void judge_time(const std::optional<UtcSeconds>& taken, const PlanSurfaceRaster& raster);
    void longwave();
    void daily();
    void wind() {
        problems_.attempt(
            plan_.weather && plan_.weather->wind ? plan_.weather->wind->place : Place{},
            [&] { run_.heat.wind = resolved_wind(plan_, run_); });
    }
    void use_columns(const AirRecord& air, const AirWants& wants);
    void air_numbers(const PlanWeather& weather, Longwave& found);
    void air_of_table(Longwave& found);
    void clouds(Longwave& found);
    void find_thin_bands();

    const Plan& plan_;
    const ResolveOptions& options_;
    Run& run_;
    RunProblems& problems_;
};

void HeatResolver::emissivity_from_classes(const Place& place) {
    const auto* cover = cover_of(run_);
    if (cover == nullptr)
        return problems_.add(Cause::usage, place, "nothing tells the classes",
                             "add surface.cover (with fill: cover beside an image)");
    std::vector<std::string> without;
    for (const auto& use : run_.classes)
        if (use.albedo && std::isnan(cover->emissivity.of(use.code)))
            without.push_back(fmt::format("{} \"{}\"", use.code, use.name));
    if (!without.empty())
        run_.warnings.push_back("no emissivity in the class table for " + joined(without, ", ") +
                                ": their pixels have no longwave up");
    run_.heat.emissivity = ClassEmissivity{};
    run_.methods.push_back(&method("emissivity", "class-table"));
}

void HeatResolver::emissivity_from_image(const Place& place) {
    const auto* image = std::get_if<ReflectanceSurface>(&run_.surface);
    const auto band = [&](const char* name) -> const Source* {
        if (image == nullptr) return nullptr;
        const auto found = std::ranges::find(image->bands, name, &ReflectanceBand::name);
        return found == image->bands.end() ? nullptr : &found->reflectance;
    };
    const auto *red = band("red"), *nir = band("nir");
    if (red == nullptr || nir == nullptr)
        return problems_.add(
            Cause::usage, place, "ndvi needs an image whose albedo uses the bands red and nir",
            "add surface.reflectance with them, or give the emissivity another way");
    run_.heat.emissivity = NdviEmissivity{*red, *nir};
    run_.methods.push_back(&method("emissivity", "sobrino2004"));
}

void HeatResolver::emissivity() {
    if (!plan_.surface.emissivity) return emissivity_from_classes({});
    const auto& place = plan_.surface.emissivity->place;
    problems_.attempt(place, [&] {
        const auto& value = plan_.surface.emissivity->value.value;
        if (const auto* from = std::get_if<EmissivityFrom>(&value))
            return *from == EmissivityFrom::cover ? emissivity_from_classes(place)
                                                  : emissivity_from_image(place);
        if (const auto* number = std::get_if<double>(&value))
            run_.heat.emissivity = *number;
        else
            run_.heat.emissivity = opened("surface.emissivity", std::get<PlanFieldRaster>(value));
        run_.methods.push_back(&method("emissivity", "given"));
    });
}

/// A scene's temperature and an instant that lie far apart do not belong together.
void HeatResolver::judge_time(const std::optional<UtcSeconds>& taken,
                              const PlanSurfaceRaster& raster) {
    constexpr double near_s = 3600;
    if (raster.covers == RasterCovers::period_mean || !run_.times || !run_.times->instant) return;
    if (!taken) {
        run_.assumptions.emplace_back(
            "surface_temperature: the raster is of the plan's instant; nothing says when it was "
            "taken");
        return;
    }
    const double apart_s = std::abs(*taken - *run_.times->instant);
    if (apart_s > near_s)
        run_.warnings.push_back(fmt::format(
            "surface_temperature was taken at {}, {:.1f} h away from the plan's instant",
            format_utc(*taken), apart_s / 3600));
}

/// Under a cloud a thermal image has the cloud's temperature, not the ground's.
void HeatResolver::surface_quality(const PlanSurfaceRaster& raster, const Product& product) {
    const std::string told_by = "QA_PIXEL";
    SourceSpec spec;
    spec.kind = DataKind::code;
    spec.limits = limits_of(options_);
    if (raster.quality)
        spec.name = raster_of(*raster.quality);
    else if (const auto beside = product.file.parent_path() / (product.id + "_" + told_by + ".TIF");
             !product.id.empty() && std::filesystem::exists(beside))
        spec.name.path = beside;
    else
        return run_.warnings.push_back(
            "surface_temperature: no quality raster: clouds and their shadows count as ground");
    const auto found = recognise(spec.name.path, {}, inspect(spec.name, spec.limits).metadata);
    if (!found.band.empty() && found.band != told_by)
        throw Error(Cause::input, "this is " + found.band + ", not " + told_by,
                    spec.name.path.string(), "name the right file");
    if (!found.id.empty() && !product.id.empty() && found.id != product.id)
        throw Error(Cause::input,
                    fmt::format("quality of the scene {}, but the temperatures are of {}", found.id,
                                product.id),
                    spec.name.path.string(), "take both files from one scene");
    QualityRaster quality{Source::open(spec, run_.grid), {}, RejectReason{0}};
    add_input(run_, "surface_temperature.quality", quality.codes);
    std::vector<std::string> names;
    // The bits are those of every Landsat of the collection.
    for (const auto& test : sensor("landsat-oli-c2").tests) {
        if (test.raster != told_by || !test.rejects) continue;
        quality.tests.push_back(
            {test.first_bit, test.bits, static_cast<std::int32_t>(test.value), 0, RejectReason{0}});
        if (test.name != "fill") names.push_back(test.name);
    }
    run_.heat.surface_quality = std::move(quality);
    run_.assumptions.push_back(fmt::format("surface_temperature: none where {} tells {}",
                                           spec.name.path.filename().string(),
                                           joined(names, ", ")));
}

void HeatResolver::surface_raster(const PlanSurfaceRaster& raster, const Place& place) {
    // USGS Landsat 8-9 Collection 2 Level-2 science product guide: kelvin = 0.00341802 * number + 149, 0 is no data.
    constexpr Scaling landsat{0.00341802, 149.0};
    problems_.attempt(place, [&] {
        const auto info = inspect(raster_of(raster.raster), limits_of(options_));
        const auto product = recognise(info.name.path, {}, info.metadata);
        const bool recognised =
            product.level == ProductLevel::surface_temperature && product.collection == 2;
        if (product.level == ProductLevel::surface_reflectance ||
            product.level == ProductLevel::level1)
            throw Error(Cause::input,
                        "this is " + std::string(text_of(product.level)) + ", not a temperature",
                        info.name.path.string(),
                        "name the product's temperature (Landsat: ..._ST_B10.TIF)");
        const bool is_landsat = raster.product || (recognised && !raster.scale && !raster.offset &&
                                                   raster.unit.empty());
        auto unit = raster.unit.empty() ? info.unit : raster.unit;
        if (unit == "Kelvin" || unit == "kelvin") unit = "K";
        if (!is_landsat && unit != "K" && unit != "degC")
            throw Error(Cause::usage,
                        unit.empty() ? "nothing says the unit of the temperatures"
                                     : "temperatures in \"" + unit + "\" are not understood",
                        info.name.path.string(),
                        "add unit: K or unit: degC, or product: landsat-c2");
        const Scaling stored{raster.scale.value_or(info.scale.value_or(1)),
                             raster.offset.value_or(info.offset.value_or(0))};
        run_.heat.surface_k = opened("surface_temperature", raster.raster,
                                     is_landsat ? landsat : after(stored, unit_scaling(unit)),
                                     is_landsat ? std::optional(0.0) : std::nullopt);
        if (is_landsat)
            run_.inputs.back().notes.emplace_back(
                "Landsat Collection 2: kelvin = 0.00341802 * number + 149");
        if (is_landsat || raster.quality) surface_quality(raster, product);
        std::optional<UtcSeconds> taken = product.acquired_utc;
        if (!raster.time.empty()) taken = sunbudget::resolve(parse_instant(raster.time), Zone(), 0);
        judge_time(taken, raster);
        run_.methods.push_back(&method("surface_temperature", "given"));
    });
}

void HeatResolver::surface() {
    if (!plan_.surface_temperature) return;
    const auto& value = plan_.surface_temperature->value.value;
    if (std::holds_alternative<Monthly>(value) || std::holds_alternative<SurfaceTable>(value)) {
        run_.heat.surface = SurfaceFrom::air;
        run_.methods.push_back(&method("surface_temperature", "given"));
    } else if (std::holds_alternative<PlanDifference>(value)) {
        run_.heat.surface = SurfaceFrom::air;
        run_.methods.push_back(&method("surface_temperature", "air-offset"));
    } else if (std::holds_alternative<HeatSource>(value)) {
        run_.heat.surface = SurfaceFrom::balance;
        run_.methods.push_back(&method("surface_temperature", "balance"));
    } else {
        run_.heat.surface = SurfaceFrom::raster;
        surface_raster(std::get<PlanSurfaceRaster>(value), plan_.surface_temperature->place);
    }
}

void HeatResolver::clouds(Longwave& found) {
    const auto law = plan_.longwave.cloud_method ? **plan_.longwave.cloud_method
                                                 : method_names("longwave_cloud").front();
    const Monthly* cloud = plan_.longwave.cloud ? &**plan_.longwave.cloud : nullptr;
    if (cloud == nullptr && !run_.weather && plan_.sky.cloud) {
        cloud = std::get_if<Monthly>(&**plan_.sky.cloud);
        run_.assumptions.emplace_back(cloud != nullptr
                                          ? "longwave.cloud: that of sky.cloud"
                                          : "longwave.cloud: none, the sky counts as clear; "
                                            "rasters of sky.cloud are of its light alone");
    } else if (cloud == nullptr && !run_.weather) {
        run_.assumptions.emplace_back("longwave.cloud: none, the sky counts as clear");
    }
    if (cloud == nullptr) return;
    for (std::size_t month = 0; month < 12; ++month)
        found.months[month].cloud =
            cloud_terms(chosen<LongwaveCloud>("longwave_cloud", law), (*cloud)[month]);
    for (auto& row : found.rows) {
        const auto month = Zone().local((row.span.begin + row.span.end) / 2).date.month;
        row.air.cloud = found.months[static_cast<std::size_t>(month - 1)].cloud;
    }
    run_.methods.push_back(&method("longwave_cloud", law));
}

/// Air in numbers or rasters: one moment for each month.
void HeatResolver::air_numbers(const PlanWeather& weather, Longwave& found) {
    if (weather.station_elevation) found.height_m = (**weather.station_elevation).m;
    if (weather.lapse)
        for (std::size_t month = 0; month < 12; ++month)
            found.lapse_k_m[month] = (**weather.lapse).k_km[month] / 1000;
    if (const auto* months = std::get_if<Monthly>(&(**weather.air_temperature).value))
        for (std::size_t month = 0; month < 12; ++month)
            found.months[month].temperature_k = (*months)[month];
    else
        problems_.attempt(weather.air_temperature->place, [&] {
            found.temperature_k =
                opened("weather.air_temperature",
                       std::get<PlanFieldRaster>((**weather.air_temperature).value));
        });
    const auto humidity = [&](const auto& given, HumidityAs as, const std::string& role,
                              auto&& to_hpa) {
        if (!given) return;
        found.humidity_as = as;
        if (const auto* months = std::get_if<Monthly>(&(**given).value)) {
            found.humidity_numbers = *months;
            for (std::size_t m = 0; m < 12; ++m)
                found.months[m].vapour_pressure_hpa =
                    to_hpa((*months)[m], found.months[m].temperature_k);
        } else {
            problems_.attempt(given->place, [&] {
                found.humidity = opened(role, std::get<PlanFieldRaster>((**given).value));
            });
        }
    };
    humidity(
        weather.relative_humidity, HumidityAs::relative, "weather.relative_humidity",
        [](double share, double kelvin) { return share * saturation_vapour_pressure_hpa(kelvin); });
    humidity(weather.dew_point, HumidityAs::dew_point, "weather.dew_point",
             [](double dew_k, double) { return saturation_vapour_pressure_hpa(dew_k); });
    humidity(weather.vapour_pressure, HumidityAs::vapour_pressure, "weather.vapour_pressure",
             [](double hpa, double) { return hpa; });
    if (run_.terrain && !found.height_m && !found.by_pixel())
        run_.assumptions.emplace_back(
            "weather.station_elevation: none, the air's numbers hold at every height");
}

/// Which columns the longwave is made from: a humidity stands in where one before it has no value, and the formula
/// with its clouds where the measured longwave has none.
void HeatResolver::use_columns(const AirRecord& air, const AirWants& wants) {
    const auto& record = run_.weather->record;
    const auto use = [&](Weather quantity) {
        if (record.has(quantity)) run_.use(quantity);
    };
    const auto empty = [&](Weather quantity, std::size_t row) {
        return !record.has(quantity) || std::isnan(record.values(quantity)[row]);
    };
    use(Weather::air_temperature);
    for (std::size_t row = 0; row < record.intervals.size(); ++row)
        for (const auto humidity :
             {Weather::vapour_pressure, Weather::dew_point, Weather::relative_humidity})
            if (!empty(humidity, row)) {
                use(humidity);
                break;
            }
    if (wants.surface) use(Weather::surface_temperature);
    const bool measured = air.cloud_from == "longwave_down";
    if (measured) use(Weather::longwave_down);
    if (!wants.cloud || (measured && record.missing(Weather::longwave_down) == 0)) return;
    if (record.has(Weather::cloud)) return use(Weather::cloud);
    if (!record.has(Weather::global)) return;
    use(Weather::global);
    if (!plan_.weather->pressure) use(Weather::pressure);  // of the clear sky it is held against
}

void HeatResolver::air_of_table(Longwave& found) {
    const auto& weather = *run_.weather;
    found.height_m = weather.station.height_m;
    for (std::size_t month = 0; month < 12; ++month)
        found.lapse_k_m[month] =
            plan_.weather->lapse ? (**plan_.weather->lapse).k_km[month] / 1000 : 0.0065;
    AirWants wants;
    wants.measured = !plan_.longwave.method || **plan_.longwave.method == "measured";
    wants.cloud = !plan_.longwave.cloud;
    if (plan_.longwave.cloud_method)
        wants.law = chosen<LongwaveCloud>("longwave_cloud", **plan_.longwave.cloud_method);
    wants.surface = plan_.surface_temperature &&
                    std::holds_alternative<SurfaceTable>(plan_.surface_temperature->value.value);
    if (plan_.longwave.method && **plan_.longwave.method == "measured" &&
        !weather.record.has(Weather::longwave_down))
        throw Error(Cause::input, "the weather table has no longwave_down", {},
                    "name its column in weather.columns, or choose a formula");
    const bool needs_air_itself = run_.terrain || run_.heat.surface == SurfaceFrom::balance ||
                                  !std::isnan(found.surface_above_air_k);
    if (needs_air_itself && !weather.record.has(Weather::air_temperature))
        throw Error(Cause::input, "the weather table has no air_temperature", {},
                    "name its column in weather.columns");
    auto air = air_record(weather.record, weather.station, run_.sky, wants);
    use_columns(air, wants);
    found.rows = std::move(air.rows);
    if (found.rows.empty())
        throw Error(Cause::input,
                    "no row of the weather table has all that longwave needs: temperature, "
                    "humidity and what else the plan takes from it");
    if (air.cloud_from.empty() && wants.cloud)
        run_.assumptions.emplace_back(
            "longwave.cloud: the table tells no cloud, the sky counts as clear");
    if (air.cloud_from == "longwave_down")
        run_.assumptions.emplace_back(
            "longwave: as measured, at other heights in proportion to the clear sky's");
    if (air.cloud_from == "cloud")
        run_.methods.push_back(&method(
            "longwave_cloud", method_names("longwave_cloud")[static_cast<std::size_t>(wants.law)]));
    if (air.cloud_from == "global") {
        run_.methods.push_back(&method("longwave_cloud", "crawford-duchon1999"));
        if (air.night_rows > 0)
            run_.assumptions.push_back(
                fmt::format("longwave: cloud of {} of {} rows (sun below 10 degrees, or no "
                            "sunlight measured) interpolated between those "
                            "that tell it, {} of them before the first or after the last",
                            air.night_rows, weather.record.intervals.size(), air.first_rows));
    }
    if (air.left_out > 0)
        run_.assumptions.push_back(
            fmt::format("longwave: {} of {} rows of the table lack something and are left out; "
                        "days covered less than {:.0f} % do not "
                        "count, periods with less than {:.0f} % of their days have no value",
                        air.left_out, weather.record.intervals.size(), air_day_needs * 100,
                        air_band_needs * 100));
}

void HeatResolver::find_thin_bands() {
    const auto& longwave = *run_.heat.longwave;
    if (longwave.rows.empty() && !longwave.daily) return;
    const PointLongwave point(*run_.times, longwave);
    const double longitude_rad = middle_of(run_.grid).longitude_rad;
    std::vector<std::string> names;
    for (std::size_t band = 0; band < run_.times->bands(); ++band) {
        const bool thin =
            std::isnan(point.at(band, longitude_rad, longwave.height_m.value_or(0)).sky_w_m2);
        run_.heat.thin.push_back(thin);
        if (thin)
            names.push_back(run_.times->instant ? format_utc(*run_.times->instant)
                                                : run_.times->periods[band].name);
    }
    if (names.size() == run_.times->bands())
        throw Error(Cause::input,
                    "too little is known of every period for longwave: " + joined(names, ", "), {},
                    "choose a time that the weather table covers");
    if (!names.empty())
        run_.warnings.push_back("longwave: no value where the weather table covers too little: " +
                                joined(names, ", "));
}

/// Net of whole days: it stands for the sky, the ground's temperature and its emissivity.
void HeatResolver::daily() {
    problems_.attempt(plan_.longwave.method->place, [&] {
        // What was wrong with the weather or the time is said already.
        if (!wants(&Layer::needs_air) || !run_.times || !plan_.weather ||
            (plan_.weather->table && !run_.weather))
            return;
        run_.heat.longwave = daily_longwave(plan_, run_);
        find_thin_bands();
    });
}

void HeatResolver::longwave() {
    const auto place = plan_.weather ? plan_.weather->place : Place{};
    problems_.attempt(place, [&] {
        // What was wrong with the weather or the time is said already.
        if (!run_.times || !plan_.weather || (plan_.weather->table && !run_.weather)) return;
        Longwave found;
        const auto formula = plan_.longwave.method && **plan_.longwave.method != "measured"
                                 ? **plan_.longwave.method
                                 : method_names("longwave").front();
        found.formula = chosen<LongwaveFormula>("longwave", formula);
        if (plan_.surface_temperature) {
            const auto& value = plan_.surface_temperature->value.value;
            if (const auto* above = std::get_if<PlanDifference>(&value))
                found.surface_above_air_k = above->k;
            if (run_.weather)
                air_of_table(found);
            else if (plan_.weather->air_temperature)
                air_numbers(*plan_.weather, found);
            if (const auto* months = std::get_if<Monthly>(&value)) {
                for (std::size_t month = 0; month < 12; ++month)
                    found.months[month].surface_k = (*months)[month];
                for (auto& row : found.rows)
                    row.air.surface_k = (*months)[static_cast<std::size_t>(
                        Zone().local(row.span.begin).date.month - 1)];
            }
        } else if (run_.weather) {
            air_of_table(found);
        } else if (plan_.weather->air_temperature) {
            air_numbers(*plan_.weather, found);
        }
        clouds(found);
        if (!run_.weather && plan_.longwave.method && **plan_.longwave.method == "measured")
            throw Error(Cause::usage, "there is no weather table with measured longwave", {},
                        "choose a formula");
        run_.methods.push_back(&method("longwave", formula));
        if (run_.terrain)
            run_.assumptions.emplace_back(
                "longwave of the ground in view: a black body's at the pixel's own surface "
                "temperature, where that is not known "
                "or balanced at the air's");
        run_.heat.longwave = std::move(found);
        find_thin_bands();
    });
}

}  // namespace

void resolve_heat(const Plan& plan, const ResolveOptions& options, Run& run,
                  RunProblems& problems) {
    HeatResolver(plan, options, run, problems).resolve();
}

}  // namespace sunbudget
