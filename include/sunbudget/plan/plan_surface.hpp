#pragma once

#include <array>
#include <optional>
#include <string>
#include <variant>
#include <vector>

#include "sunbudget/plan/plan_values.hpp"

namespace sunbudget {

/// The name of a table that ships with the program, or a file of the user's.
using TableChoice = std::variant<std::string, PlanPath>;

struct PlanCover {
    Place place;
    Given<PlanRaster> raster;
    Given<TableChoice> classes;
    /// The class that codes without a row get; `default_class: none` is nullopt inside.
    Maybe<std::optional<int>> default_class;
    friend bool operator==(const PlanCover& a, const PlanCover& b) {
        return a.raster == b.raster && a.classes == b.classes && a.default_class == b.default_class;
    }
};

/// Exactly one of `raster` and `value`; scale and offset belong to the raster.
struct PlanAlbedo {
    Place place;
    Maybe<PlanRaster> raster;
    Maybe<double> scale;
    Maybe<double> offset;
    Maybe<double> value;
    Maybe<double> uncertainty;
    friend bool operator==(const PlanAlbedo& a, const PlanAlbedo& b) {
        return a.raster == b.raster && a.scale == b.scale && a.offset == b.offset &&
               a.value == b.value && a.uncertainty == b.uncertainty;
    }
};

/// The plan's names of reflectance bands, in the order of the spectrum.
inline constexpr std::array<const char*, 6> plan_band_names{"blue", "green", "red",
                                                            "nir",  "swir1", "swir2"};

/// Something for each of the bands that are named, in the order of `plan_band_names`.
template <class T>
struct PlanBands {
    Place place;
    std::array<Maybe<T>, plan_band_names.size()> of;
    friend bool operator==(const PlanBands& a, const PlanBands& b) { return a.of == b.of; }
};

/// albedo = constant + sum of weight times reflectance.
struct PlanWeights {
    PlanBands<double> bands;
    Maybe<double> constant;
    friend bool operator==(const PlanWeights&, const PlanWeights&) = default;
};

enum class ProductChoice { automatic, surface_reflectance, top_of_atmosphere };
enum class FillFrom { nodata, cover };
enum class Implausible { stop, allow };

/// Exactly one of `bands` and `scene`; at most one of `method` and `weights`.
struct PlanReflectance {
    Place place;
    Given<std::string> sensor;
    std::optional<PlanBands<PlanRaster>> bands;
    Maybe<PlanPath> scene;
    Maybe<double> scale;
    Maybe<double> offset;
    Maybe<double> nodata;
    Maybe<std::string> method;
    std::optional<PlanWeights> weights;
    Maybe<PlanRaster> quality;
    Maybe<PlanRaster> saturation;
    Maybe<PlanRaster> aerosol;
    Maybe<std::vector<std::string>> reject;  ///< names of quality tests; absent: as the sensor says
    Maybe<FillFrom> fill;
    Maybe<ProductChoice> product;
    Maybe<PlanPath> mtl;
    Maybe<Implausible> implausible;
    friend bool operator==(const PlanReflectance& a, const PlanReflectance& b) {
        return a.sensor == b.sensor && a.bands == b.bands && a.scene == b.scene &&
               a.scale == b.scale && a.offset == b.offset && a.nodata == b.nodata &&
               a.method == b.method && a.weights == b.weights && a.quality == b.quality &&
               a.saturation == b.saturation && a.aerosol == b.aerosol && a.reject == b.reject &&
               a.fill == b.fill && a.product == b.product && a.mtl == b.mtl &&
               a.implausible == b.implausible;
    }
};

enum class EmissivityFrom { cover, ndvi };
struct PlanEmissivity {
    std::variant<double, PlanFieldRaster, EmissivityFrom> value;
    friend bool operator==(const PlanEmissivity&, const PlanEmissivity&) = default;
};

/// At most one of them, but for the cover that fills what the image does not show.
struct PlanSurface {
    std::optional<PlanCover> cover;
    std::optional<PlanReflectance> reflectance;
    std::optional<PlanAlbedo> albedo;
    Maybe<PlanEmissivity> emissivity;
    friend bool operator==(const PlanSurface&, const PlanSurface&) = default;
};

enum class HeightUnit { m, ft, us_ft };
enum class SlopeFrom { elevation, flat };

struct PlanTerrain {
    /// Rasters, of which the first that has a value counts; or one height everywhere.
    Maybe<std::variant<std::vector<PlanRaster>, PlanLength>> elevation;
    Maybe<HeightUnit> unit;  ///< of the rasters; default: as the files say
    Maybe<std::variant<SlopeFrom, PlanPath>> slope_from;
    Maybe<int> directions;
    Maybe<PlanLength> reach;
    friend bool operator==(const PlanTerrain&, const PlanTerrain&) = default;
};

}  // namespace sunbudget
