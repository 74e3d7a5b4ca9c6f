#include "pixel_type.hpp"

#include <gdal_priv.h>

#include <algorithm>
#include <array>
#include <cmath>
#include <limits>
#include <stdexcept>

#include "sunbudget/base/error.hpp"

namespace sunbudget {

namespace {

struct TypeRow {
    PixelType type;
    GDALDataType gdal;
    std::string_view text;
    double lowest;
    double highest;
};

template <typename T>
constexpr TypeRow type_row(PixelType type, GDALDataType gdal, std::string_view text) {
    using limits = std::numeric_limits<T>;
    return {type, gdal, text, static_cast<double>(limits::lowest()),
            static_cast<double>(limits::max())};
}

constexpr std::array type_table{
    type_row<std::uint8_t>(PixelType::u8, GDT_Byte, "Byte"),
    type_row<std::uint16_t>(PixelType::u16, GDT_UInt16, "UInt16"),
    type_row<std::int16_t>(PixelType::i16, GDT_Int16, "Int16"),
    type_row<std::uint32_t>(PixelType::u32, GDT_UInt32, "UInt32"),
    type_row<std::int32_t>(PixelType::i32, GDT_Int32, "Int32"),
    type_row<std::uint64_t>(PixelType::u64, GDT_UInt64, "UInt64"),
    type_row<std::int64_t>(PixelType::i64, GDT_Int64, "Int64"),
    type_row<float>(PixelType::f32, GDT_Float32, "Float32"),
    type_row<double>(PixelType::f64, GDT_Float64, "Float64"),
    // Last: GDAL 3.6 calls these Byte and marks the band; later versions have a type of their own.
    type_row<std::int8_t>(PixelType::i8, GDT_Unknown, "Int8"),
};

const TypeRow& row_of(PixelType type) {
    for (const auto& row : type_table)
        if (row.type == type) return row;
    throw std::logic_error("a pixel type without a row");
}

}  // namespace

PixelType type_of(GDALRasterBand& band, const RasterName& name) {
    const auto gdal = band.GetRasterDataType();
    const char* sign = band.GetMetadataItem("PIXELTYPE", "IMAGE_STRUCTURE");
    if (gdal == GDT_Byte && sign != nullptr && std::string_view(sign) == "SIGNEDBYTE")
        return PixelType::i8;
    const std::string_view gdal_name = GDALGetDataTypeName(gdal);
    if (gdal_name == "Int8") return PixelType::i8;
    for (const auto& row : type_table)
        if (row.gdal == gdal && gdal != GDT_Unknown) return row.type;
    throw Error(Cause::input, "the band holds numbers of type " + std::string(gdal_name),
                text_of(name), "give real numbers, such as the amplitude");
}

std::string_view text_of(PixelType type) noexcept {
    for (const auto& row : type_table)
        if (row.type == type) return row.text;
    return {};
}

std::optional<double> possible_nodata(PixelType type, double value) {
    const auto& row = row_of(type);
    if (std::isnan(value) && !whole_numbers(type)) return value;
    if (whole_numbers(type)) {
        const bool fits = value == std::floor(value) && value >= row.lowest && value <= row.highest;
        return fits ? std::optional(value) : std::nullopt;
    }
    // Doubles stand in headers of float files: the far end of the floats is meant.
    return std::clamp(value, row.lowest, row.highest);
}

}  // namespace sunbudget
