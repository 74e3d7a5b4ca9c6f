#pragma once

#include <cstdint>
#include <tuple>
#include <vector>

#include "dataset.hpp"
#include "sunbudget/base/plane.hpp"
#include "sunbudget/raster/source.hpp"

namespace sunbudget {

/// Reads one band in pixels of its upright grid, at full resolution, through handles of its own.
/// Everything outside the raster has no value; with a period (columns of a full turn in longitude)
/// the columns go round the globe.
class BandReader {
  public:
    BandReader(const RasterInfo& info, std::optional<double> nodata, Scaling scaling, long period);

    /// Physical values, NaN for none. `out` becomes window.width x window.height.
    void read(const Window& window, Plane<float>& out);
    /// Codes, `no_code` for none.
    void read_codes(const Window& window, Plane<std::int32_t>& out);

    /// Whether `bytes` may be asked for: unsigned bytes without a mask.
    [[nodiscard]] bool holds_bytes() const noexcept {
        return info_.type == PixelType::u8 && mask_ == nullptr;
    }
    /// The pixels of a window inside the raster as stored, in any order, nodata included; valid
    /// until the next call.
    [[nodiscard]] std::span<const std::uint8_t> bytes(const Window& inside);

    [[nodiscard]] const RasterInfo& info() const noexcept { return info_; }
    [[nodiscard]] std::uint64_t infinities() const noexcept { return infinities_; }

  private:
    template <typename Stored>
    [[nodiscard]] std::vector<Stored>& buffer() noexcept {
        return std::get<std::vector<Stored>>(values_);
    }
    template <typename Stored, typename Value>
    void read_pieces(const Window& window, Plane<Value>& out);
    template <typename Stored, typename Value>
    void read_inside(const Window& inside, int to_column, int to_row, Plane<Value>& out);
    template <typename Stored>
    void fetch(GDALRasterBand& band, const Window& stored, std::vector<Stored>& values);
    template <typename Stored>
    void convert_row(Stored* row, const std::uint8_t* mask, std::size_t count, float* out);
    template <typename Stored>
    void convert_row(Stored* row, const std::uint8_t* mask, std::size_t count, std::int32_t* out);
    [[nodiscard]] std::int32_t code_of(double value) const;
    [[nodiscard]] bool whole_blocks(const Window& stored) const noexcept;
    [[nodiscard]] Window stored_window(const Window& inside) const noexcept;

    RasterInfo info_;
    DatasetPtr dataset_;
    GDALRasterBand* band_ = nullptr;
    GDALRasterBand* mask_ = nullptr;
    std::optional<double> nodata_;
    Scaling scaling_;
    long period_;
    bool south_up_;
    bool mirrored_;
    std::uint64_t infinities_ = 0;
    /// The pixels of one fetch as GDAL gives them; one of these is in use.
    std::tuple<std::vector<float>, std::vector<double>, std::vector<std::int32_t>,
               std::vector<std::uint8_t>>
        values_;
    std::vector<std::uint8_t> mask_values_;
};

}  // namespace sunbudget
