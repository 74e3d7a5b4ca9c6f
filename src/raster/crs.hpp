#pragma once

#include <functional>
#include <memory>
#include <optional>
#include <span>
#include <string>

#include "sunbudget/raster/grid.hpp"

class OGRSpatialReference;
struct PJconsts;
struct pj_ctx;

namespace sunbudget {

/// The only place where CRS objects are made: easting or longitude first, always.
/// Throws Error(input) for WKT that cannot be read.
[[nodiscard]] std::unique_ptr<OGRSpatialReference, std::function<void(OGRSpatialReference*)>>
crs_from_wkt(const std::string& wkt);

/// WKT2 without a vertical part.
[[nodiscard]] std::string flat_wkt(const OGRSpatialReference& crs);

/// Why a CRS has no place on the Earth's surface; empty when it has one.
[[nodiscard]] std::string why_not_on_earth(const OGRSpatialReference& crs);

/// A full turn in the unit of a geographic CRS (360 for degrees); nothing for other CRSs.
[[nodiscard]] std::optional<double> full_turn(const std::string& crs_wkt);

/// Longitude and latitude in degrees on WGS84.
inline constexpr const char* wgs84_text = "OGC:CRS84";

/// Points from one CRS to another by one fixed operation. PROJ knows several ways between most
/// datums and would pick one by each point's place, so that results jump at borders of validity;
/// here the way that suits the middle of `region` is taken for all.
class PointTransform {
  public:
    /// `region` is in `from`; its middle, else another of its points, must have an answer.
    /// Throws Error(input) when there is no way from one to the other.
    PointTransform(const std::string& from, const std::string& to, const Grid& region);
    ~PointTransform();
    PointTransform(PointTransform&&) noexcept;
    PointTransform& operator=(PointTransform&&) noexcept;

    /// In place; NaN where there is no answer. A point's result does not depend on the others.
    void apply(std::span<double> easting, std::span<double> northing) const;

  private:
    struct Free {
        void operator()(pj_ctx* context) const noexcept;
        void operator()(PJconsts* operation) const noexcept;
    };
    std::unique_ptr<pj_ctx, Free> context_;
    std::unique_ptr<PJconsts, Free> operation_;
};

}  // namespace sunbudget
