#include "reflectance.hpp"

#include <algorithm>

#include "resolve_parts.hpp"
#include "sunbudget/raster/scene.hpp"

namespace sunbudget {

namespace {

ImageFiles scene_images(const PlanReflectance& image) {
    const auto& profile = sensor(*image.sensor);
    const auto scene = scene_in(image.scene->value.file);
    const auto weights = weights_of(image);
    std::vector<std::string> wanted;
    for (const auto& weight : weights.weights)
        if (const auto* band = profile.band(weight.band)) wanted.push_back(band->product);
    const auto found = scene_files(scene, wanted);
    ImageFiles files;
    for (const auto& weight : weights.weights)
        if (const auto* band = profile.band(weight.band))
            files.bands.push_back(
                {band->name, {found.at(band->product), 0, {}}, image.scene->place});
    for (const auto& quality : quality_rasters(image))
        if (const auto file = scene.files.find(quality.product); file != scene.files.end())
            files.quality.push_back({quality.product, {file->second, 0, {}}, image.scene->place});
    return files;
}

}  // namespace

WeightSet weights_of(const PlanReflectance& image) {
    if (!image.weights) return weight_set(*image.sensor, **image.method);
    WeightSet set{.name = "own-weights",
                  .sensor = *image.sensor,
                  .weights = {},
                  .constant = image.weights->constant ? **image.weights->constant : 0.0,
                  .fit_error = unknown_fit_error,
                  .text = "weights given in the plan; their error is not known, 0.03 is taken",
                  .source = "given by the user"};
    for (std::size_t i = 0; i < plan_band_names.size(); ++i)
        if (const auto& weight = image.weights->bands.of[i]; weight && **weight != 0)
            set.weights.push_back({plan_band_names[i], **weight});
    return set;
}

ImageFiles image_files(const PlanReflectance& image) {
    ImageFiles files;
    if (image.scene)
        files = scene_images(image);
    else
        for (std::size_t i = 0; i < plan_band_names.size(); ++i)
            if (const auto& raster = image.bands->of[i])
                files.bands.push_back({plan_band_names[i], raster_of(**raster), raster->place});
    for (const auto& [key, product, given] : quality_rasters(image)) {
        if (!*given) continue;
        std::erase_if(files.quality, [&](const auto& file) { return file.name == product; });
        files.quality.push_back({product, raster_of(***given), (*given)->place});
    }
    return files;
}

}  // namespace sunbudget
