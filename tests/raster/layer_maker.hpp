#pragma once

#include <filesystem>
#include <functional>
#include <string>
#include <utility>
#include <vector>

#include "sunbudget/base/plane.hpp"
#include "sunbudget/raster/finish.hpp"
#include "sunbudget/raster/layer_file.hpp"
#include "sunbudget/raster/pyramid.hpp"
#include "sunbudget/raster/spool.hpp"

/// Layers of invented pixels, and a plain way to make and to read their files.
namespace sunbudget::test {

/// A pixel that depends on its place alone: a smooth part, noise, a hole here and there; a multiple
/// of 1/16. uint16 layers take the whole part.
[[nodiscard]] float pixel(int band, long column, long row);
/// As a uint16 layer has it.
[[nodiscard]] std::uint16_t flags(int band, long column, long row);

/// A layer of that size in UTM zone 33 with descriptions, metadata and a unit.
[[nodiscard]] LayerFile invented_layer(int width, int height, int tile, int bands, Sample sample);

/// A full-resolution tile of a float layer; what lies beyond the raster's edge is 12345.
[[nodiscard]] Plane<float> invented_tile(const LayerFile& layer, int band, int column, int row);

/// Puts the full-resolution tiles in the order of a shuffle by `seed` (0: row by row) from
/// `threads` threads.
void put_all(const LayerFile& layer, Pyramid& pyramid, unsigned seed, int threads);

/// The same from one thread, places `first` up to `last` of the shuffle only.
void put_some(const LayerFile& layer, Pyramid& pyramid, unsigned seed, int first, int last);

/// The tiles that the spool does not have.
void put_missing(const LayerFile& layer, Pyramid& pyramid, const Spool& spool);

/// Statistics of the bands by blocks of 256.
[[nodiscard]] std::vector<BandStatistics> statistics_of(const LayerFile& layer);

/// Spool, pyramid, finish; FOLDER/NAME.tif is the file.
std::filesystem::path made(const LayerFile& layer, const std::filesystem::path& folder,
                           unsigned seed = 0, int threads = 1);

/// A level of a band as a slow and plain program would make it from `pixel` or `flags`, as floats.
[[nodiscard]] std::vector<std::vector<float>> reference_levels(const LayerFile& layer, int band);

/// A level of a band as GDAL reads it; level 0 is the band itself.
[[nodiscard]] std::vector<float> read_level(const std::filesystem::path& file, int band, int level);

/// Same values, NaN at the same places.
[[nodiscard]] bool same_pixels(const std::vector<float>& a, const std::vector<float>& b);

/// Is the public validator of cloud-optimised GeoTIFFs content, and what does it print?
[[nodiscard]] std::pair<bool, std::string> validated(const std::filesystem::path& file);

/// Spoils one byte.
void flip_byte(const std::filesystem::path& file, std::uint64_t offset);

}  // namespace sunbudget::test
