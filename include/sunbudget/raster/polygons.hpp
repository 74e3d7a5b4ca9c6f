#pragma once

#include <cstdint>
#include <filesystem>
#include <functional>
#include <optional>
#include <span>
#include <string>
#include <vector>

#include "sunbudget/raster/coverage.hpp"
#include "sunbudget/raster/grid.hpp"

namespace sunbudget {

/// Polygons of a vector file: GeoPackage, GeoJSON, shapefile, FlatGeobuf.
struct PolygonName {
    std::filesystem::path path{};
    std::string layer{};  ///< empty: the only one
    std::string query{};  ///< an SQL WHERE clause on attributes; empty: all

    friend bool operator==(const PolygonName&, const PolygonName&) = default;
};

struct PolygonFile {
    std::string driver;
    std::string layer;
    std::string crs_wkt;
    std::vector<std::string> fields;
    std::uint64_t features = 0;  ///< those the query chooses
};

/// What a file tells before its shapes are read.
/// Throws Error(input): no such file or layer, no polygons, no CRS of the Earth, a query that is none.
[[nodiscard]] PolygonFile inspect_polygons(const PolygonName& name);

/// One feature on a grid.
struct Polygon {
    std::int64_t fid = 0;
    std::string id;  ///< the chosen field as text, else the fid
    Rings rings;     ///< in pixels of the grid
    double area_px = 0;
    double left = 0, top = 0, right = 0, bottom = 0;  ///< around the rings
    std::vector<double> numbers;                      ///< the fields asked for; NaN where null
};

/// Fills in area and bounds from the rings.
void measure(Polygon& polygon) noexcept;

struct PolygonsWanted {
    std::string id_field{};  ///< empty, or "fid": the feature's number
    std::vector<std::string> number_fields{};
};

struct Polygons {
    std::vector<Polygon> all;          ///< in the file's order
    std::vector<std::string> notes{};  ///< what was repaired or left out, for people
};

/// Every polygon of a file in pixels of a grid. Edges are cut up until they stay within 0.01 pixel of their true
/// course in the grid's CRS; invalid shapes are repaired and named in the notes; features without an area, or without
/// a place in the grid's CRS, are left out and named.
/// Throws Error(input) as inspect_polygons does, and for fields that are not there or hold no numbers.
[[nodiscard]] Polygons read_polygons(const PolygonName& name, const Grid& grid,
                                     const PolygonsWanted& wanted);

/// A column of a table of figures for features.
struct FeatureColumn {
    std::string name;
    bool text = false;
};

/// One row: the feature it belongs to, and its cells in the columns' order.
struct FeatureRow {
    std::int64_t fid = 0;
    std::vector<std::string> texts;  ///< of the text columns
    std::vector<double> numbers;     ///< of the others; NaN is null
};

/// Writes a GeoPackage with the shapes of `shapes` and rows of figures; the same bytes every time.
///
/// in      row  gives row i of `rows`, any order; several rows may share a feature
/// errors  Error(output)
void write_features(const std::filesystem::path& file, const PolygonName& shapes,
                    const std::string& layer, std::span<const FeatureColumn> columns,
                    std::size_t rows, const std::function<FeatureRow(std::size_t)>& row);

}  // namespace sunbudget
