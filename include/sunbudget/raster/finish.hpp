#pragma once

#include <cstdint>
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
///         classic_bytes    a larger file becomes a BigTIFF; a classic TIFF counts with 32 bits
/// errors  Error(partial) when tiles are missing, Error(output) when the file cannot be written or
///         does not verify, Error(temporary) after a stop signal: no file is left then
void finish_layer(const LayerFile& layer, const Spool& spool,
                  std::span<const BandStatistics> statistics,
                  const std::filesystem::path& temporary_file,
                  std::uint64_t classic_bytes = 0xffff'0000);

/// Compares a finished file with the spool it was made of, as finish_layer does at its end.
/// Throws Error(output) at the first tile that differs.
void verify_layer(const Spool& spool, const std::filesystem::path& file);

/// Throws Error(output) when the layer's CRS cannot be written into a GeoTIFF: to be asked before
/// a long run, not after it.
void check_layer(const LayerFile& layer);

}  // namespace sunbudget
