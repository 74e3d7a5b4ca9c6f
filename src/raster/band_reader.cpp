#include "band_reader.hpp"

#include <gdal_priv.h>

#include <algorithm>
#include <cmath>
#include <type_traits>

#include "convert.hpp"
#include "sunbudget/base/error.hpp"
#include "sunbudget/base/text.hpp"
#include "sunbudget/raster/gdal_setup.hpp"

namespace sunbudget {
namespace {

template <typename T>
constexpr GDALDataType gdal_type() {
    if constexpr (std::is_same_v<T, float>) return GDT_Float32;
    if constexpr (std::is_same_v<T, double>) return GDT_Float64;
    if constexpr (std::is_same_v<T, std::int32_t>) return GDT_Int32;
    if constexpr (std::is_same_v<T, std::uint8_t>) return GDT_Byte;
}

/// A float holds every number of these types.
bool fits_float(PixelType type) {
    return type == PixelType::u8 || type == PixelType::i8 || type == PixelType::u16 ||
           type == PixelType::i16 || type == PixelType::f32;
}
bool fits_int32(PixelType type) {
    return whole_numbers(type) && type != PixelType::u32 && type != PixelType::u64 &&
           type != PixelType::i64;
}

template <typename Value>
constexpr Value none() {
    if constexpr (std::is_same_v<Value, float>) return std::numeric_limits<float>::quiet_NaN();
    return no_code;
}

[[noreturn]] void throw_read_error(const RasterInfo& info, const Window& stored,
                                   const std::string& why) {
    throw Error(Cause::input, "pixels cannot be read: " + why,
                text_of(info.name) + ", columns " + std::to_string(stored.column) + " to " +
                    std::to_string(stored.column + stored.width - 1) + ", rows " +
                    std::to_string(stored.row) + " to " +
                    std::to_string(stored.row + stored.height - 1),
                "the file is damaged or its disk fails: fetch it again");
}

}  // namespace

BandReader::BandReader(const RasterInfo& info, std::optional<double> nodata, Scaling scaling,
                       long period)
    : info_(info),
      dataset_(open_dataset(info.name)),
      band_(dataset_->GetRasterBand(info.band)),
      nodata_(nodata),
      scaling_(scaling),
      period_(period),
      south_up_(info.storage == Storage::south_up || info.storage == Storage::south_up_mirrored),
      mirrored_(info.storage == Storage::mirrored || info.storage == Storage::south_up_mirrored) {
    if (dataset_->GetRasterXSize() != info.grid.width ||
        dataset_->GetRasterYSize() != info.grid.height || band_ == nullptr)
        throw Error(Cause::input, "the file changed during the run", text_of(info.name),
                    "run again");
    if (info.mask == MaskKind::mask_band || info.mask == MaskKind::alpha)
        mask_ = band_->GetMaskBand();
}

void BandReader::read(const Window& window, Plane<float>& out) {
    if (fits_float(info_.type)) return read_pieces<float>(window, out);
    read_pieces<double>(window, out);
}

void BandReader::read_codes(const Window& window, Plane<std::int32_t>& out) {
    if (info_.type == PixelType::u8) return read_pieces<std::uint8_t>(window, out);
    if (fits_int32(info_.type)) return read_pieces<std::int32_t>(window, out);
    read_pieces<double>(window, out);
}

std::span<const std::uint8_t> BandReader::bytes(const Window& inside) {
    auto& values = buffer<std::uint8_t>();
    fetch(*band_, stored_window(inside), values);
    return values;
}

/// Cuts the window into pieces that lie on the raster, one for each turn round the globe.
template <typename Stored, typename Value>
void BandReader::read_pieces(const Window& window, Plane<Value>& out) {
    if (out.width() != window.width || out.height() != window.height)
        out = Plane<Value>(window.width, window.height);
    const bool whole = period_ == 0 && window.column >= 0 &&
                       window.column + window.width <= info_.grid.width && window.row >= 0 &&
                       window.row + window.height <= info_.grid.height;
    if (whole) return read_inside<Stored>(window, 0, 0, out);
    out.fill(none<Value>());
    const long top = std::max(0L, window.row);
    const long bottom = std::min<long>(info_.grid.height, window.row + window.height);
    if (top >= bottom) return;
    const auto piece = [&](long turn) {
        const long left = std::max(0L, window.column - turn);
        const long right = std::min<long>(info_.grid.width, window.column + window.width - turn);
        if (left >= right) return;
        read_inside<Stored>(
            {left, top, static_cast<int>(right - left), static_cast<int>(bottom - top)},
            static_cast<int>(left + turn - window.column), static_cast<int>(top - window.row), out);
    };
    if (period_ == 0) return piece(0);
    const auto period = static_cast<double>(period_);
    const auto first = static_cast<long>(std::floor(static_cast<double>(window.column) / period));
    for (long turn = first - 1; turn * period_ < window.column + window.width; ++turn)
        piece(turn * period_);
}

Window BandReader::stored_window(const Window& inside) const noexcept {
    Window stored = inside;
    if (mirrored_) stored.column = info_.grid.width - inside.column - inside.width;
    if (south_up_) stored.row = info_.grid.height - inside.row - inside.height;
    return stored;
}

template <typename Stored>
void BandReader::fetch(GDALRasterBand& band, const Window& stored, std::vector<Stored>& values) {
    values.resize(static_cast<std::size_t>(stored.width) * static_cast<std::size_t>(stored.height));
    const GdalMessages messages;
    const auto done =
        band.RasterIO(GF_Read, static_cast<int>(stored.column), static_cast<int>(stored.row),
                      stored.width, stored.height, values.data(), stored.width, stored.height,
                      gdal_type<Stored>(), 0, 0, nullptr);
    if (done != CE_None || messages.failed())
        throw_read_error(info_, stored, messages.first_failure());
    if (whole_blocks(stored)) band.FlushCache(false);
    // GDAL before 3.7 reads signed bytes as if they had no sign.
    if (&band == band_ && info_.type == PixelType::i8)
        for (auto& value : values)
            if (value > Stored{127})
                value = static_cast<Stored>(value - Stored{127} - Stored{127} - Stored{2});
}

/// The whole of what a thread reads of blocks it will not see again: they need not be kept, and the
/// next ones find their memory still warm.
bool BandReader::whole_blocks(const Window& stored) const noexcept {
    const auto ends = [](long first, int count, int block, int size) {
        return first % block == 0 && ((first + count) % block == 0 || first + count == size);
    };
    return ends(stored.column, stored.width, info_.block_width, info_.grid.width) &&
           ends(stored.row, stored.height, info_.block_height, info_.grid.height);
}

template <typename Stored, typename Value>
void BandReader::read_inside(const Window& inside, int to_column, int to_row, Plane<Value>& out) {
    auto& values = buffer<Stored>();
    const Window stored = stored_window(inside);
    fetch(*band_, stored, values);
    if (mask_ != nullptr) fetch(*mask_, stored, mask_values_);
    const auto width = static_cast<std::size_t>(inside.width);
    for (int r = 0; r < inside.height; ++r) {
        const int stored_row = south_up_ ? inside.height - 1 - r : r;
        const std::size_t first = static_cast<std::size_t>(stored_row) * width;
        Stored* row = values.data() + first;
        std::uint8_t* mask = mask_ == nullptr ? nullptr : mask_values_.data() + first;
        if (mirrored_) std::reverse(row, row + width);
        if (mirrored_ && mask != nullptr) std::reverse(mask, mask + width);
        convert_row(row, mask, width, out.row(to_row + r).data() + to_column);
    }
}

/// A masked pixel is no number before it is converted: an infinite one there is not counted.
template <typename Stored>
void BandReader::convert_row(Stored* row, const std::uint8_t* mask, std::size_t count, float* out) {
    constexpr Stored nan = std::numeric_limits<Stored>::quiet_NaN();
    if (mask != nullptr) drop_masked(mask, count, nan, row);
    // Compared in the stored type: a double in the header stands for the float nearest to it.
    const Stored nodata = nodata_ ? static_cast<Stored>(*nodata_) : nan;
    infinities_ += physical_row(row, count, nodata, scaling_, out);
}

template <typename Stored>
void BandReader::convert_row(Stored* row, const std::uint8_t* mask, std::size_t count,
                             std::int32_t* out) {
    if constexpr (std::is_same_v<Stored, double>) {
        std::transform(row, row + count, out, [this](double value) { return code_of(value); });
    } else {
        const auto nodata = nodata_ ? static_cast<std::int32_t>(*nodata_) : no_code;
        code_row(row, count, nodata, out);
    }
    if (mask != nullptr) drop_masked(mask, count, no_code, out);
}

std::int32_t BandReader::code_of(double value) const {
    if (std::isnan(value) || (nodata_ && value == *nodata_)) return no_code;
    if (value != std::floor(value) || std::abs(value) > 2147483647.0)
        throw Error(Cause::input, "the band holds " + shortest(value) + ", which is no class code",
                    text_of(info_.name), "name a raster of whole-number codes");
    return static_cast<std::int32_t>(value);
}

}  // namespace sunbudget
