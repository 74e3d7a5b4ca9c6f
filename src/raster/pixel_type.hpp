#pragma once

#include "sunbudget/raster/raster_file.hpp"

class GDALRasterBand;

namespace sunbudget {

/// How a band stores its numbers. Throws Error(input) for those that are not real.
[[nodiscard]] PixelType type_of(GDALRasterBand& band, const RasterName& name);

}  // namespace sunbudget
