#include "tiff_tags.hpp"

#include <cpl_conv.h>
#include <cpl_error.h>
#include <cpl_string.h>
#include <cpl_vsi.h>
#include <gdal_frmts.h>
#include <gdal_priv.h>
#include <ogr_spatialref.h>
#include <tiffio.h>

#include <atomic>
#include <cmath>
#include <cstring>
#include <limits>
#include <memory>

#include "sunbudget/base/error.hpp"
#include "sunbudget/base/text.hpp"
#include "tiff_handle.hpp"

namespace sunbudget {

namespace {
/// Keeps the first error GDAL reports in this thread, as long as it lives.
class GdalComplaint {
  public:
    GdalComplaint() { CPLPushErrorHandlerEx(&GdalComplaint::keep, this); }
    ~GdalComplaint() { CPLPopErrorHandler(); }
    GdalComplaint(const GdalComplaint&) = delete;
    GdalComplaint& operator=(const GdalComplaint&) = delete;

    void require(bool success, const LayerFile& layer, const char* what) const {
        if (success && text_.empty()) return;
        throw Error(Cause::output, what + (text_.empty() ? text_ : ": " + text_), layer.name);
    }

  private:
    static void CPL_STDCALL keep(CPLErr kind, CPLErrorNum, const char* text) {
        auto* self = static_cast<GdalComplaint*>(CPLGetErrorHandlerUserData());
        if (kind >= CE_Failure && self->text_.empty()) self->text_ = text;
    }
    std::string text_;
};

/// A name in GDAL's memory file system that nobody else has, emptied at the end.
class MemoryFile {
  public:
    MemoryFile() {
        static std::atomic<int> number{0};
        name_ = "/vsimem/sunbudget_template_" + std::to_string(number.fetch_add(1)) + ".tif";
    }
    ~MemoryFile() {
        drop_sidecar();
        VSIUnlink(name_.c_str());
    }
    MemoryFile(const MemoryFile&) = delete;
    MemoryFile& operator=(const MemoryFile&) = delete;

    [[nodiscard]] const std::string& name() const { return name_; }
    void drop_sidecar() const { VSIUnlink((name_ + ".aux.xml").c_str()); }
    [[nodiscard]] std::vector<std::byte> bytes() const {
        vsi_l_offset size = 0;
        const auto* data =
            reinterpret_cast<const std::byte*>(VSIGetMemFileBuffer(name_.c_str(), &size, FALSE));
        return {data, data + size};
    }

  private:
    std::string name_;
};

struct CloseDataset {
    void operator()(GDALDataset* dataset) const noexcept { GDALClose(dataset); }
};
using Dataset = std::unique_ptr<GDALDataset, CloseDataset>;

OGRSpatialReference reference_of(const LayerFile& layer, const GdalComplaint& complaint) {
    OGRSpatialReference reference;
    const bool read = reference.importFromWkt(layer.grid.crs_wkt.c_str()) == OGRERR_NONE;
    complaint.require(read, layer, "the grid's CRS cannot be read");
    reference.SetAxisMappingStrategy(OAMS_TRADITIONAL_GIS_ORDER);
    return reference;
}

Dataset new_template(const LayerFile& layer, const MemoryFile& file) {
    GDALRegister_GTiff();
    auto* driver = GetGDALDriverManager()->GetDriverByName("GTiff");
    CPLStringList options;
    // 16 is the smallest tile a TIFF may have; sparse: no pixels are written.
    for (const char* option : {"TILED=YES", "BLOCKXSIZE=16", "BLOCKYSIZE=16", "SPARSE_OK=TRUE"})
        options.AddString(option);
    options.SetNameValue("INTERLEAVE", "BAND");
    const auto type = layer.sample == Sample::float32 ? GDT_Float32 : GDT_UInt16;
    return Dataset(driver ? driver->Create(file.name().c_str(), 16, 16,
                                           static_cast<int>(layer.bands.size()), type, options)
                          : nullptr);
}

void describe(GDALMajorObject& object, const std::map<std::string, std::string>& items) {
    for (const auto& [key, value] : items) object.SetMetadataItem(key.c_str(), value.c_str());
}

void state_figures(GDALRasterBand& band, const BandStatistics& figures) {
    const auto state = [&](const char* key, double value) {
        band.SetMetadataItem(key, shortest(value).c_str());
    };
    if (figures.count > 0) {
        state("STATISTICS_MINIMUM", figures.min);
        state("STATISTICS_MAXIMUM", figures.max);
        state("STATISTICS_MEAN", figures.mean);
        state("STATISTICS_STDDEV", figures.stddev);
    }
    const double share = static_cast<double>(figures.count) / static_cast<double>(figures.pixels);
    // Rounded down: 100 means that no pixel is missing.
    state("STATISTICS_VALID_PERCENT", std::floor(share * 1e4) / 100);
}

void fill(GDALDataset& dataset, const LayerFile& layer,
          std::span<const BandStatistics> statistics) {
    describe(dataset, layer.metadata);
    dataset.SetMetadataItem(GDALMD_AREA_OR_POINT, GDALMD_AOP_AREA);
    for (std::size_t b = 0; b < layer.bands.size(); ++b) {
        auto& band = *dataset.GetRasterBand(static_cast<int>(b) + 1);
        band.SetDescription(layer.bands[b].description.c_str());
        band.SetUnitType(layer.unit.c_str());
        describe(band, layer.bands[b].metadata);
        if (!statistics.empty()) state_figures(band, statistics[b]);
    }
    auto& first = *dataset.GetRasterBand(1);
    if (layer.sample == Sample::float32)
        first.SetNoDataValue(std::numeric_limits<double>::quiet_NaN());
    else if (layer.nodata)
        first.SetNoDataValue(*layer.nodata);
}

bool same_code(const OGRSpatialReference& a, const OGRSpatialReference& b) {
    const char* code_a = a.GetAuthorityCode(nullptr);
    const char* code_b = b.GetAuthorityCode(nullptr);
    return code_a && code_b && EQUAL(code_a, code_b) &&
           EQUAL(a.GetAuthorityName(nullptr), b.GetAuthorityName(nullptr));
}

/// GDAL puts what a GeoTIFF cannot say into a file beside it, which we do not write: what does the
/// GeoTIFF say without it?
void require_same_crs(const LayerFile& layer, const OGRSpatialReference& wanted,
                      const MemoryFile& file) {
    file.drop_sidecar();
    const char* drivers[] = {"GTiff", nullptr};
    const Dataset again(GDALDataset::Open(file.name().c_str(), GDAL_OF_RASTER, drivers));
    const auto* found = again ? again->GetSpatialRef() : nullptr;
    const char* lenient[] = {"IGNORE_DATA_AXIS_TO_SRS_AXIS_MAPPING=YES",
                             "CRITERION=EQUIVALENT_EXCEPT_AXIS_ORDER_GEOGCRS", nullptr};
    if (found == nullptr || !(same_code(*found, wanted) || found->IsSame(&wanted, lenient)))
        throw Error(Cause::output, "the grid's CRS cannot be written into a GeoTIFF", layer.name,
                    "give the run a grid in another CRS, one with an EPSG code for choice");
}

template <typename T>
std::vector<T> numbers_of(TIFF* tiff, std::uint32_t tag) {
    std::uint16_t count = 0;
    const T* values = nullptr;
    std::vector<T> numbers;
    if (TIFFGetField(tiff, tag, &count, &values) == 1) numbers.assign(values, values + count);
    return numbers;
}

TiffTags tags_in(std::span<const std::byte> bytes, const std::string& name) {
    const TiffHandle handle(bytes, name);
    auto* tiff = handle.get();
    TiffTags tags;
    for (const auto tag : {tag_pixel_scale, tag_tie_points, tag_transformation, tag_geo_doubles})
        if (const auto values = numbers_of<double>(tiff, tag); !values.empty())
            tags.doubles.emplace(tag, values);
    tags.geo_keys = numbers_of<std::uint16_t>(tiff, tag_geo_keys);
    for (const std::uint32_t tag :
         {std::uint32_t{TIFFTAG_IMAGEDESCRIPTION}, std::uint32_t{TIFFTAG_SOFTWARE},
          std::uint32_t{TIFFTAG_ARTIST}, std::uint32_t{TIFFTAG_COPYRIGHT}, tag_geo_text,
          tag_gdal_metadata, tag_gdal_nodata}) {
        const char* text = nullptr;
        if (TIFFGetField(tiff, tag, &text) == 1 && text != nullptr) tags.texts[tag] = text;
    }
    return tags;
}
}  // namespace

std::size_t TiffTags::bytes() const {
    std::size_t total = 2 * geo_keys.size();
    for (const auto& [tag, values] : doubles) total += 8 * values.size();
    for (const auto& [tag, text] : texts) total += text.size() + 1;
    return total;
}

TiffTags tiff_tags(const LayerFile& layer, std::span<const BandStatistics> statistics) {
    const GdalComplaint complaint;
    const MemoryFile file;
    const auto reference = reference_of(layer, complaint);
    auto dataset = new_template(layer, file);
    complaint.require(dataset != nullptr, layer, "the layer's metadata cannot be written");
    auto affine = layer.grid.affine;
    dataset->SetSpatialRef(&reference);
    dataset->SetGeoTransform(affine.data());
    fill(*dataset, layer, statistics);
    dataset.reset();
    complaint.require(true, layer, "the layer's metadata cannot be written");
    require_same_crs(layer, reference, file);
    const auto bytes = file.bytes();
    return tags_in(bytes, file.name());
}

}  // namespace sunbudget
