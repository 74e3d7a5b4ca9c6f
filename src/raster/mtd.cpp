#include <cpl_minixml.h>

#include <memory>

#include "product_facts.hpp"
#include "sunbudget/base/text.hpp"
#include "sunbudget/raster/gdal_setup.hpp"

namespace sunbudget {
namespace {

namespace fs = std::filesystem;

struct FreeXml {
    void operator()(CPLXMLNode* node) const noexcept { CPLDestroyXMLNode(node); }
};
using Xml = std::unique_ptr<CPLXMLNode, FreeXml>;

[[noreturn]] void refuse(const std::string& what, const fs::path& file) {
    throw Error(Cause::input, what, file.string(), "fetch the scene's metadata file again");
}

Xml parsed(const fs::path& file) {
    const GdalMessages messages;
    Xml xml(CPLParseXMLString(metadata_text(file).c_str()));
    if (!xml || messages.failed()) refuse("the metadata file is no XML, or cut short", file);
    CPLStripXMLNamespace(xml.get(), nullptr, TRUE);
    return xml;
}

/// The first element of that name anywhere in the document.
const CPLXMLNode* find(const Xml& xml, const std::string& name) {
    return CPLSearchXMLNode(xml.get(), ("=" + name).c_str());
}

std::optional<std::string> text(const Xml& xml, const std::string& name) {
    const auto* node = find(xml, name);
    return node == nullptr ? std::nullopt
                           : std::optional<std::string>(CPLGetXMLValue(node, "", ""));
}

double number(const char* written, const std::string& name, const fs::path& file) {
    const auto value = parse_number(trimmed(written));
    if (!value) refuse(name + " is \"" + written + "\", not a number", file);
    return *value;
}

/// band_id counts the instrument's bands: B01 ... B08, B8A, B09 ... B12.
std::string band_of(const std::string& id, const fs::path& file) {
    const auto n = parse_integer(id);
    if (!n || *n < 0 || *n > 12) refuse("there is no band \"" + id + "\"", file);
    if (*n == 8) return "B8A";
    const auto band = *n < 8 ? *n + 1 : *n;
    return (band < 10 ? "B0" : "B") + std::to_string(band);
}

/// reflectance = (number + offset) / quantification; products before baseline 04.00 have no offset.
void add_scaling(ProductFacts& facts, const Xml& xml, const fs::path& file) {
    const auto divisor = text(xml, "BOA_QUANTIFICATION_VALUE");
    if (!divisor) return;
    const double scale = 1 / number(divisor->c_str(), "BOA_QUANTIFICATION_VALUE", file);
    for (int id = 0; id <= 12; ++id) facts.scaling[band_of(std::to_string(id), file)] = {scale, 0};
    const auto* list = find(xml, "BOA_ADD_OFFSET_VALUES_LIST");
    for (const auto* node = list == nullptr ? nullptr : list->psChild; node != nullptr;
         node = node->psNext) {
        if (node->eType != CXT_Element) continue;
        const auto band = band_of(CPLGetXMLValue(node, "band_id", ""), file);
        facts.scaling[band].offset =
            scale * number(CPLGetXMLValue(node, "", ""), "BOA_ADD_OFFSET", file);
    }
}

void add_sun(ProductFacts& facts, const fs::path& tile_file) {
    std::error_code ignored;
    if (!fs::is_regular_file(tile_file, ignored)) return;
    const auto xml = parsed(tile_file);
    const auto* mean = find(xml, "Mean_Sun_Angle");
    if (mean == nullptr) return;
    const auto angle = [&](const char* name) {
        return number(CPLGetXMLValue(mean, name, ""), name, tile_file);
    };
    facts.sun_elevation_deg = 90 - angle("ZENITH_ANGLE");
    facts.sun_azimuth_deg = angle("AZIMUTH_ANGLE");
}

}  // namespace

ProductFacts facts_of_mtd(const fs::path& file) {
    const auto xml = parsed(file);
    const auto uri = text(xml, "PRODUCT_URI");
    const auto named = uri ? facts_of_id(*uri) : std::nullopt;
    if (!named) refuse("not a Sentinel-2 product's metadata file", file);
    auto facts = *named;
    const auto level = text(xml, "PROCESSING_LEVEL").value_or("");
    if (level.starts_with("Level-1") != (facts.level == ProductLevel::level1))
        refuse("the product is " + *uri + ", but its level is \"" + level + "\"", file);
    add_scaling(facts, xml, file);
    add_sun(facts, file.parent_path() / "MTD_TL.xml");
    return facts;
}

}  // namespace sunbudget
