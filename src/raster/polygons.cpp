#include "sunbudget/raster/polygons.hpp"

#include <fmt/format.h>
#include <gdal_priv.h>
#include <ogrsf_frmts.h>

#include <algorithm>
#include <cmath>
#include <limits>
#include <memory>

#include "affine.hpp"
#include "crs.hpp"
#include "sunbudget/base/error.hpp"
#include "sunbudget/base/text.hpp"
#include "sunbudget/raster/gdal_setup.hpp"
#include "sunbudget/raster/grid_build.hpp"
#include "vector_file.hpp"

namespace sunbudget {

namespace {

constexpr double nan_value = std::numeric_limits<double>::quiet_NaN();

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

std::vector<int> indices_of_numbers(const VectorFile& file, const std::vector<std::string>& fields,
                                    const PolygonName& name) {
    std::vector<int> indices;
    for (const auto& field : fields) {
        indices.push_back(file.field_index(field, name));
        const auto type = file.layer.GetLayerDefn()->GetFieldDefn(indices.back())->GetType();
        if (type != OFTInteger && type != OFTInteger64 && type != OFTReal)
            throw Error(Cause::input, "the field \"" + field + "\" holds no numbers",
                        where_of(name), "name a field of numbers");
    }
    return indices;
}

/// The feature's shape with straight edges and no crossings; null where it has none.
std::unique_ptr<OGRGeometry> sound_shape(OGRFeature& feature, const std::string& id,
                                         Cases& repaired) {
    std::unique_ptr<OGRGeometry> shape(feature.StealGeometry());
    if (shape != nullptr && shape->hasCurveGeometry(TRUE)) shape.reset(shape->getLinearGeometry());
    if (shape != nullptr && !shape->IsValid()) {
        repaired.add(id);
        shape.reset(shape->MakeValid());
    }
    return shape;
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
    const VectorFile file(name);
    return {file.dataset->GetDriverName(), file.layer.GetName(), file.crs_wkt, file.fields(),
            static_cast<std::uint64_t>(std::max<GIntBig>(0, file.layer.GetFeatureCount()))};
}

Polygons read_polygons(const PolygonName& name, const Grid& grid, const PolygonsWanted& wanted) {
    const VectorFile file(name);
    const int id_index = wanted.id_field.empty() || wanted.id_field == "fid"
                             ? -1
                             : file.field_index(wanted.id_field, name);
    const auto number_indices = indices_of_numbers(file, wanted.number_fields, name);
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
        const auto shape = sound_shape(*feature, polygon.id, repaired);
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

}  // namespace sunbudget
