#pragma once

#include <cstdint>
#include <filesystem>
#include <map>
#include <optional>
#include <string>
#include <string_view>
#include <vector>

#include "sunbudget/raster/grid.hpp"

namespace sunbudget {

/// One band of a raster file. `band` counts from 1; 0 and an empty name mean the only band.
struct RasterName {
    std::filesystem::path path{};
    int band = 0;
    std::string band_name{};

    friend bool operator==(const RasterName&, const RasterName&) = default;
};

/// "PATH", "PATH:N" or "PATH:NAME". A file that exists under the whole text is taken as PATH.
[[nodiscard]] RasterName raster_name(const std::string& text);
/// The text that reads back as `name`.
[[nodiscard]] std::string text_of(const RasterName& name);

/// How the rows and columns lie in the file. The reader turns all but `rotated` to north-up.
enum class Storage { north_up, south_up, mirrored, south_up_mirrored, rotated };
[[nodiscard]] std::string_view text_of(Storage storage) noexcept;

/// Where a band says that pixels have no value, besides NaN.
enum class MaskKind { none, nodata, mask_band, alpha };

/// The whole number of bits and the kind of numbers in a band.
enum class PixelType { u8, i8, u16, i16, u32, i32, u64, i64, f32, f64 };
[[nodiscard]] std::string_view text_of(PixelType type) noexcept;  ///< "UInt16", GDAL's names
[[nodiscard]] constexpr bool whole_numbers(PixelType type) noexcept {
    return type != PixelType::f32 && type != PixelType::f64;
}

/// `value` as a nodata value of a band of that type: itself, or the nearest float where a double was
/// written for one; nothing where no pixel can hold it (-9999 in a band of bytes).
[[nodiscard]] std::optional<double> possible_nodata(PixelType type, double value);

/// Everything a band tells before its pixels are read.
struct RasterInfo {
    RasterName name;     ///< as asked for
    int band = 1;        ///< the chosen band, from 1
    std::string driver;  ///< GDAL's short name
    PixelType type = PixelType::f32;
    Grid grid;  ///< upright: north-up and west-left unless rotated
    Storage storage = Storage::north_up;
    int bands = 0;
    std::vector<std::string> band_names;  ///< descriptions, "" where a band has none
    std::optional<double> nodata;         ///< declared and a possible value of the type
    MaskKind mask = MaskKind::none;
    std::optional<double> scale;   ///< absent where the file has none, or says 1 and 0
    std::optional<double> offset;  ///< set together with scale
    std::string unit;              ///< as written in the file
    int block_width = 0;
    int block_height = 0;
    std::map<std::int32_t, std::string> class_names;  ///< categories, or the attribute table's
    bool has_palette = false;
    bool pixel_is_point = false;  ///< never shifts the grid: GDAL's corner is the corner
    std::map<std::string, std::string> metadata;  ///< the file's plain items, then the band's
    std::uint64_t decoded_bytes = 0;              ///< of this band
    std::vector<std::string> warnings;

    [[nodiscard]] bool has_colours_or_names() const noexcept {
        return has_palette || !class_names.empty();
    }
};

struct RasterLimits {
    /// Greatest decoded size of one stored block: an eighth of the memory budget, say.
    std::uint64_t block_bytes = std::uint64_t{1} << 30;
};

/// Opens a raster, checks that it can be used and describes one band.
///
/// errors  Error(input): no such file (the nearest name is suggested), unreadable, empty or cut
///         short, no CRS, no georeference, control points or RPCs only, another celestial body,
///         complex numbers, no pixels, too many pixels, too large blocks, unknown band
[[nodiscard]] RasterInfo inspect(const RasterName& name, const RasterLimits& limits = {});

}  // namespace sunbudget
