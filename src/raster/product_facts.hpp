#pragma once

#include <filesystem>
#include <map>
#include <optional>
#include <string>
#include <string_view>

#include "sunbudget/raster/product.hpp"

namespace sunbudget {

/// What one witness (a name, a metadata file) says about a product.
struct ProductFacts {
    ProductLevel level = ProductLevel::unknown;
    std::string id;
    std::string sensor;
    std::string platform;
    std::string band;
    int collection = 0;
    std::optional<CivilDate> date;
    std::optional<UtcSeconds> utc;
    std::optional<double> sun_elevation_deg;
    std::optional<double> sun_azimuth_deg;
    std::map<std::string, Scaling> scaling;  ///< by the product's band names
};

/// Nothing for a name of no known form. The file's ending does not matter, and what follows the
/// band in the name ("_crop") is ignored.
[[nodiscard]] std::optional<ProductFacts> facts_of_name(std::string_view file_name);
/// The same for a product's identifier without a band, as metadata give it.
[[nodiscard]] std::optional<ProductFacts> facts_of_id(std::string_view id);

/// Landsat's metadata file, text or JSON by its ending. Throws Error(input).
[[nodiscard]] ProductFacts facts_of_mtl(const std::filesystem::path& file);
/// Sentinel-2's MTD_MSIL2A.xml (or MTD_MSIL1C.xml), with the sun from an MTD_TL.xml beside it.
/// Throws Error(input).
[[nodiscard]] ProductFacts facts_of_mtd(const std::filesystem::path& file);

/// The text of a metadata file. Throws Error(input) when it is not a local file, cannot be read, is
/// larger than a megabyte or holds zero bytes.
[[nodiscard]] std::string metadata_text(const std::filesystem::path& file);

}  // namespace sunbudget
