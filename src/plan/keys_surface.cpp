#include <algorithm>

#include "keys_parts.hpp"
#include "names.hpp"
#include "sunbudget/tables/class_table.hpp"
#include "sunbudget/tables/sensors.hpp"

namespace sunbudget {

using namespace forms;

namespace {

Form cover_form() {
    // Class codes are stored as 16-bit numbers.
    return map({{"raster", {of(ValueKind::raster)}, "land-cover classes", {}, true},
                {"classes",
                 {choice(shipped_class_table_names()), path_beside_names()},
                 "the table of albedo by class: one of ours or a CSV file",
                 {},
                 true},
                {"default_class",
                 {integer(0, 65535), choice({"none"})},
                 "the class that stands in for a code without a row; none: such codes stop the run",
                 "none"}});
}

Form albedo_form() {
    return map({{"raster", {of(ValueKind::raster)}, "broadband albedo"},
                {"scale",
                 {number_above(0)},
                 "albedo = stored value * scale + offset; default: the file's own"},
                {"offset", {number()}, "see scale; default: the file's own"},
                {"value", {number(0, 1)}, "one albedo everywhere"},
                {"uncertainty",
                 {number(0, 1)},
                 "standard uncertainty of the albedo, for the layers albedo_uncertainty and "
                 "net_shortwave_uncertainty"}},
               {exactly_one({"raster", "value"}), needs("scale", {"raster"}),
                needs("offset", {"raster"})});
}

/// The names of all sensors' quality tests, but for "fill", which no plan can choose.
std::vector<std::string> quality_test_names() {
    std::vector<std::string> names;
    for (const auto& sensor : sensors())
        for (const auto& test : sensor.tests)
            if (test.name != "fill" && std::ranges::find(names, test.name) == names.end())
                names.push_back(test.name);
    return names;
}

std::vector<std::string> method_of_weights_names() {
    std::vector<std::string> names;
    for (const auto& set : weight_sets())
        if (std::ranges::find(names, set.name) == names.end()) names.push_back(set.name);
    return names;
}

std::vector<Key> one_key_a_band(const Form& form, const std::string& doc) {
    std::vector<Key> keys;
    for (const auto* name : plan_band_names) keys.push_back({name, {form}, doc});
    return keys;
}

Form weights_form() {
    auto keys = one_key_a_band(number(), "of this band's reflectance");
    keys.push_back({"constant", {number()}, "added to the sum", "0"});
    return map(std::move(keys));
}

Form reflectance_form() {
    const Form raster = of(ValueKind::raster);
    const auto methods = method_of_weights_names();
    return map(
        {{"sensor",
          {choice(sensor_names())},
          "how the numbers are stored; generic: as scale, offset, nodata and weights say",
          {},
          true},
         {"bands",
          {map(one_key_a_band(raster, "surface reflectance"))},
          "a raster for each band; one that the method does not need is left alone"},
         {"scene", {of(ValueKind::path)}, "a product's folder, whose files are found by name"},
         {"scale",
          {number_above(0)},
          "reflectance = stored value * scale + offset; default: the file's own, else the "
          "sensor's"},
         {"offset", {number()}, "see scale; default beside a scale: the sensor's"},
         {"nodata", {number()}, "no data; default: the file's own, else the sensor's"},
         {"method", {choice(methods)}, "published weights of the bands", methods.front()},
         {"weights",
          {weights_form()},
          "weights of one's own: albedo = constant + sum of weight * reflectance"},
         {"quality", {raster}, "the product's quality bits (Landsat: QA_PIXEL)"},
         {"saturation", {raster}, "bands that were blinded (Landsat: QA_RADSAT)"},
         {"aerosol", {raster}, "quality of the aerosol (Landsat: SR_QA_AEROSOL)"},
         {"reject",
          {list(choice(quality_test_names()), 0, {}, true)},
          "what the image's pixels are not used for; default: all but snow, which is a surface, "
          "and high_aerosol"},
         {"fill",
          {choice(fill_names)},
          "what pixels without an image get: no data, or the albedo of surface.cover",
          "nodata"},
         {"product",
          {choice(product_names)},
          "what the numbers are; auto: recognised by names and metadata, else refused",
          "auto"},
         {"mtl",
          {of(ValueKind::path)},
          "the scene's metadata file; default: found beside the bands"},
         {"implausible",
          {choice(implausible_names)},
          "values unlike surface reflectance stop the run, or warn",
          "stop"}},
        {exactly_one({"bands", "scene"}), at_most_one({"method", "weights"}),
         needs("offset", {"scale"})});
}

Form emissivity_form() {
    return map(
        {{"raster", {of(ValueKind::raster)}, "emissivity of each pixel"},
         {"scale", {number_above(0)}, "emissivity = stored value * scale + offset"},
         {"offset", {number()}, "see scale"},
         {"from",
          {choice(emissivity_from_names)},
          "cover: of the class; ndvi: from the image (Sobrino 2004), built kinds of a cover keep "
          "their class's"}},
        {exactly_one({"raster", "from"}), needs("scale", {"raster"}), needs("offset", {"raster"})});
}

}  // namespace

Form surface_form() {
    return map({{"cover", {cover_form()}, "albedo from land cover"},
                {"reflectance", {reflectance_form()}, "albedo from an image's surface reflectance"},
                {"albedo", {albedo_form()}, "albedo as given"},
                {"emissivity",
                 {number(0, 1), emissivity_form()},
                 "share of a black body's heat radiation: a number, or a map with raster, or with "
                 "from; default: of the cover's classes"}},
               {at_most_one({"cover", "albedo"}), at_most_one({"reflectance", "albedo"})});
}

Form terrain_form() {
    // From below the shore of the Dead Sea to above Everest.
    const Form raster = of(ValueKind::raster);
    return map({{"elevation",
                 {length(-500, 9000), raster, list(raster, 1)},
                 "heights above sea level: a raster, several of which the first with a value "
                 "counts, or one height everywhere"},
                {"unit",
                 {choice(height_unit_names)},
                 "of the rasters' heights; default: as the files say"},
                {"slope_from",
                 {choice(slope_from_names), path_beside_names()},
                 "planes of the surface: of the elevation, level, or of another (bare-ground) "
                 "raster; shadows are always the elevation's",
                 "elevation"},
                {"directions",
                 {integer(8, 360)},
                 "in which horizons are looked for, a multiple of 4",
                 "64"},
                {"reach", {length(100, 100000)}, "how far a horizon is looked for", "20 km"}},
               {needs("unit", {"elevation"}), needs("slope_from", {"elevation"}),
                needs("directions", {"elevation"}), needs("reach", {"elevation"})});
}

}  // namespace sunbudget
