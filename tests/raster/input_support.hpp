#pragma once

#include <filesystem>
#include <functional>
#include <optional>
#include <string>
#include <tuple>
#include <vector>

#include "sunbudget/base/plane.hpp"
#include "sunbudget/raster/grid.hpp"
#include "sunbudget/raster/source.hpp"
#include "support/vectors.hpp"

namespace sunbudget::test {

/// A north-up grid of square cells.
[[nodiscard]] Grid square_grid(int width, int height, double west, double north, double cell,
                               const std::string& crs = "EPSG:32633");

/// A small GeoTIFF for a test.
struct MadeRaster {
    Grid grid;
    std::string type = "Float32";
    std::vector<std::function<double(int column, int row)>> bands{};
    std::optional<double> nodata{};
    std::optional<Scaling> scaling{};
    std::vector<std::string> options{};  // "TILED=YES"
    std::vector<std::tuple<std::string, std::string, std::string>>
        metadata{};                                   // key, value, domain
    std::function<bool(int column, int row)> mask{};  // internal mask band
};
/// Writes it and gives the path back.
std::filesystem::path make_raster(const std::filesystem::path& path, const MadeRaster& raster);

/// Only its header: no block is written.
std::filesystem::path make_empty_raster(const std::filesystem::path& path,
                                        const MadeRaster& raster);

/// A file of the real data's awkward folder.
[[nodiscard]] std::filesystem::path awkward(const std::string& name);

/// The whole of a source over its own grid, or over `target`.
[[nodiscard]] Plane<float> read_all(const SourceSpec& spec, const std::optional<Grid>& target = {});
[[nodiscard]] Plane<std::int32_t> read_all_codes(SourceSpec spec,
                                                 const std::optional<Grid>& target = {});
[[nodiscard]] SourceSpec spec_of(const std::filesystem::path& path,
                                 DataKind kind = DataKind::continuous);

/// The same bits in every pixel, NaN included.
template <typename Value>
[[nodiscard]] bool same_bits(const Plane<Value>& a, const Plane<Value>& b);

/// Values of band 1 as `gdalwarp ARGUMENTS FROM TO` makes them on the grid; NaN for nodata.
[[nodiscard]] Plane<float> warped_by_gdal(const std::filesystem::path& from, const Grid& target,
                                          const std::string& arguments);

/// What the call throws as text; empty when it throws nothing.
[[nodiscard]] std::string error_text(const std::function<void()>& call);

}  // namespace sunbudget::test
