#pragma once

#include <array>
#include <string>
#include <utility>
#include <vector>

#include "sunbudget/plan/plan.hpp"
#include "sunbudget/raster/raster_file.hpp"
#include "sunbudget/tables/sensors.hpp"

namespace sunbudget {

/// A key of surface.reflectance, the raster of a product that it names, and the plan's value.
struct QualityKey {
    const char* key;
    const char* product;
    const Maybe<PlanRaster>* given;
};
[[nodiscard]] inline std::array<QualityKey, 3> quality_rasters(const PlanReflectance& image) {
    return {{{"quality", "QA_PIXEL", &image.quality},
             {"saturation", "QA_RADSAT", &image.saturation},
             {"aerosol", "SR_QA_AEROSOL", &image.aerosol}}};
}

/// The error of weights of one's own, which nobody told: as that of published weights on bands they
/// were not made for.
inline constexpr double unknown_fit_error = 0.03;
/// The plan's own weights, or its method's. The plan has its defaults filled in.
[[nodiscard]] WeightSet weights_of(const PlanReflectance& image);

/// A raster of an image: the plan's word for it, where it is and the key that says so.
struct ImageFile {
    std::string name;  ///< blue, red, ...; QA_PIXEL, ...
    RasterName raster;
    Place place;
};

/// The rasters that a plan names one by one, or that its scene's folder holds.
struct ImageFiles {
    std::vector<ImageFile> bands;    ///< in the order of the spectrum
    std::vector<ImageFile> quality;  ///< those there are
};

/// Of a scene's bands only those that have a weight; of a list's all. Throws Error(input) when the
/// scene's folder is none, or lacks a band.
[[nodiscard]] ImageFiles image_files(const PlanReflectance& image);

}  // namespace sunbudget
