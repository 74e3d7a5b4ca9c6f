#pragma once

#include <cstdint>
#include <map>
#include <span>
#include <string>
#include <vector>

#include "sunbudget/raster/layer_file.hpp"
#include "sunbudget/raster/statistics.hpp"

namespace sunbudget {

// OGC GeoTIFF 1.1 (19-008r4), annex on tags.
inline constexpr std::uint32_t tag_pixel_scale = 33550;
inline constexpr std::uint32_t tag_tie_points = 33922;
inline constexpr std::uint32_t tag_transformation = 34264;
inline constexpr std::uint32_t tag_geo_keys = 34735;
inline constexpr std::uint32_t tag_geo_doubles = 34736;
inline constexpr std::uint32_t tag_geo_text = 34737;
// GDAL's documentation of its GeoTIFF driver.
inline constexpr std::uint32_t tag_gdal_metadata = 42112;
inline constexpr std::uint32_t tag_gdal_nodata = 42113;

/// The tags of a finished file that GDAL words best: georeference, metadata, nodata.
struct TiffTags {
    std::map<std::uint32_t, std::vector<double>> doubles;
    std::vector<std::uint16_t> geo_keys;
    std::map<std::uint32_t, std::string> texts;

    [[nodiscard]] std::size_t bytes() const;
};

/// What GDAL writes for this layer, read from a small template that it writes in memory.
/// Throws Error(output) when GDAL objects, or when the CRS read back is not the layer's.
[[nodiscard]] TiffTags tiff_tags(const LayerFile& layer,
                                 std::span<const BandStatistics> statistics);

}  // namespace sunbudget
