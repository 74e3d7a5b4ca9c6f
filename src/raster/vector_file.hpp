#pragma once

#include <string>
#include <vector>

#include "dataset.hpp"
#include "sunbudget/raster/polygons.hpp"

class OGRLayer;

namespace sunbudget {

/// An open file of polygons, its layer and what of it is used.
struct VectorFile {
    DatasetPtr dataset;
    OGRLayer& layer;
    std::string crs_wkt;

    /// Throws Error(input) as inspect_polygons does.
    explicit VectorFile(const PolygonName& name);

    [[nodiscard]] std::vector<std::string> fields() const;
    /// Throws Error(input) when there is none of that name.
    [[nodiscard]] int field_index(const std::string& field, const PolygonName& name) const;
};

/// The file and its layer, for messages.
[[nodiscard]] std::string where_of(const PolygonName& name);

}  // namespace sunbudget
