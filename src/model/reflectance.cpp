#include "reflectance.hpp"

#include <algorithm>
#include <cmath>

#include "sunbudget/tables/quality.hpp"

namespace sunbudget {

ReflectanceReader::ReflectanceReader(const ReflectanceSurface& surface)
    : surface_(surface), reflectance_(surface.bands.size()), codes_(surface.quality.size()) {
    for (const auto& band : surface.bands) {
        bands_.emplace_back(band.reflectance);
        weighted_.push_back({static_cast<float>(band.weight), {}});
    }
    for (const auto& raster : surface.quality) quality_.emplace_back(raster.codes);
}

void ReflectanceReader::read_planes(const Window& window) {
    for (std::size_t b = 0; b < bands_.size(); ++b) bands_[b].read(window, reflectance_[b]);
    for (std::size_t q = 0; q < quality_.size(); ++q) quality_[q].read_codes(window, codes_[q]);
}

void ReflectanceReader::convert_row(int row, std::span<float> albedo,
                                    std::span<std::uint16_t> flags) {
    for (std::size_t b = 0; b < bands_.size(); ++b)
        weighted_[b].reflectance = reflectance_[b].row(row);
    broadband_sum(weighted_, static_cast<float>(surface_.weights.constant), albedo);
    if (!quality_.empty()) {
        reasons_.assign(albedo.size(), not_rejected);
        for (std::size_t q = 0; q < quality_.size(); ++q)
            apply_quality(codes_[q].row(row), surface_.quality[q].tests,
                          surface_.quality[q].missing, flags, reasons_);
        drop_rejected(reasons_, albedo);
    }
    keep_albedo(albedo, static_cast<float>(surface_.weights.fit_error), quality::out_of_range,
                flags);
    for (std::size_t i = 0; i < albedo.size(); ++i)
        flags[i] = static_cast<std::uint16_t>(
            flags[i] | (std::isnan(albedo[i]) ? quality::no_surface : quality::reflectance));
}

void ReflectanceReader::read(const Window& window, Plane<float>& albedo,
                             Plane<std::uint16_t>& flags) {
    read_planes(window);
    for (int row = 0; row < window.height; ++row) convert_row(row, albedo.row(row), flags.row(row));
}

std::uint64_t ReflectanceReader::infinities() const {
    std::uint64_t count = 0;
    for (const auto& band : bands_) count += band.infinities();
    return count;
}

}  // namespace sunbudget
