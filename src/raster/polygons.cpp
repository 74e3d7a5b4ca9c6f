#include "sunbudget/raster/polygons.hpp"

#include <fmt/format.h>
#include <gdal_priv.h>
#include <ogrsf_frmts.h>

#include <algorithm>
#include <array>
#include <cmath>
#include <limits>
#include <memory>
#include <mutex>

#include "affine.hpp"
#include "crs.hpp"
#include "dataset.hpp"
#include "sunbudget/base/error.hpp"
#include "sunbudget/base/text.hpp"
#include "sunbudget/raster/gdal_setup.hpp"
#include "sunbudget/raster/grid_build.hpp"

namespace sunbudget {

namespace fs = std::filesystem;

namespace {

constexpr double nan_value = std::numeric_limits<double>::quiet_NaN();

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

std::string where_of(const PolygonName& name) {
    return name.layer.empty() ? name.path.native() : name.path.native() + ", layer " + name.layer;
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

std::vector<std::string> fields_of(OGRLayer& layer) {
    std::vector<std::string> fields;
    const auto& definition = *layer.GetLayerDefn();
    for (int i = 0; i < definition.GetFieldCount(); ++i)
        fields.emplace_back(definition.GetFieldDefn(i)->GetNameRef());
    return fields;
}

int field_index(OGRLayer& layer, const std::string& field, const PolygonName& name) {
    const int index = layer.GetLayerDefn()->GetFieldIndex(field.c_str());
    if (index < 0)
        throw Error(Cause::input, "no field \"" + field + "\"", where_of(name),
                    suggestion(field, fields_of(layer)));
    return index;
}

/// An open file, its layer and what of it is used.
struct Opened {
    DatasetPtr dataset;
    OGRLayer& layer;
    std::string crs_wkt;

    explicit Opened(const PolygonName& name)
        : dataset(open_vectors(name.path)),
          layer(layer_of(*dataset, name)),
          crs_wkt(crs_of(layer, name)) {
        const auto type = wkbFlatten(layer.GetGeomType());
        if (type != wkbPolygon && type != wkbMultiPolygon && type != wkbUnknown &&
            type != wkbGeometryCollection && type != wkbCurvePolygon && type != wkbMultiSurface &&
            type != wkbSurface)
            throw Error(
                Cause::input,
                std::string("the layer holds no polygons but ") + OGRGeometryTypeToName(type),
                where_of(name), "name a layer of polygons");
        apply_query(layer, name);
    }
};

/// Places of the polygons' CRS in pixels of the grid.
class ToGrid {
  public:
    ToGrid(const std::string& crs_wkt, const Grid& grid, const OGREnvelope& around)
        : affine_(grid.affine) {
        if (same_crs(crs_wkt, grid.crs_wkt)) return;
        // The way from one CRS to the other is the one that suits the polygons' middle.
        const Grid region{
            1,
            1,
            {around.MinX, around.MaxX - around.MinX, 0, around.MaxY, 0, around.MinY - around.MaxY},
            crs_wkt};
        transform_.emplace(crs_wkt, grid.crs_wkt, region);
    }

    [[nodiscard]] bool straight() const { return !transform_; }

    /// NaN where there is no place.
    [[nodiscard]] PixelPlace operator()(double x, double y) const {
        if (transform_) transform_->apply({&x, 1}, {&y, 1});
        to_pixels(affine_, x, y);
        return {x, y};
    }

  private:
    Affine affine_;
    std::optional<PointTransform> transform_;
};

bool known(const PixelPlace& place) {
    return std::isfinite(place.column) && std::isfinite(place.row);
}

/// Adds the places between two ends of an edge that is no straight line in the grid, and its end.
void add_edge(const ToGrid& to_grid, const OGRRawPoint& a, const PixelPlace& from,
              const OGRRawPoint& b, const PixelPlace& to, int depth, Ring& ring) {
    constexpr double most_off_px = 0.01;
    constexpr int deepest = 16;
    const OGRRawPoint middle((a.x + b.x) / 2, (a.y + b.y) / 2);
    const auto true_middle = to_grid(middle.x, middle.y);
    const double off = std::hypot(true_middle.column - (from.column + to.column) / 2,
                                  true_middle.row - (from.row + to.row) / 2);
    // A curve may cross its chord's middle: the first cuts are always made on long edges.
    const bool long_edge = depth < 3 && std::hypot(to.column - from.column, to.row - from.row) > 64;
    if (depth < deepest && known(true_middle) && (off > most_off_px || long_edge)) {
        add_edge(to_grid, a, from, middle, true_middle, depth + 1, ring);
        add_edge(to_grid, middle, true_middle, b, to, depth + 1, ring);
        return;
    }
    ring.push_back(to);
}

/// A ring in pixels; nothing where a corner has no place.
std::optional<Ring> ring_of(const OGRLinearRing& line, const ToGrid& to_grid) {
    Ring ring;
    const int points = line.getNumPoints();
    OGRRawPoint last(line.getX(0), line.getY(0));
    auto last_place = to_grid(last.x, last.y);
    if (!known(last_place)) return std::nullopt;
    for (int i = 1; i < points; ++i) {
        const OGRRawPoint next(line.getX(i), line.getY(i));
        const auto place = to_grid(next.x, next.y);
        if (!known(place)) return std::nullopt;
        if (to_grid.straight())
            ring.push_back(place);
        else
            add_edge(to_grid, last, last_place, next, place, 0, ring);
        last = next;
        last_place = place;
    }
    return ring;
}

void turn(Ring& ring, bool outer) {
    if ((signed_area(ring) > 0) != outer) std::reverse(ring.begin(), ring.end());
}

/// Adds the rings of a polygon; false where a corner has no place.
bool add_rings(const OGRPolygon& polygon, const ToGrid& to_grid, Rings& rings) {
    bool outer = true;
    for (const auto* line : polygon) {
        if (line->getNumPoints() < 4) continue;
        auto ring = ring_of(*line, to_grid);
        if (!ring) return false;
        turn(*ring, outer);
        outer = false;
        rings.push_back(std::move(*ring));
    }
    return true;
}

bool add_parts(const OGRGeometry& geometry, const ToGrid& to_grid, Rings& rings) {
    const auto type = wkbFlatten(geometry.getGeometryType());
    if (type == wkbPolygon) return add_rings(*geometry.toPolygon(), to_grid, rings);
    if (OGR_GT_IsSubClassOf(type, wkbGeometryCollection)) {
        for (const auto* part : *geometry.toGeometryCollection())
            if (!add_parts(*part, to_grid, rings)) return false;
    }
    return true;  // points and lines have no area
}

/// Counts cases and keeps the first few names.
struct Cases {
    std::uint64_t count = 0;
    std::vector<std::string> first;

    void add(const std::string& id) {
        if (++count <= 5) first.push_back(id);
    }
    void note(const std::string& what, std::vector<std::string>& notes) const {
        if (count > 0)
            notes.push_back(fmt::format("{} {}: {}{}", count, what, joined(first, ", "),
                                        count > first.size() ? ", ..." : ""));
    }
};

std::string id_of(const OGRFeature& feature, int id_index) {
    return id_index < 0 ? std::to_string(feature.GetFID())
                        : const_cast<OGRFeature&>(feature).GetFieldAsString(id_index);
}

double number_of(const OGRFeature& feature, int index) {
    return feature.IsFieldSetAndNotNull(index) ? feature.GetFieldAsDouble(index) : nan_value;
}

}  // namespace

void measure(Polygon& polygon) noexcept {
    constexpr double far = std::numeric_limits<double>::infinity();
    polygon.area_px = 0;
    polygon.left = polygon.top = far;
    polygon.right = polygon.bottom = -far;
    for (const auto& ring : polygon.rings) {
        polygon.area_px += signed_area(ring);
        for (const auto& place : ring) {
            polygon.left = std::min(polygon.left, place.column);
            polygon.right = std::max(polygon.right, place.column);
            polygon.top = std::min(polygon.top, place.row);
            polygon.bottom = std::max(polygon.bottom, place.row);
        }
    }
}

PolygonFile inspect_polygons(const PolygonName& name) {
    const Opened file(name);
    return {file.dataset->GetDriverName(), file.layer.GetName(), file.crs_wkt,
            fields_of(file.layer),
            static_cast<std::uint64_t>(std::max<GIntBig>(0, file.layer.GetFeatureCount()))};
}

Polygons read_polygons(const PolygonName& name, const Grid& grid, const PolygonsWanted& wanted) {
    const Opened file(name);
    const int id_index = wanted.id_field.empty() || wanted.id_field == "fid"
                             ? -1
                             : field_index(file.layer, wanted.id_field, name);
    std::vector<int> number_indices;
    for (const auto& field : wanted.number_fields) {
        number_indices.push_back(field_index(file.layer, field, name));
        const auto type = file.layer.GetLayerDefn()->GetFieldDefn(number_indices.back())->GetType();
        if (type != OFTInteger && type != OFTInteger64 && type != OFTReal)
            throw Error(Cause::input, "the field \"" + field + "\" holds no numbers",
                        where_of(name), "name a field of numbers");
    }
    OGREnvelope around;
    Polygons polygons;
    if (file.layer.GetExtent(&around, TRUE) != OGRERR_NONE) return polygons;
    const ToGrid to_grid(file.crs_wkt, grid, around);
    Cases repaired, empty, unplaced;
    const GdalMessages messages;
    for (const auto& feature : file.layer) {
        Polygon polygon;
        polygon.fid = feature->GetFID();
        polygon.id = id_of(*feature, id_index);
        std::unique_ptr<OGRGeometry> shape(feature->StealGeometry());
        if (shape != nullptr && shape->hasCurveGeometry(TRUE))
            shape.reset(shape->getLinearGeometry());
        if (shape != nullptr && !shape->IsValid()) {
            repaired.add(polygon.id);
            shape.reset(shape->MakeValid());
        }
        const bool placed = shape == nullptr || add_parts(*shape, to_grid, polygon.rings);
        measure(polygon);
        if (!placed)
            unplaced.add(polygon.id);
        else if (!(polygon.area_px > 0))
            empty.add(polygon.id);
        else {
            for (const int index : number_indices)
                polygon.numbers.push_back(number_of(*feature, index));
            polygons.all.push_back(std::move(polygon));
        }
    }
    repaired.note("invalid polygons repaired (crossing or touching rings)", polygons.notes);
    empty.note("features without an area left out", polygons.notes);
    unplaced.note("polygons left out because a corner has no place in the grid's CRS",
                  polygons.notes);
    return polygons;
}

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
    const Opened from(shapes);
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
