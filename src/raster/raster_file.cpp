#include "sunbudget/raster/raster_file.hpp"

#include <gdal_priv.h>
#include <gdal_rat.h>
#include <ogr_spatialref.h>

#include <array>
#include <cmath>
#include <limits>

#include "affine.hpp"
#include "crs.hpp"
#include "dataset.hpp"
#include "pixel_type.hpp"
#include "sunbudget/base/error.hpp"
#include "sunbudget/base/text.hpp"
#include "sunbudget/raster/gdal_setup.hpp"
#include "sunbudget/raster/grid_build.hpp"

namespace sunbudget {
namespace {

namespace fs = std::filesystem;

[[noreturn]] void refuse(const RasterName& name, const std::string& what, const std::string& todo) {
    throw Error(Cause::input, what, text_of(name), todo);
}

int band_by_name(const RasterName& name, const std::vector<std::string>& names) {
    for (std::size_t i = 0; i < names.size(); ++i)
        if (names[i] == name.band_name) return static_cast<int>(i) + 1;
    std::vector<std::string> known;
    for (std::size_t i = 0; i < names.size(); ++i)
        known.push_back(names[i].empty() ? std::to_string(i + 1) : names[i]);
    refuse(name, "no band is named \"" + name.band_name + "\"", suggestion(name.band_name, known));
}

void choose_band(GDALDataset& dataset, RasterInfo& info) {
    info.band_names = band_descriptions(dataset, info.name);
    const auto& name = info.name;
    info.band = std::max(1, name.band);
    // A netCDF variable was chosen by its name when the file was opened.
    if (!name.band_name.empty() && info.driver != "netCDF")
        info.band = band_by_name(name, info.band_names);
    else if (name.band == 0 && info.bands > 1)
        info.warnings.push_back("the file has " + std::to_string(info.bands) +
                                " bands and none is named: band 1 is read");
    if (info.band > info.bands)
        refuse(name, "there is no band " + std::to_string(info.band),
               info.bands == 1 ? "it has one band"
                               : "it has bands 1 to " + std::to_string(info.bands));
}

// ---- where the raster lies

Affine affine_of(GDALDataset& dataset, const RasterName& name) {
    Affine affine{};
    const bool found = dataset.GetGeoTransform(affine.data()) == CE_None;
    if (found && affine != Affine{0, 1, 0, 0, 0, 1}) {
        for (const double number : affine)
            if (!std::isfinite(number)) refuse(name, "its georeference is no number", "repair it");
        if (determinant(affine) == 0)
            refuse(name, "its georeference gives pixels without an area", "repair it");
        return affine;
    }
    if (dataset.GetGCPCount() > 0)
        refuse(name, "it has ground control points only, no grid", "warp it first with gdalwarp");
    if (dataset.GetMetadata("RPC") != nullptr)
        refuse(name, "it has sensor polynomials (RPC) only, no grid",
               "warp it first with gdalwarp -rpc and an elevation model");
    refuse(name, "it has no georeference: nothing says where it lies",
           "give it one with gdal_edit.py -a_ullr and -a_srs, or fetch the georeferenced product");
}

std::string crs_of(GDALDataset& dataset, RasterInfo& info) {
    const OGRSpatialReference* crs = dataset.GetSpatialRef();
    if (crs == nullptr || crs->IsEmpty())
        refuse(info.name, "it has no CRS", "give it one with gdal_edit.py -a_srs EPSG:n");
    if (const auto why = why_not_on_earth(*crs); !why.empty())
        refuse(info.name, why, "give a raster of the Earth in a geographic or projected CRS");
    if (crs->IsCompound())
        info.warnings.emplace_back("the CRS names a height datum, which is not used");
    return flat_wkt(*crs);
}

void place(GDALDataset& dataset, RasterInfo& info) {
    Grid stored;
    stored.width = dataset.GetRasterXSize();
    stored.height = dataset.GetRasterYSize();
    stored.affine = affine_of(dataset, info.name);
    stored.crs_wkt = crs_of(dataset, info);
    std::tie(info.grid, info.storage) = upright(stored);
    const char* point = dataset.GetMetadataItem("AREA_OR_POINT");
    info.pixel_is_point = point != nullptr && std::string_view(point) == "Point";
}

// ---- what the numbers mean

std::optional<double> declared_nodata(GDALRasterBand& band) {
    int has = 0;
    double value = 0;
    if (band.GetRasterDataType() == GDT_Int64)
        value = static_cast<double>(band.GetNoDataValueAsInt64(&has));
    else if (band.GetRasterDataType() == GDT_UInt64)
        value = static_cast<double>(band.GetNoDataValueAsUInt64(&has));
    // GDAL 3.6 does not pass the two on where overviews are off.
    if (has == 0) value = band.GetNoDataValue(&has);
    return has != 0 ? std::optional(value) : std::nullopt;
}

void read_nodata(GDALRasterBand& band, RasterInfo& info) {
    const auto declared = declared_nodata(band);
    if (!declared) return;
    info.nodata = possible_nodata(info.type, *declared);
    if (!info.nodata)
        info.warnings.push_back("nodata " + shortest(*declared) + " cannot occur in a band of " +
                                std::string(text_of(info.type)) + " and is ignored");
}

void read_mask(GDALRasterBand& band, RasterInfo& info) {
    const int flags = band.GetMaskFlags();
    if ((flags & GMF_ALPHA) != 0)
        info.mask = MaskKind::alpha;
    else if ((flags & (GMF_ALL_VALID | GMF_NODATA)) == 0)
        info.mask = MaskKind::mask_band;
    else if (info.nodata)
        info.mask = MaskKind::nodata;
    if (band.GetColorInterpretation() == GCI_AlphaBand)
        info.warnings.emplace_back("the chosen band is the alpha band (opacity)");
}

void read_scaling(GDALRasterBand& band, RasterInfo& info) {
    int has_scale = 0, has_offset = 0;
    const double scale = band.GetScale(&has_scale);
    const double offset = band.GetOffset(&has_offset);
    if (!std::isfinite(scale) || !std::isfinite(offset) || scale == 0) {
        info.warnings.push_back("scale " + shortest(scale) + " and offset " + shortest(offset) +
                                " in the file cannot be and are ignored");
        return;
    }
    if ((has_scale == 0 && has_offset == 0) || (scale == 1 && offset == 0)) return;
    info.scale = scale;
    info.offset = offset;
}

// ---- names of classes

int column_of_names(const GDALRasterAttributeTable& table) {
    int first_text = -1;
    for (int column = 0; column < table.GetColumnCount(); ++column) {
        if (table.GetTypeOfCol(column) != GFT_String) continue;
        if (table.GetUsageOfCol(column) == GFU_Name) return column;
        if (first_text < 0) first_text = column;
    }
    return first_text;
}

int column_of_values(const GDALRasterAttributeTable& table) {
    for (int column = 0; column < table.GetColumnCount(); ++column) {
        const auto usage = table.GetUsageOfCol(column);
        const auto name = lower_case(table.GetNameOfCol(column));
        if (usage == GFU_MinMax || (name == "value" && table.GetTypeOfCol(column) != GFT_String))
            return column;
    }
    return -1;
}

/// Tables with more rows than this are no legends.
constexpr int most_classes = 65536;

void read_table_names(const GDALRasterAttributeTable& table, RasterInfo& info) {
    const int names = column_of_names(table);
    if (names < 0) return;
    double first = 0, step = 1;
    const int values = column_of_values(table);
    const bool binned = table.GetLinearBinning(&first, &step) != 0;
    for (int row = 0; row < std::min(table.GetRowCount(), most_classes); ++row) {
        const std::string text(trimmed(table.GetValueAsString(row, names)));
        const double code = binned        ? first + step * row
                            : values >= 0 ? table.GetValueAsDouble(row, values)
                                          : row;
        const bool fits = code == std::floor(code) && std::abs(code) < 2147483648.0;
        if (!text.empty() && fits) info.class_names[static_cast<std::int32_t>(code)] = text;
    }
}

void read_class_names(GDALRasterBand& band, RasterInfo& info) {
    info.has_palette = band.GetColorTable() != nullptr;
    char** categories = band.GetCategoryNames();
    for (int code = 0; categories != nullptr && categories[code] != nullptr; ++code)
        if (*categories[code] != '\0' && code < most_classes)
            info.class_names[code] = categories[code];
    const auto* table = band.GetDefaultRAT();
    if (table != nullptr && info.class_names.empty()) read_table_names(*table, info);
}

void read_metadata(char** items, RasterInfo& info) {
    for (int i = 0; items != nullptr && items[i] != nullptr; ++i) {
        const std::string item(items[i]);
        const auto equals = item.find('=');
        if (equals != std::string::npos)
            info.metadata[item.substr(0, equals)] = item.substr(equals + 1);
    }
}

// ---- limits

void check_size(GDALDataset& dataset, const RasterInfo& info) {
    constexpr double most_pixels = 1e12;
    constexpr int most_bands = 65536;
    const double width = dataset.GetRasterXSize();
    const double height = dataset.GetRasterYSize();
    if (width < 1 || height < 1) refuse(info.name, "it has no pixels", "check how it was made");
    if (width * height > most_pixels || info.bands > most_bands)
        refuse(info.name,
               "it claims " + shortest(width) + " x " + shortest(height) + " pixels in " +
                   std::to_string(info.bands) + (info.bands == 1 ? " band" : " bands"),
               "more than 1e12 pixels or 65536 bands are not read; cut it first");
}

void check_blocks(GDALDataset& dataset, GDALRasterBand& band, RasterInfo& info,
                  const RasterLimits& limits) {
    band.GetBlockSize(&info.block_width, &info.block_height);
    const auto bytes =
        static_cast<std::uint64_t>(GDALGetDataTypeSizeBytes(band.GetRasterDataType()));
    info.decoded_bytes = bytes * static_cast<std::uint64_t>(info.grid.width) *
                         static_cast<std::uint64_t>(info.grid.height);
    const char* interleave = dataset.GetMetadataItem("INTERLEAVE", "IMAGE_STRUCTURE");
    const bool all_bands = interleave != nullptr && std::string_view(interleave) == "PIXEL";
    const double block = static_cast<double>(info.block_width) * info.block_height *
                         static_cast<double>(bytes) * (all_bands ? info.bands : 1);
    if (block > static_cast<double>(limits.block_bytes))
        refuse(info.name,
               "its blocks of " + std::to_string(info.block_width) + " x " +
                   std::to_string(info.block_height) + " pixels decode to " + human_bytes(block) +
                   " each, more than the " + human_bytes(static_cast<double>(limits.block_bytes)) +
                   " that fit",
               "give more --memory, or rewrite it with gdal_translate -co TILED=YES");
}

}  // namespace

RasterName raster_name(const std::string& text) {
    std::error_code failed;
    const auto colon = text.rfind(':');
    if (colon == std::string::npos || colon == 0 || colon + 1 == text.size() ||
        text.find('/', colon) != std::string::npos || fs::exists(text, failed))
        return {text, 0, {}};
    const auto tail = text.substr(colon + 1);
    const auto number = parse_integer(tail);
    if (!number) return {text.substr(0, colon), 0, tail};
    if (*number < 1 || *number > std::numeric_limits<int>::max())
        throw Error(Cause::input, "bands count from 1", text, "give a band's number or name");
    return {text.substr(0, colon), static_cast<int>(*number), {}};
}

std::string text_of(const RasterName& name) {
    if (!name.band_name.empty()) return name.path.native() + ':' + name.band_name;
    return name.band == 0 ? name.path.native()
                          : name.path.native() + ':' + std::to_string(name.band);
}

std::string_view text_of(Storage storage) noexcept {
    constexpr std::array<std::string_view, 5> texts{"north-up", "south-up", "mirrored",
                                                    "south-up and mirrored", "rotated"};
    return texts[static_cast<std::size_t>(storage)];
}

RasterInfo inspect(const RasterName& name, const RasterLimits& limits) {
    const GdalMessages messages;
    const auto dataset = open_dataset(name);
    RasterInfo info;
    info.name = name;
    info.driver = dataset->GetDriver()->GetDescription();
    info.bands = dataset->GetRasterCount();
    check_size(*dataset, info);
    choose_band(*dataset, info);
    auto& band = *dataset->GetRasterBand(info.band);
    info.type = type_of(band, info.name);
    place(*dataset, info);
    check_blocks(*dataset, band, info, limits);
    refuse_cut_file(band, name.path);
    read_nodata(band, info);
    read_mask(band, info);
    read_scaling(band, info);
    info.unit = band.GetUnitType();
    read_class_names(band, info);
    read_metadata(dataset->GetMetadata(), info);
    read_metadata(band.GetMetadata(), info);
    for (const auto& warning : messages.warnings()) info.warnings.push_back("GDAL: " + warning);
    return info;
}

}  // namespace sunbudget
