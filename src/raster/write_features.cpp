#include <gdal_priv.h>
#include <ogrsf_frmts.h>

#include <array>
#include <cmath>
#include <memory>

#include "crs.hpp"
#include "sunbudget/base/error.hpp"
#include "sunbudget/raster/gdal_setup.hpp"
#include "vector_file.hpp"

namespace sunbudget {

namespace fs = std::filesystem;

namespace {

/// What GDAL's complaint comes to when a file cannot be written.
[[noreturn]] void throw_unwritten(const fs::path& file, const GdalMessages& messages) {
    throw Error(Cause::output, "the GeoPackage cannot be written: " + messages.first_failure(),
                file.native(), "check the space and the rights of the folder");
}

void define(OGRLayer& layer, std::span<const FeatureColumn> columns, const fs::path& file,
            const GdalMessages& messages) {
    for (const auto& column : columns) {
        OGRFieldDefn field(column.name.c_str(), column.text ? OFTString : OFTReal);
        if (layer.CreateField(&field) != OGRERR_NONE) throw_unwritten(file, messages);
    }
}

void set_cells(OGRFeature& feature, std::span<const FeatureColumn> columns, const FeatureRow& row) {
    std::size_t text = 0, number = 0;
    for (std::size_t i = 0; i < columns.size(); ++i) {
        if (columns[i].text)
            feature.SetField(static_cast<int>(i), row.texts[text++].c_str());
        else if (const double value = row.numbers[number++]; std::isfinite(value))
            feature.SetField(static_cast<int>(i), value);
    }
}

}  // namespace

void write_features(const fs::path& file, const PolygonName& shapes, const std::string& layer_name,
                    std::span<const FeatureColumn> columns, std::size_t rows,
                    const std::function<FeatureRow(std::size_t)>& row) {
    const VectorFile from(shapes);
    const GdalMessages messages;
    // The date in the file's tables would be today's.
    CPLSetConfigOption("OGR_CURRENT_DATE", "2000-01-01T00:00:00.000Z");
    auto* driver = GetGDALDriverManager()->GetDriverByName("GPKG");
    DatasetPtr out(driver->Create(file.c_str(), 0, 0, 0, GDT_Unknown, nullptr));
    if (out == nullptr) throw_unwritten(file, messages);
    const auto crs = crs_from_wkt(from.crs_wkt);
    // A column of ours may be named fid, which is the format's own name for the row.
    std::array<const char*, 2> options{"FID=row_number", nullptr};
    auto* layer = out->CreateLayer(layer_name.c_str(), crs.get(), wkbMultiPolygon,
                                   const_cast<char**>(options.data()));
    if (layer == nullptr) throw_unwritten(file, messages);
    define(*layer, columns, file, messages);
    if (layer->StartTransaction() != OGRERR_NONE) throw_unwritten(file, messages);
    for (std::size_t i = 0; i < rows; ++i) {
        const auto cells = row(i);
        const std::unique_ptr<OGRFeature> source(from.layer.GetFeature(cells.fid));
        OGRFeature feature(layer->GetLayerDefn());
        set_cells(feature, columns, cells);
        if (source != nullptr && source->GetGeometryRef() != nullptr)
            feature.SetGeometryDirectly(
                OGRGeometryFactory::forceToMultiPolygon(source->StealGeometry()));
        if (layer->CreateFeature(&feature) != OGRERR_NONE) throw_unwritten(file, messages);
    }
    if (layer->CommitTransaction() != OGRERR_NONE) throw_unwritten(file, messages);
    out->FlushCache(true);
    out.reset();
    if (messages.failed()) throw_unwritten(file, messages);
}

}  // namespace sunbudget
