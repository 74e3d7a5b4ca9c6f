#pragma once

#include <filesystem>
#include <span>

#include "sunbudget/raster/layer_file.hpp"
#include "sunbudget/raster/spool.hpp"
#include "sunbudget/raster/statistics.hpp"

namespace sunbudget {

/// Writes the finished file of a layer: a GeoTIFF whose directories come first, then the smallest
/// overview, full resolution last (a cloud-optimised GeoTIFF); bands are separate planes. The
/// encoded tiles are copied as they are. Then the file is made safe on disk, opened again, and
/// every tile compared with the spool's checksum, one in a hundred decoded. BigTIFF from 4 GB on.
///
/// in      spool            of the layer's layout, complete
///         statistics       one a band, or none at all
///         temporary_file   must not exist; giving it its final name is the caller's affair
/// errors  Error(partial) when tiles are missing, Error(output) when the file cannot be written or
///         does not verify, Error(temporary) after a stop signal: no file is left then
void finish_layer(const LayerFile& layer, const Spool& spool,
                  std::span<const BandStatistics> statistics,
                  const std::filesystem::path& temporary_file);

/// Throws Error(output) when the layer's CRS would not survive in a GeoTIFF: to be asked before a
/// long run, not after it.
void check_layer(const LayerFile& layer);

}  // namespace sunbudget
