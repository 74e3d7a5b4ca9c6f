#include <fmt/format.h>

#include <cmath>

#include "heat_parts.hpp"
#include "sunbudget/raster/product.hpp"
#include "sunbudget/tables/sensors.hpp"

namespace sunbudget {

namespace {

/// Numbers, the table's, the air's and so much more, a balance, or a raster with its scene's quality.
class SurfaceTemperatureResolver : HeatPart {
  public:
    using HeatPart::HeatPart;
    void resolve();

  private:
    void from_raster(const PlanSurfaceRaster& raster, const Place& place);
    void read_quality(const PlanSurfaceRaster& raster, const Product& product);
    void judge_time(const std::optional<UtcSeconds>& taken, const PlanSurfaceRaster& raster);
};

/// A scene's temperature and an instant that lie far apart do not belong together.
void SurfaceTemperatureResolver::judge_time(const std::optional<UtcSeconds>& taken,
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
void SurfaceTemperatureResolver::read_quality(const PlanSurfaceRaster& raster,
                                              const Product& product) {
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

/// Of a product that has a temperature, if it is one of which we know.
void check_product(const Product& product, const std::filesystem::path& file) {
    if (product.level == ProductLevel::surface_reflectance || product.level == ProductLevel::level1)
        throw Error(Cause::input,
                    "this is " + std::string(text_of(product.level)) + ", not a temperature",
                    file.string(), "name the product's temperature (Landsat: ..._ST_B10.TIF)");
}

bool is_landsat(const PlanSurfaceRaster& raster, const Product& product) {
    const bool recognised =
        product.level == ProductLevel::surface_temperature && product.collection == 2;
    return raster.product || (recognised && !raster.scale && !raster.offset && raster.unit.empty());
}

/// What turns the numbers of a raster of no known product into kelvin.
Scaling scaling_of(const PlanSurfaceRaster& raster, const RasterInfo& info) {
    auto unit = raster.unit.empty() ? info.unit : raster.unit;
    if (unit == "Kelvin" || unit == "kelvin") unit = "K";
    if (unit != "K" && unit != "degC")
        throw Error(Cause::usage,
                    unit.empty() ? "nothing says the unit of the temperatures"
                                 : "temperatures in \"" + unit + "\" are not understood",
                    info.name.path.string(), "add unit: K or unit: degC, or product: landsat-c2");
    const Scaling stored{raster.scale.value_or(info.scale.value_or(1)),
                         raster.offset.value_or(info.offset.value_or(0))};
    return after(stored, unit_scaling(unit));
}

void SurfaceTemperatureResolver::from_raster(const PlanSurfaceRaster& raster, const Place& place) {
    // USGS Landsat 8-9 Collection 2 Level-2 science product guide: kelvin = 0.00341802 * number + 149, 0 is no data.
    constexpr Scaling landsat{0.00341802, 149.0};
    problems_.attempt(place, [&] {
        const auto info = inspect(raster_of(raster.raster), limits_of(options_));
        const auto product = recognise(info.name.path, {}, info.metadata);
        check_product(product, info.name.path);
        const bool known = is_landsat(raster, product);
        run_.heat.surface_k =
            opened("surface_temperature", raster.raster, known ? landsat : scaling_of(raster, info),
                   known ? std::optional(0.0) : std::nullopt);
        if (known)
            run_.inputs.back().notes.emplace_back(
                "Landsat Collection 2: kelvin = 0.00341802 * number + 149");
        if (known || raster.quality) read_quality(raster, product);
        std::optional<UtcSeconds> taken = product.acquired_utc;
        if (!raster.time.empty()) taken = sunbudget::resolve(parse_instant(raster.time), Zone(), 0);
        judge_time(taken, raster);
        run_.methods.push_back(&method("surface_temperature", "given"));
    });
}

void SurfaceTemperatureResolver::resolve() {
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
        from_raster(std::get<PlanSurfaceRaster>(value), plan_.surface_temperature->place);
    }
}

}  // namespace

void resolve_surface_temperature(const Plan& plan, const ResolveOptions& options, Run& run,
                                 RunProblems& problems) {
    SurfaceTemperatureResolver(plan, options, run, problems).resolve();
}

}  // namespace sunbudget
