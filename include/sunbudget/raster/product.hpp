#pragma once

#include <filesystem>
#include <map>
#include <optional>
#include <span>
#include <string>
#include <string_view>
#include <vector>

#include "sunbudget/base/error.hpp"
#include "sunbudget/base/time.hpp"
#include "sunbudget/raster/source.hpp"

namespace sunbudget {

/// What the numbers of a product's file are.
enum class ProductLevel {
    unknown,
    level1,               ///< sensor counts or reflectance at the top of the atmosphere
    surface_reflectance,  ///< corrected for the atmosphere
    surface_temperature,
    auxiliary,  ///< quality, angles, masks
};
/// "surface reflectance", for people.
[[nodiscard]] std::string_view text_of(ProductLevel level) noexcept;

/// What a raster file is, as far as its name, its scene's metadata file and its own metadata tell;
/// no pixel is looked at. What is not known is empty.
struct Product {
    std::filesystem::path file;
    ProductLevel level = ProductLevel::unknown;
    std::string sensor;    ///< the profile whose encoding it has: "landsat-oli-c2"
    std::string platform;  ///< "Landsat 8"
    int collection = 0;    ///< of Landsat: 1, 2; 0 before there were collections
    std::string id;        ///< the scene's product: LC08_L2SP_005009_20150710_20200908_02_T2
    std::string band;      ///< the product's own name for the file: SR_B2, QA_PIXEL
    std::optional<CivilDate> date;            ///< day of acquisition, UTC
    std::optional<UtcSeconds> acquired_utc;   ///< middle of the scene (Landsat), start (Sentinel-2)
    std::optional<double> sun_elevation_deg;  ///< at the scene's middle
    std::optional<double> sun_azimuth_deg;    ///< clockwise from north, [0, 360)
    std::optional<Scaling> scaling;           ///< of this band, from the scene's metadata file
    std::filesystem::path metadata_file;      ///< the one that was read
    std::vector<std::string> evidence;        ///< where each fact is from, a line each
};

/// Recognises Landsat (Collections 1 and 2, the numbering before them, and surface reflectance made
/// on demand from Collection 1) and Sentinel-2 by the file's name, by the scene's metadata file
/// (Landsat's ..._MTL.txt or ..._MTL.json, Sentinel-2's MTD_MSIL2A.xml), which is looked for beside
/// the file unless it is named, and by items of the file's own metadata. Any other file is `unknown`.
///
/// Call gdal_setup first, as for every use of GDAL: it keeps the XML reader from printing.
///
/// in      file      need not exist
///         metadata  named by the user, or none
///         items     RasterInfo::metadata
/// errors  Error(input): a metadata file that is missing, too large, cut short or no such file; name,
///         metadata file and items that contradict each other
[[nodiscard]] Product recognise(const std::filesystem::path& file,
                                const std::optional<std::filesystem::path>& metadata = {},
                                const std::map<std::string, std::string>& items = {});

/// What the plan says about the numbers (`product`).
enum class DeclaredProduct { automatic, surface_reflectance, top_of_atmosphere };

/// A band as the plan names it: the role ("blue") and the file.
struct BandFile {
    std::string role;
    Product product;
    std::optional<PixelType> type;  ///< of the band, where it has been looked at
};

/// The product's name of a role: "blue" is SR_B2.
struct BandRole {
    std::string role;
    std::string product_band;
};

/// What the bands of a scene shall be.
struct BandRules {
    DeclaredProduct declared = DeclaredProduct::automatic;
    std::string sensor;                 ///< the profile's name; "generic" goes with every encoding
    std::vector<BandRole> roles;        ///< of the profile; none for "generic"
    std::vector<std::string> profiles;  ///< names of all there are, for advice
};

/// Everything about the bands that forbids taking them for surface reflectance of one scene:
/// - Level-1 numbers, temperatures and masks, whatever is declared;
/// - a product that nothing tells, unless surface reflectance is declared;
/// - another sensor's encoding, and fractions where the profile has whole numbers;
/// - a band in the wrong role;
/// - bands of different scenes.
[[nodiscard]] std::vector<Problem> band_problems(std::span<const BandFile> bands,
                                                 const BandRules& rules);

/// Says so when the scene's metadata file gives this band another scale or offset than is used. It may
/// be right all the same: some distributors take Sentinel-2's offset off and leave the file as it was.
[[nodiscard]] std::optional<std::string> scaling_warning(const Product& product,
                                                         const Scaling& used);

/// Throws Error(input) with all of band_problems, if there are any.
void refuse_unless_surface_reflectance(std::span<const BandFile> bands, const BandRules& rules);

}  // namespace sunbudget
