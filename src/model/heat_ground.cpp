#include "heat_ground.hpp"

#include <algorithm>
#include <cmath>
#include <limits>
#include <vector>

#include "planes.hpp"
#include "sunbudget/tables/quality.hpp"

namespace sunbudget {

namespace {

constexpr float nan_value = std::numeric_limits<float>::quiet_NaN();

const CoverSurface* cover_of(const Run& run) {
    if (const auto* cover = std::get_if<CoverSurface>(&run.surface)) return cover;
    const auto* image = std::get_if<ReflectanceSurface>(&run.surface);
    return image != nullptr && image->fill ? &*image->fill : nullptr;
}

/// Of snow, whose NDVI is that of bare soil. Fresh and old snow 0.98 to 0.99, broadband (from memory of Warren,
/// Rev. Geophys. 20, 1982, 67-89, and Dozier & Warren, Water Resour. Res. 18, 1982, 1424-1434).
constexpr float snow_emissivity = 0.985F;

/// Values outside are no data.
void keep_between(float low, float high, Plane<float>& plane) noexcept {
    for (int r = 0; r < plane.height(); ++r)
        for (auto& value : plane.row(r)) value = value >= low && value <= high ? value : nan_value;
}

}  // namespace

std::optional<Reader> reader_of(const std::optional<Source>& source) {
    std::optional<Reader> reader;
    if (source) reader.emplace(*source);
    return reader;
}

std::uint64_t infinities_of(std::initializer_list<const std::optional<Reader>*> readers) {
    std::uint64_t count = 0;
    for (const auto* reader : readers)
        if (*reader) count += (*reader)->infinities();
    return count;
}

HeatGround::HeatGround(const Run& run)
    : heat_(run.heat), classes_(cover_of(run)), surface_(reader_of(run.heat.surface_k)) {
    if (classes_ != nullptr) cover_.emplace(classes_->codes);
    if (heat_.emissivity) {
        if (const auto* raster = std::get_if<Source>(&*heat_.emissivity))
            emissivity_raster_.emplace(*raster);
        if (const auto* ndvi = std::get_if<NdviEmissivity>(&*heat_.emissivity)) {
            red_.emplace(ndvi->red);
            nir_.emplace(ndvi->nir);
        }
    }
    if (heat_.surface_quality) surface_quality_.emplace(heat_.surface_quality->codes);
    if (run.carried_out) change_.emplace(*run.carried_out);
}

void HeatGround::read(const Window& where, const Plane<std::uint16_t>& flags) {
    window_ = where;
    if (heat_.emissivity) read_emissivity(flags);
    read_dry();
    if (change_) {
        if (!emissivity_.empty()) change_->emissivity(window_, emissivity_);
        change_->dry(window_, dry_);
    }
    if (surface_) read_surface();
}

void HeatGround::read_emissivity(const Plane<std::uint16_t>& flags) {
    fit(emissivity_, window_);
    if (const auto* number = std::get_if<double>(&*heat_.emissivity))
        emissivity_.fill(static_cast<float>(*number));
    if (emissivity_raster_) {
        emissivity_raster_->read(window_, emissivity_);
        keep_between(0, 1, emissivity_);
    }
    if (std::holds_alternative<ClassEmissivity>(*heat_.emissivity))
        cover_->read_values(window_, classes_->emissivity, emissivity_);
    if (red_) read_from_ndvi(flags);
}

void HeatGround::read_from_ndvi(const Plane<std::uint16_t>& flags) {
    red_->read(window_, red_plane_);
    nir_->read(window_, nir_plane_);
    if (cover_) {
        cover_->read_values(window_, classes_->built_emissivity, built_);
        cover_->read_values(window_, classes_->emissivity, class_emissivity_);
    }
    for (int r = 0; r < window_.height; ++r) {
        const auto row = emissivity_.row(r);
        const auto flag = flags.row(r);
        emissivity_from_ndvi(red_plane_.row(r), nir_plane_.row(r), row);
        for (std::size_t i = 0; i < row.size(); ++i) {
            // A cloud's NDVI says nothing of the ground below.
            const bool seen = (flag[i] & quality::source_mask) == quality::reflectance;
            if (!seen) row[i] = cover_ ? class_emissivity_.row(r)[i] : nan_value;
            if (seen && cover_ && !std::isnan(built_.row(r)[i])) row[i] = built_.row(r)[i];
            if (seen && (flag[i] & quality::snow) != 0) row[i] = snow_emissivity;
        }
    }
}

void HeatGround::read_dry() {
    fit(dry_, window_);
    if (cover_)
        cover_->read_values(window_, classes_->dry, dry_);
    else
        dry_.fill(nan_value);
}

void HeatGround::read_surface() {
    // Temperatures no ground has (a scene's clamped numbers under cloud) are no data.
    constexpr float coldest_k = 180, hottest_k = 380;
    surface_->read(window_, surface_k_);
    keep_between(coldest_k, hottest_k, surface_k_);
    if (surface_quality_) drop_clouded();
}

void HeatGround::drop_clouded() {
    Plane<std::int32_t> codes;
    surface_quality_->read_codes(window_, codes);
    std::vector<RejectReason> reasons(static_cast<std::size_t>(window_.width));
    std::vector<std::uint16_t> flags(
        reasons.size());  // those of the albedo's image are the layer quality's
    for (int r = 0; r < window_.height; ++r) {
        std::ranges::fill(reasons, not_rejected);
        apply_quality(codes.row(r), heat_.surface_quality->tests, heat_.surface_quality->missing,
                      flags, reasons);
        drop_rejected(reasons, surface_k_.row(r));
    }
}

}  // namespace sunbudget
