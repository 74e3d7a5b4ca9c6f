#pragma once

#include <filesystem>
#include <memory>
#include <string>
#include <vector>

#include "sunbudget/raster/raster_file.hpp"

class GDALDataset;
class GDALRasterBand;

namespace sunbudget {

struct CloseDataset {
    void operator()(GDALDataset* dataset) const noexcept;
};
using DatasetPtr = std::unique_ptr<GDALDataset, CloseDataset>;

/// Opens a file read-only with the drivers of gdal_setup, its sidecars on and its overviews off.
/// Throws Error(input) when there is no such file or it is no readable raster.
[[nodiscard]] DatasetPtr open_dataset(const RasterName& name);

/// The bands' names, "" where a band has none. Asked of the file itself: with its overviews off GDAL hides them.
[[nodiscard]] std::vector<std::string> band_descriptions(GDALDataset& dataset,
                                                         const RasterName& name);

/// Throws Error(input) when a block of a GeoTIFF's band, or of its mask, ends beyond the file's end.
void refuse_cut_file(GDALRasterBand& band, const std::filesystem::path& path);

}  // namespace sunbudget
