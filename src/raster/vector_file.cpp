#include "vector_file.hpp"

#include <gdal_priv.h>
#include <ogrsf_frmts.h>

#include <array>
#include <mutex>

#include "crs.hpp"
#include "sunbudget/base/error.hpp"
#include "sunbudget/base/text.hpp"
#include "sunbudget/raster/gdal_setup.hpp"

namespace sunbudget {

namespace fs = std::filesystem;

namespace {

/// Formats that hold shapes in one local file and name no others.
constexpr std::array vector_drivers{"GPKG", "GeoJSON", "ESRI Shapefile", "FlatGeobuf"};

void enroll_vector_drivers() {
    static std::once_flag once;
    std::call_once(once, [] {
        RegisterOGRGeoPackage();
        RegisterOGRGeoJSON();
        RegisterOGRShape();
        RegisterOGRFlatGeobuf();
    });
}

DatasetPtr open_vectors(const fs::path& path) {
    enroll_vector_drivers();
    refuse_special_name(path);
    std::error_code failed;
    if (!is_special_name(path) && !fs::exists(path, failed))
        throw Error(Cause::input, "no such file", path.native(), "check the name");
    std::vector<const char*> drivers(vector_drivers.begin(), vector_drivers.end());
    drivers.push_back(nullptr);
    const auto full = is_special_name(path) ? path.native() : fs::absolute(path).native();
    const GdalMessages messages;
    DatasetPtr dataset(GDALDataset::Open(full.c_str(), GDAL_OF_VECTOR | GDAL_OF_READONLY,
                                         drivers.data(), nullptr, nullptr));
    if (dataset == nullptr)
        throw Error(Cause::input,
                    "the polygons cannot be read" +
                        (messages.failed() ? ": " + messages.first_failure() : std::string()),
                    path.native(),
                    "give a GeoPackage, GeoJSON, shapefile or FlatGeobuf; others turn into one "
                    "with ogr2ogr");
    return dataset;
}

OGRLayer& layer_of(GDALDataset& dataset, const PolygonName& name) {
    std::vector<std::string> names;
    for (auto* layer : dataset.GetLayers()) names.emplace_back(layer->GetName());
    if (names.empty())
        throw Error(Cause::input, "the file holds no layer", name.path.native(), "check the file");
    if (name.layer.empty()) {
        if (names.size() > 1)
            throw Error(Cause::input, "the file holds several layers", name.path.native(),
                        "name one with layer: " + joined(names, ", "));
        return *dataset.GetLayer(0);
    }
    auto* layer = dataset.GetLayerByName(name.layer.c_str());
    if (layer == nullptr)
        throw Error(Cause::input, "no layer \"" + name.layer + "\"", name.path.native(),
                    suggestion(name.layer, names));
    return *layer;
}

void apply_query(OGRLayer& layer, const PolygonName& name) {
    if (name.query.empty()) return;
    const GdalMessages messages;
    if (layer.SetAttributeFilter(name.query.c_str()) != OGRERR_NONE)
        // GDAL draws an arrow under the place, on lines of its own: the first line says what is wrong.
        throw Error(Cause::input,
                    "the query cannot be used: " +
                        messages.first_failure().substr(0, messages.first_failure().find('\n')),
                    where_of(name) + ", " + name.query,
                    "write it as in SQL after WHERE: kind = 'flat' AND area > 100");
}

std::string crs_of(const OGRLayer& layer, const PolygonName& name) {
    const auto* crs = const_cast<OGRLayer&>(layer).GetSpatialRef();
    if (crs == nullptr)
        throw Error(Cause::input, "the polygons have no CRS", where_of(name),
                    "give them one with ogr2ogr -a_srs EPSG:n");
    if (const auto why = why_not_on_earth(*crs); !why.empty())
        throw Error(Cause::input, "the polygons have no place on the Earth: " + why, where_of(name),
                    "give them their CRS with ogr2ogr -a_srs EPSG:n");
    return flat_wkt(*crs);
}

}  // namespace

std::string where_of(const PolygonName& name) {
    return name.layer.empty() ? name.path.native() : name.path.native() + ", layer " + name.layer;
}

VectorFile::VectorFile(const PolygonName& name)
    : dataset(open_vectors(name.path)),
      layer(layer_of(*dataset, name)),
      crs_wkt(crs_of(layer, name)) {
    const auto type = wkbFlatten(layer.GetGeomType());
    if (type != wkbPolygon && type != wkbMultiPolygon && type != wkbUnknown &&
        type != wkbGeometryCollection && type != wkbCurvePolygon && type != wkbMultiSurface &&
        type != wkbSurface)
        throw Error(Cause::input,
                    std::string("the layer holds no polygons but ") + OGRGeometryTypeToName(type),
                    where_of(name), "name a layer of polygons");
    apply_query(layer, name);
}

std::vector<std::string> VectorFile::fields() const {
    std::vector<std::string> names;
    const auto& definition = *layer.GetLayerDefn();
    for (int i = 0; i < definition.GetFieldCount(); ++i)
        names.emplace_back(definition.GetFieldDefn(i)->GetNameRef());
    return names;
}

int VectorFile::field_index(const std::string& field, const PolygonName& name) const {
    const int index = layer.GetLayerDefn()->GetFieldIndex(field.c_str());
    if (index < 0)
        throw Error(Cause::input, "no field \"" + field + "\"", where_of(name),
                    suggestion(field, fields()));
    return index;
}

}  // namespace sunbudget
