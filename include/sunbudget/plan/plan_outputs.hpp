#pragma once

#include <optional>
#include <string>
#include <vector>

#include "sunbudget/plan/plan_values.hpp"
#include "sunbudget/tables/layers.hpp"

namespace sunbudget {

enum class FileFormat { cog, geotiff };

struct PlanOutputs {
    Maybe<PlanPath> directory;
    std::vector<Given<LayerId>> layers;  ///< each once, at least one
    Maybe<OutputUnit> unit;
    Maybe<FileFormat> format;
    friend bool operator==(const PlanOutputs&, const PlanOutputs&) = default;
};

struct PlanZones {
    Place place;
    Given<PlanPath> file;
    Maybe<std::string> layer;            ///< of the file
    Maybe<std::string> id;               ///< a field, or "fid"
    std::vector<Given<LayerId>> layers;  ///< each once; empty: every layer of the run
    Maybe<double> above;
    friend bool operator==(const PlanZones& a, const PlanZones& b) {
        return a.file == b.file && a.layer == b.layer && a.id == b.id && a.layers == b.layers &&
               a.above == b.above;
    }
};

/// Where a change is made: polygons, classes of the land cover, or classes inside polygons.
struct PlanWhere {
    Place place;
    Maybe<PlanPath> file;
    Maybe<std::string> layer;  ///< of the file
    Maybe<std::string> query;  ///< an SQL WHERE clause
    Maybe<std::vector<int>> classes;
    friend bool operator==(const PlanWhere& a, const PlanWhere& b) {
        return a.file == b.file && a.layer == b.layer && a.query == b.query &&
               a.classes == b.classes;
    }
};

/// Initial, or aged, or both.
struct PlanChangedAlbedo {
    Place place;
    Maybe<double> initial, aged, low, high;
    friend bool operator==(const PlanChangedAlbedo& a, const PlanChangedAlbedo& b) {
        return a.initial == b.initial && a.aged == b.aged && a.low == b.low && a.high == b.high;
    }
};

/// Exactly one of them.
struct PlanChangedHeight {
    Place place;
    Maybe<PlanLength> add;
    Maybe<std::string> attribute;  ///< metres to add, of the polygons
    Maybe<PlanRaster> raster;
    friend bool operator==(const PlanChangedHeight& a, const PlanChangedHeight& b) {
        return a.add == b.add && a.attribute == b.attribute && a.raster == b.raster;
    }
};

struct PlanChange {
    Place place;
    Given<std::string> name;
    std::optional<PlanWhere> where;
    std::optional<PlanChangedAlbedo> albedo;
    Maybe<int> to_class;  ///< a class of the cover's table
    Maybe<double> emissivity;
    std::optional<PlanChangedHeight> height;
    Maybe<double> treatable;
    Maybe<double> lifetime;
    Maybe<double> cost;
    friend bool operator==(const PlanChange& a, const PlanChange& b) {
        return a.name == b.name && a.where == b.where && a.albedo == b.albedo &&
               a.to_class == b.to_class && a.emissivity == b.emissivity && a.height == b.height &&
               a.treatable == b.treatable && a.lifetime == b.lifetime && a.cost == b.cost;
    }
};

/// What people read of a run.
struct PlanReport {
    Maybe<bool> html;
    std::vector<Given<LayerId>> layers;  ///< each once; empty: every layer of the run
    friend bool operator==(const PlanReport&, const PlanReport&) = default;
};

struct PlanEngine {
    Maybe<int> tile;
    friend bool operator==(const PlanEngine&, const PlanEngine&) = default;
};

}  // namespace sunbudget
