#include "sunbudget/tables/quality.hpp"

namespace sunbudget {

namespace {

QualityRow source(std::uint16_t value, std::string name, std::string text) {
    return {std::move(name), quality::source_mask, value, std::move(text)};
}

QualityRow flag(std::uint16_t bit, std::string name, std::string text) {
    return {std::move(name), bit, bit, std::move(text)};
}

const std::vector<QualityRow>& table() {
    using namespace quality;
    static const std::vector<QualityRow> rows{
        source(no_surface, "no_surface", "no surface data: the albedo is nodata"),
        source(class_table, "class_table", "albedo of the land-cover class"),
        source(default_class, "default_class",
               "the class is not in the table: albedo of the default class"),
        source(given_albedo, "given_albedo", "albedo given as a raster or a number"),
        source(reflectance, "reflectance", "albedo from the image's reflectance"),
        source(filled, "filled", "the image was rejected here: filled from the land cover"),
        flag(cloud, "cloud", "the image shows cloud"),
        flag(dilated_cloud, "dilated_cloud", "the image is near a cloud"),
        flag(cirrus, "cirrus", "the image shows cirrus"),
        flag(cloud_shadow, "cloud_shadow", "the image shows a cloud's shadow"),
        flag(snow, "snow", "the image shows snow; the albedo is kept"),
        flag(saturated, "saturated", "a band of the image is saturated"),
        flag(high_aerosol, "high_aerosol", "much aerosol: the image's reflectance is doubtful"),
        flag(out_of_range, "out_of_range", "the albedo found was outside 0 to 1"),
        flag(no_elevation, "no_elevation", "no elevation here: layers on terrain are nodata"),
        flag(outside_projection, "outside_projection", "the pixel has no place on the ground"),
        flag(no_sky, "no_sky", "the raster of the sky has no usable value here: light is nodata"),
        flag(outside_scope, "outside_scope",
             "not a dry built or bare surface, or too steep: no balanced temperature, no sri"),
    };
    return rows;
}

}  // namespace

std::span<const QualityRow> quality_rows() {
    return table();
}

std::vector<std::string> quality_meanings(std::uint16_t pixel) {
    std::vector<std::string> names;
    for (const auto& row : table())
        if ((pixel & row.mask) == row.value) names.push_back(row.name);
    return names;
}

}  // namespace sunbudget
