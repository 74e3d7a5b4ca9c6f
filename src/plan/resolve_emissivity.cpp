#include <fmt/format.h>

#include <algorithm>
#include <cmath>

#include "heat_parts.hpp"

namespace sunbudget {

namespace {

/// Given, or of the cover's classes, or from an image's bands.
class EmissivityResolver : HeatPart {
  public:
    using HeatPart::HeatPart;
    void resolve();

  private:
    void from_classes(const Place& place);
    void from_image(const Place& place);
};

void EmissivityResolver::from_classes(const Place& place) {
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

void EmissivityResolver::from_image(const Place& place) {
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

void EmissivityResolver::resolve() {
    if (!plan_.surface.emissivity) return from_classes({});
    const auto& place = plan_.surface.emissivity->place;
    problems_.attempt(place, [&] {
        const auto& value = plan_.surface.emissivity->value.value;
        if (const auto* from = std::get_if<EmissivityFrom>(&value))
            return *from == EmissivityFrom::cover ? from_classes(place) : from_image(place);
        if (const auto* number = std::get_if<double>(&value))
            run_.heat.emissivity = *number;
        else
            run_.heat.emissivity = opened("surface.emissivity", std::get<PlanFieldRaster>(value));
        run_.methods.push_back(&method("emissivity", "given"));
    });
}

}  // namespace

void resolve_emissivity(const Plan& plan, const ResolveOptions& options, Run& run,
                        RunProblems& problems) {
    EmissivityResolver(plan, options, run, problems).resolve();
}

}  // namespace sunbudget
