#include <array>
#include <cmath>
#include <fstream>

#include "mtl.hpp"
#include "product_facts.hpp"
#include "sunbudget/base/text.hpp"
#include "sunbudget/raster/gdal_setup.hpp"

namespace sunbudget {
namespace {

namespace fs = std::filesystem;

/// Where each collection keeps what is wanted here.
struct Layout {
    const char* product;    // group of the identifier
    const char* level_key;  // in `product`, or where `level_group` says
    const char* level_group;
    const char* date_group;
    const char* level2_scale;  // "" where there is no Level-2
    const char* level1_scale;
};
constexpr Layout collection2{"PRODUCT_CONTENTS",
                             "PROCESSING_LEVEL",
                             "PRODUCT_CONTENTS",
                             "IMAGE_ATTRIBUTES",
                             "LEVEL2_SURFACE_REFLECTANCE_PARAMETERS",
                             "LEVEL1_RADIOMETRIC_RESCALING"};
constexpr Layout collection1{"METADATA_FILE_INFO", "DATA_TYPE", "PRODUCT_METADATA",
                             "PRODUCT_METADATA",   "",          "RADIOMETRIC_RESCALING"};

[[noreturn]] void refuse(const std::string& what, const Mtl& mtl) {
    throw Error(Cause::input, what, mtl.where(), "fetch the scene's metadata file again");
}

std::optional<UtcSeconds> acquired(const Mtl& mtl, const Layout& layout) {
    const auto date = mtl.text(layout.date_group, "DATE_ACQUIRED");
    const auto time = mtl.text(layout.date_group, "SCENE_CENTER_TIME");
    if (!date || !time) return std::nullopt;
    try {
        return resolve(parse_instant(*date + "T" + *time), Zone(), 0);
    } catch (const Error&) {
        refuse("the time of acquisition is \"" + *date + " " + *time + "\"", mtl);
    }
}

std::optional<double> angle(const Mtl& mtl, const char* key, double lowest, double highest) {
    const auto value = mtl.number("IMAGE_ATTRIBUTES", key);
    if (value && (*value < lowest || *value > highest))
        refuse(std::string(key) + " is " + shortest(*value) + " degrees", mtl);
    return value;
}

void add_scaling(ProductFacts& facts, const Mtl& mtl, const std::string& group,
                 const std::string& prefix) {
    for (int band = 1; band <= 11; ++band) {
        const auto number = std::to_string(band);
        const auto scale = mtl.number(group, "REFLECTANCE_MULT_BAND_" + number);
        const auto offset = mtl.number(group, "REFLECTANCE_ADD_BAND_" + number);
        if (scale && offset) facts.scaling[prefix + number] = {*scale, *offset};
    }
}

/// The identifier decides what the product is; the file's own word for the level may not differ.
ProductFacts identified(const Mtl& mtl, const Layout& layout) {
    auto id = mtl.text(layout.product, "LANDSAT_PRODUCT_ID");
    if (!id) id = mtl.text(layout.product, "LANDSAT_SCENE_ID");
    if (!id) refuse("the metadata file names no product", mtl);
    const auto facts = facts_of_id(*id);
    if (!facts) refuse("\"" + *id + "\" is the name of no Landsat product known here", mtl);
    const auto level = mtl.text(layout.level_group, layout.level_key);
    if (level && level->starts_with("L1") != (facts->level == ProductLevel::level1))
        refuse("the product is " + *id + ", but its level is " + *level, mtl);
    return *facts;
}

ProductFacts facts_of(const Mtl& mtl) {
    const bool is_second = mtl.text(collection2.product, collection2.level_key).has_value();
    const auto& layout = is_second ? collection2 : collection1;
    auto facts = identified(mtl, layout);
    facts.utc = acquired(mtl, layout);
    const auto date = mtl.text(layout.date_group, "DATE_ACQUIRED");
    if (date && facts.date && *date != format_date(*facts.date))
        refuse("the product is " + facts.id + ", but was acquired on " + *date, mtl);
    facts.sun_elevation_deg = angle(mtl, "SUN_ELEVATION", -90, 90);
    facts.sun_azimuth_deg = angle(mtl, "SUN_AZIMUTH", -360, 360);
    if (facts.sun_azimuth_deg && *facts.sun_azimuth_deg < 0) *facts.sun_azimuth_deg += 360;
    const bool level1 = facts.level == ProductLevel::level1;
    add_scaling(facts, mtl, level1 ? layout.level1_scale : layout.level2_scale,
                level1 ? "B" : "SR_B");
    return facts;
}

}  // namespace

std::string metadata_text(const fs::path& file) {
    constexpr std::uintmax_t largest = 1 << 20;  // real ones: 15 kB (Landsat), 0.4 MB (Sentinel-2)
    const auto fail = [&](const std::string& what) {
        throw Error(Cause::input, what, file.string(), "name the scene's metadata file");
    };
    refuse_special_name(file);
    std::error_code error;
    if (!fs::is_regular_file(file, error)) fail("no such metadata file");
    if (const auto size = fs::file_size(file, error); error || size > largest)
        fail("a metadata file is smaller than a megabyte");
    std::ifstream stream(file, std::ios::binary);
    std::string text{std::istreambuf_iterator<char>(stream), {}};
    if (!stream.is_open() || stream.bad()) fail("the metadata file cannot be read");
    if (text.find('\0') != std::string::npos) fail("this is no text");
    return text;
}

ProductFacts facts_of_mtl(const fs::path& file) {
    const auto text = metadata_text(file);
    const bool is_json = lower_case(file.extension().string()) == ".json";
    return facts_of(is_json ? Mtl::from_json(text, file.string())
                            : Mtl::from_text(text, file.string()));
}

}  // namespace sunbudget
