#include "explain_parts.hpp"

#include <algorithm>

#include "sunbudget/base/text.hpp"

namespace sunbudget {

std::string with_unit(const std::string& name, const std::string& unit) {
    if (unit == "1" || (unit == "h" && name.ends_with("hours"))) return name;
    if (unit == "degree") return name + "_deg";
    auto suffix = lower_case(unit);
    std::ranges::replace(suffix, '/', '_');
    return name + "_" + suffix;
}

std::string band_name(const Run& run, std::size_t band) {
    return run.times->instant ? format_utc(*run.times->instant) : run.times->periods[band].name;
}

const ClassUse* class_of(const Run& run, const InputPixel& input) {
    if (input.file->role != "surface.cover.raster" || !input.value) return nullptr;
    const auto found =
        std::ranges::find(run.classes, static_cast<int>(*input.value), &ClassUse::code);
    return found == run.classes.end() ? nullptr : &*found;
}

std::vector<WeightedBand> weighted_bands(const Run& run, const PixelAccount& account) {
    std::vector<WeightedBand> bands;
    if (const auto* image = std::get_if<ReflectanceSurface>(&run.surface))
        for (const auto& band : image->bands)
            for (const auto& input : account.inputs)
                if (input.file->source->info().name == band.reflectance.info().name && input.value)
                    bands.push_back({band.name, band.weight, *input.value});
    return bands;
}

}  // namespace sunbudget
