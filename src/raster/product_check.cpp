#include <fmt/format.h>

#include <algorithm>

#include "sunbudget/base/text.hpp"
#include "sunbudget/raster/product.hpp"

namespace sunbudget {
namespace {

std::string first_evidence(const Product& product) {
    return product.evidence.empty() ? "" : product.evidence.front();
}

std::string where(const BandFile& band) {
    return fmt::format("band {}: {}", band.role, band.product.file.string());
}

/// What to do with a Level-1 file, named after the product where the form of the name is known.
std::string level2_advice(const Product& product) {
    if (product.platform == "Sentinel-2") return "use the scene's Level-2A product";
    return "use the scene's Level-2 product (files ..._SR_B2.TIF and so on)";
}

Problem level1_problem(const BandFile& band, bool declared) {
    const auto& product = band.product;
    const auto recognised = first_evidence(product);
    if (!declared)
        return {fmt::format("not corrected for the atmosphere ({})", recognised), where(band),
                level2_advice(product)};
    return {
        fmt::format("declared surface-reflectance, but it is a Level-1 product ({})", recognised),
        where(band),
        level2_advice(product) +
            "; numbers you corrected yourself need a name that does not say Level-1"};
}

Problem unknown_problem(const BandFile& band) {
    return {
        "nothing says that this is surface reflectance: neither the file's name nor a metadata "
        "file beside it nor its own metadata",
        where(band),
        "if it is, say \"product: surface-reflectance\"; other numbers would give a false albedo"};
}

std::optional<Problem> level_problem(const BandFile& band, DeclaredProduct declared) {
    switch (band.product.level) {
        case ProductLevel::surface_reflectance:
            return std::nullopt;
        case ProductLevel::level1:
            return level1_problem(band, declared == DeclaredProduct::surface_reflectance);
        case ProductLevel::unknown:
            if (declared == DeclaredProduct::surface_reflectance) return std::nullopt;
            return unknown_problem(band);
        default:
            return Problem{fmt::format("no reflectance but {} ({})", text_of(band.product.level),
                                       band.product.band),
                           where(band), "name the file of the band"};
    }
}

std::optional<Problem> sensor_problem(const BandFile& band, const BandRules& rules) {
    const auto& product = band.product;
    if (product.id.empty() || rules.sensor == "generic" || product.sensor == rules.sensor)
        return std::nullopt;
    const bool has_profile = std::find(rules.profiles.begin(), rules.profiles.end(),
                                       product.sensor) != rules.profiles.end();
    return Problem{
        fmt::format("stored otherwise than {} says ({})", rules.sensor, first_evidence(product)),
        where(band),
        has_profile ? "say \"sensor: " + product.sensor + "\""
                    : "use \"sensor: generic\" with scale, offset and nodata"};
}

/// Somebody who keeps reflectance as it is, under the name of the product it was made from.
std::optional<Problem> type_problem(const BandFile& band, const BandRules& rules) {
    if (!band.type || whole_numbers(*band.type) || rules.sensor == "generic") return std::nullopt;
    return Problem{fmt::format("stored as {}; files of {} hold whole numbers, so this seems to be "
                               "scaled already",
                               text_of(*band.type), rules.sensor),
                   where(band), "use \"sensor: generic\" with the scale that is left to apply (1)"};
}

std::string role_of(const std::string& product_band, const std::vector<BandRole>& roles) {
    for (const auto& role : roles)
        if (role.product_band == product_band) return role.role;
    return {};
}

std::optional<Problem> role_problem(const BandFile& band, const BandRules& rules) {
    const auto& product = band.product;
    if (product.band.empty() || product.sensor != rules.sensor) return std::nullopt;
    for (const auto& role : rules.roles) {
        if (role.role != band.role || role.product_band == product.band) continue;
        const auto own = role_of(product.band, rules.roles);
        const auto really = own.empty() ? product.band : product.band + ", the band " + own;
        return Problem{fmt::format("this is {}; {} is {}", really, band.role, role.product_band),
                       where(band), "name the right file"};
    }
    return std::nullopt;
}

/// The first band that is known to be of another scene than the bands before it.
std::optional<Problem> scene_problem(std::span<const BandFile> bands) {
    const BandFile* first = nullptr;
    for (const auto& band : bands) {
        if (band.product.id.empty()) continue;
        if (first == nullptr) first = &band;
        if (first->product.id == band.product.id) continue;
        return Problem{fmt::format("the bands are of two scenes: {} of {}, {} of {}", first->role,
                                   first->product.id, band.role, band.product.id),
                       where(band), "take all bands from one scene"};
    }
    return std::nullopt;
}

}  // namespace

std::vector<Problem> band_problems(std::span<const BandFile> bands, const BandRules& rules) {
    std::vector<Problem> problems;
    if (rules.declared == DeclaredProduct::top_of_atmosphere)
        problems.push_back({"declared top-of-atmosphere: the weights hold for surface reflectance",
                            {},
                            "correct the bands for the atmosphere, or fetch a surface "
                            "reflectance product"});
    for (const auto& band : bands) {
        // One problem a band: what is no reflectance at all has no encoding or role to be wrong.
        auto problem = level_problem(band, rules.declared);
        if (!problem) problem = sensor_problem(band, rules);
        if (!problem) problem = type_problem(band, rules);
        if (!problem) problem = role_problem(band, rules);
        if (problem) problems.push_back(*problem);
    }
    if (const auto problem = scene_problem(bands)) problems.push_back(*problem);
    return problems;
}

std::optional<std::string> scaling_warning(const Product& product, const Scaling& used) {
    if (!product.scaling || *product.scaling == used) return std::nullopt;
    return fmt::format("scale {}, offset {} are used; {} says scale {}, offset {}",
                       shortest(used.scale), shortest(used.offset),
                       product.metadata_file.filename().string(), shortest(product.scaling->scale),
                       shortest(product.scaling->offset));
}

void refuse_unless_surface_reflectance(std::span<const BandFile> bands, const BandRules& rules) {
    auto problems = band_problems(bands, rules);
    if (!problems.empty()) throw Error(Cause::input, std::move(problems));
}

}  // namespace sunbudget
