#include "sunbudget/raster/product.hpp"

#include <fmt/format.h>

#include "product_facts.hpp"
#include "sunbudget/base/text.hpp"

namespace sunbudget {
namespace {

namespace fs = std::filesystem;

/// A metadata file and how it was found.
struct MetadataFile {
    fs::path path;
    bool named_by_user = false;
};

bool is_file(const fs::path& path) {
    std::error_code ignored;
    return fs::is_regular_file(path, ignored);
}

bool is_sentinel_metadata(const fs::path& path) {
    return lower_case(path.extension().string()) == ".xml";
}

/// Landsat's lies beside the bands. Sentinel-2's lies beside them, or above
/// GRANULE/.../IMG_DATA/R10m as it is delivered.
std::optional<MetadataFile> metadata_beside(const fs::path& file, const ProductFacts& name) {
    auto folder = file.parent_path();
    if (name.platform == "Sentinel-2") {
        for (int up = 0; up < 5; ++up, folder = folder.empty() ? ".." : folder / "..")
            for (const auto* called : {"MTD_MSIL2A.xml", "MTD_MSIL1C.xml"})
                if (const auto path = folder / called; is_file(path)) return {{path, false}};
        return std::nullopt;
    }
    for (const auto* ending : {"_MTL.txt", "_MTL.json"})
        if (const auto path = folder / (name.id + ending); is_file(path)) return {{path, false}};
    return std::nullopt;
}

[[noreturn]] void contradict(const Product& product, const std::string& here,
                             const std::string& witness, const std::string& there) {
    throw Error(Cause::input,
                fmt::format("the file's name says {}, {} says {}", here, witness, there),
                product.file.string(),
                "put the files of one product together, under the names they came with");
}

void take_identity(Product& product, const ProductFacts& facts, const std::string& witness) {
    product.level = facts.level;
    product.sensor = facts.sensor;
    product.platform = facts.platform;
    product.collection = facts.collection;
    product.id = facts.id;
    product.band = facts.band;
    auto line = fmt::format("{}, {}", text_of(facts.level), facts.platform);
    if (facts.collection > 0) line += fmt::format(", Collection {}", facts.collection);
    product.evidence.push_back(line + ": from " + witness);
}

/// Sentinel-2's names tell the level by a word that may have been cut off, so its metadata file knows
/// better than a name that lacks the word.
void add_sentinel_level(Product& product, const ProductFacts& facts, const std::string& witness) {
    if (product.level == ProductLevel::auxiliary) return;
    if (product.level == ProductLevel::surface_reflectance && facts.level == ProductLevel::level1)
        contradict(product, std::string(text_of(product.level)), witness,
                   std::string(text_of(facts.level)));
    product.level = facts.level;
    product.sensor = facts.sensor;
}

/// A name of known form stands; whatever another witness says may only agree with it.
void add_identity(Product& product, const ProductFacts& facts, const std::string& witness) {
    if (product.id.empty())
        take_identity(product, facts, witness);
    else if (product.id != facts.id)
        contradict(product, product.id, witness, facts.id);
    else if (product.platform == "Sentinel-2")
        add_sentinel_level(product, facts, witness);
}

void add_acquisition(Product& product, const ProductFacts& facts, const std::string& witness) {
    if (facts.date) product.date = facts.date;
    const bool is_news = facts.utc && facts.utc != product.acquired_utc;
    if (is_news) product.acquired_utc = facts.utc;
    if (is_news)
        product.evidence.push_back("acquired " + format_utc(*facts.utc) + ": from " + witness);
    product.sun_elevation_deg = facts.sun_elevation_deg;
    product.sun_azimuth_deg = facts.sun_azimuth_deg;
    if (facts.sun_elevation_deg && facts.sun_azimuth_deg)
        product.evidence.push_back(
            fmt::format("sun elevation {:.3f} deg, azimuth {:.3f} deg: from {}",
                        *facts.sun_elevation_deg, *facts.sun_azimuth_deg, witness));
}

void add_scaling(Product& product, const ProductFacts& facts, const std::string& witness) {
    const auto found = facts.scaling.find(product.band);
    if (found == facts.scaling.end()) return;
    product.scaling = found->second;
    product.evidence.push_back(fmt::format("scale {}, offset {}: from {}",
                                           shortest(found->second.scale),
                                           shortest(found->second.offset), witness));
}

void add_metadata_file(Product& product, const MetadataFile& metadata) {
    const auto facts = is_sentinel_metadata(metadata.path) ? facts_of_mtd(metadata.path)
                                                           : facts_of_mtl(metadata.path);
    const auto witness = metadata.path.filename().string();
    // All products of Sentinel-2 have the same name for it, so that one may lie here by chance.
    if (!metadata.named_by_user && product.platform == "Sentinel-2" && product.id != facts.id) {
        product.evidence.push_back(witness + " is about " + facts.id + ": not used");
        return;
    }
    add_identity(product, facts, witness);
    add_acquisition(product, facts, witness);
    add_scaling(product, facts, witness);
    product.metadata_file = metadata.path;
}

void add_items(Product& product, const std::map<std::string, std::string>& items) {
    for (const auto* key : {"LANDSAT_PRODUCT_ID", "LANDSAT_SCENE_ID", "PRODUCT_URI"}) {
        const auto item = items.find(key);
        if (item == items.end()) continue;
        const auto facts = facts_of_id(item->second);
        // A scene has one number through all its products, so it says no more than where and when.
        if (!facts || (std::string_view(key) == "LANDSAT_SCENE_ID" && !product.id.empty()))
            continue;
        add_identity(product, *facts, std::string("the file's own ") + key);
    }
}

}  // namespace

std::string_view text_of(ProductLevel level) noexcept {
    switch (level) {
        case ProductLevel::level1:
            return "Level-1";
        case ProductLevel::surface_reflectance:
            return "surface reflectance";
        case ProductLevel::surface_temperature:
            return "surface temperature";
        case ProductLevel::auxiliary:
            return "quality or angles";
        case ProductLevel::unknown:
            break;
    }
    return "unknown product";
}

Product recognise(const fs::path& file, const std::optional<fs::path>& metadata,
                  const std::map<std::string, std::string>& items) {
    Product product;
    product.file = file;
    const auto name = facts_of_name(file.filename().string());
    if (name) {
        take_identity(product, *name, "the file's name");
        add_acquisition(product, *name, "the file's name");
    }
    auto found = metadata ? std::optional(MetadataFile{*metadata, true})
                 : name   ? metadata_beside(file, *name)
                          : std::nullopt;
    if (found) add_metadata_file(product, *found);
    add_items(product, items);
    return product;
}

}  // namespace sunbudget
