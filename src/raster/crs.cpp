#include "crs.hpp"

#include <cpl_conv.h>
#include <ogr_spatialref.h>
#include <proj.h>

#include <array>
#include <cmath>
#include <limits>
#include <numbers>

#include "sunbudget/base/error.hpp"
#include "sunbudget/base/text.hpp"
#include "sunbudget/raster/gdal_setup.hpp"
#include "sunbudget/raster/grid_build.hpp"

namespace sunbudget {
namespace {

/// Semi-major axes in use for the Earth lie within 1,400 m of WGS84's, spheres within 8 km; the next
/// body, Venus, is 5 % smaller.
constexpr double wgs84_semi_major_m = 6378137.0;
constexpr double share_still_earth = 0.01;

using CrsPtr = std::unique_ptr<OGRSpatialReference, std::function<void(OGRSpatialReference*)>>;

CrsPtr empty_crs() {
    CrsPtr crs(new OGRSpatialReference, [](OGRSpatialReference* p) { p->Release(); });
    crs->SetAxisMappingStrategy(OAMS_TRADITIONAL_GIS_ORDER);
    return crs;
}

/// Points of the region to try, its middle first.
std::vector<std::array<double, 2>> places_in(const Grid& region) {
    std::vector<std::array<double, 2>> places;
    const auto add = [&](double x, double y) {
        places.push_back({region.easting(x * region.width, y * region.height),
                          region.northing(x * region.width, y * region.height)});
    };
    add(0.5, 0.5);
    constexpr int steps = 8;
    for (int row = 0; row <= steps; ++row)
        for (int column = 0; column <= steps; ++column)
            add(static_cast<double>(column) / steps, static_cast<double>(row) / steps);
    return places;
}

}  // namespace

CrsPtr crs_from_wkt(const std::string& wkt) {
    auto crs = empty_crs();
    const GdalMessages messages;
    if (crs->importFromWkt(wkt.c_str()) != OGRERR_NONE)
        throw Error(Cause::input, "the CRS cannot be read: " + messages.first_failure(), {},
                    "give the raster a CRS with gdal_edit.py -a_srs EPSG:n");
    crs->SetAxisMappingStrategy(OAMS_TRADITIONAL_GIS_ORDER);
    return crs;
}

std::string flat_wkt(const OGRSpatialReference& crs) {
    auto flat = empty_crs();
    *flat = crs;
    if (flat->IsCompound()) flat->StripVertical();
    if (flat->GetAxesCount() > 2) flat->DemoteTo2D(nullptr);
    char* text = nullptr;
    const std::array<const char*, 2> options{"FORMAT=WKT2_2019", nullptr};
    const GdalMessages messages;
    const bool written = flat->exportToWkt(&text, options.data()) == OGRERR_NONE;
    const std::string wkt = text == nullptr ? "" : text;
    CPLFree(text);
    if (!written || wkt.empty())
        throw Error(Cause::input, "the CRS cannot be written as WKT: " + messages.first_failure(),
                    {}, "give the raster a CRS with gdal_edit.py -a_srs EPSG:n");
    return wkt;
}

std::string why_not_on_earth(const OGRSpatialReference& crs) {
    if (crs.IsGeocentric()) return "its CRS is geocentric";
    if (!crs.IsProjected() && !crs.IsGeographic()) return "its CRS is not tied to the Earth";
    const double axis_m = crs.GetSemiMajor(nullptr);
    if (std::abs(axis_m / wgs84_semi_major_m - 1) > share_still_earth)
        return "its CRS is for another celestial body (radius " + shortest(axis_m) + " m)";
    return {};
}

std::optional<double> full_turn(const std::string& crs_wkt) {
    const auto crs = crs_from_wkt(crs_wkt);
    if (!crs->IsGeographic()) return std::nullopt;
    const double unit_rad = crs->GetAngularUnits(nullptr);
    const double turn = 2 * std::numbers::pi / unit_rad;
    // The unit of degrees is written with limited digits.
    return std::abs(turn - 360) < 1e-9 ? 360 : turn;
}

std::string crs_wkt_of(std::string_view text) {
    auto crs = empty_crs();
    const GdalMessages messages;
    const std::string wanted(trimmed(text));
    const bool known =
        !wanted.empty() &&
        crs->SetFromUserInput(wanted.c_str(),
                              OGRSpatialReference::SET_FROM_USER_INPUT_LIMITATIONS_get()) ==
            OGRERR_NONE;
    if (!known)
        throw Error(Cause::usage, "this CRS is not known", wanted,
                    "give EPSG:n, WKT or a PROJ string, such as EPSG:32633");
    crs->SetAxisMappingStrategy(OAMS_TRADITIONAL_GIS_ORDER);
    if (const auto why = why_not_on_earth(*crs); !why.empty())
        throw Error(Cause::usage, why, wanted, "give a geographic or projected CRS of the Earth");
    return flat_wkt(*crs);
}

std::optional<std::string> crs_code(const std::string& crs_wkt) {
    const auto crs = crs_from_wkt(crs_wkt);
    const char* authority = crs->GetAuthorityName(nullptr);
    const char* code = crs->GetAuthorityCode(nullptr);
    if (authority == nullptr || code == nullptr) return std::nullopt;
    return std::string(authority) + ':' + code;
}

std::string crs_name(const std::string& crs_wkt) {
    const auto crs = crs_from_wkt(crs_wkt);
    const char* name = crs->GetName();
    const std::string words = name == nullptr || *name == '\0' ? "unnamed CRS" : name;
    const auto code = crs_code(crs_wkt);
    return code ? words + " (" + *code + ")" : words;
}

bool same_crs(const std::string& a_wkt, const std::string& b_wkt) {
    if (a_wkt == b_wkt) return true;
    const GdalMessages messages;
    return crs_from_wkt(a_wkt)->IsSame(crs_from_wkt(b_wkt).get()) != 0;
}

bool is_geographic(const std::string& crs_wkt) {
    return crs_from_wkt(crs_wkt)->IsGeographic() != 0;
}

double metres_per_unit(const std::string& crs_wkt) {
    return crs_from_wkt(crs_wkt)->GetLinearUnits(nullptr);
}

void PointTransform::Free::operator()(pj_ctx* context) const noexcept {
    proj_context_destroy(context);
}
void PointTransform::Free::operator()(PJconsts* operation) const noexcept {
    proj_destroy(operation);
}

PointTransform::~PointTransform() = default;
PointTransform::PointTransform(PointTransform&&) noexcept = default;
PointTransform& PointTransform::operator=(PointTransform&&) noexcept = default;

PointTransform::PointTransform(const std::string& from, const std::string& to, const Grid& region)
    : context_(proj_context_create()) {
    using Handle = std::unique_ptr<PJconsts, Free>;
    pj_ctx* context = context_.get();
    proj_log_level(context, PJ_LOG_NONE);
    proj_context_set_enable_network(context, 0);
    const Handle a(proj_create(context, from.c_str()));
    const Handle b(proj_create(context, to.c_str()));
    if (a != nullptr && b != nullptr) {
        const Handle ways(
            proj_create_crs_to_crs_from_pj(context, a.get(), b.get(), nullptr, nullptr));
        if (ways != nullptr)
            operation_.reset(proj_normalize_for_visualization(context, ways.get()));
    }
    if (operation_ == nullptr)
        throw Error(Cause::input, "no way is known from one CRS to the other",
                    crs_name(crs_wkt_of(from)) + " to " + crs_name(crs_wkt_of(to)),
                    "warp the raster first with gdalwarp");
    for (const auto& [x, y] : places_in(region)) {
        const auto answer = proj_trans(operation_.get(), PJ_FWD, proj_coord(x, y, 0, 0));
        if (!std::isfinite(answer.xy.x) || !std::isfinite(answer.xy.y)) continue;
        if (Handle used{proj_trans_get_last_used_operation(operation_.get())})
            operation_ = std::move(used);
        return;
    }
}

void PointTransform::apply(std::span<double> easting, std::span<double> northing) const {
    proj_trans_generic(operation_.get(), PJ_FWD, easting.data(), sizeof(double), easting.size(),
                       northing.data(), sizeof(double), northing.size(), nullptr, 0, 0, nullptr, 0,
                       0);
    constexpr double nan = std::numeric_limits<double>::quiet_NaN();
    for (std::size_t i = 0; i < easting.size(); ++i)
        if (!std::isfinite(easting[i]) || !std::isfinite(northing[i]))
            easting[i] = northing[i] = nan;
}

}  // namespace sunbudget
