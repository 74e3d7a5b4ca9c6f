#pragma once

#include <optional>
#include <variant>
#include <vector>

#include "sunbudget/model/longwave.hpp"
#include "sunbudget/model/quality_raster.hpp"
#include "sunbudget/physics/surface_balance.hpp"
#include "sunbudget/raster/source.hpp"

namespace sunbudget {

/// Emissivity as the land cover's classes have it.
struct ClassEmissivity {};
/// From an image's plants; built kinds of a land cover keep their class's.
struct NdviEmissivity {
    Source red, nir;
};
using Emissivity = std::variant<double, Source, ClassEmissivity, NdviEmissivity>;

/// Where the ground's temperature comes from.
enum class SurfaceFrom {
    nowhere,
    air,  ///< with the air: a number, a weather table's column, or the air's own and an offset
    raster,
    balance,  ///< what the light and the air make of a dry surface
};

/// All of a run that is about heat.
struct Heat {
    std::optional<Longwave> longwave;  ///< nothing: no layer needs it
    std::vector<bool>
        thin;  ///< bands of which the weather table covers too little: no data; empty: none
    std::optional<Emissivity> emissivity;
    SurfaceFrom surface = SurfaceFrom::nowhere;
    std::optional<Source> surface_k;  ///< SurfaceFrom::raster
    std::optional<QualityRaster>
        surface_quality;       ///< tells where that raster shows a cloud in the ground's place
    Wind wind = Wind::medium;  ///< for the balance and the solar reflectance index
};

}  // namespace sunbudget
