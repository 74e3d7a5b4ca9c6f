#include "zone_block.hpp"

#include <algorithm>
#include <cmath>
#include <limits>
#include <numbers>

namespace sunbudget {

namespace {

/// The part of a block that a zone's outline lies in; no pixels where they do not meet.
Window overlap(const Polygon& zone, const Window& block) {
    const auto low = [](double edge, long from) {
        return std::max(from, static_cast<long>(std::floor(std::max(edge, -1.0))));
    };
    const auto high = [](double edge, long to) {
        return std::min(to, static_cast<long>(std::ceil(std::min(edge, 2e9))));
    };
    const long left = low(zone.left, block.column), top = low(zone.top, block.row);
    const long right = high(zone.right, block.column + block.width),
               bottom = high(zone.bottom, block.row + block.height);
    return {left, top, static_cast<int>(std::max(0L, right - left)),
            static_cast<int>(std::max(0L, bottom - top))};
}

}  // namespace

void ZonePiece::merge(const ZonePiece& later) {
    map_area_m2 += later.map_area_m2;
    surface_area_m2 += later.surface_area_m2;
    covered_px += later.covered_px;
    first_layer_px += later.first_layer_px;
    for (const auto& [code, area_m2] : later.classes_m2) classes_m2[code] += area_m2;
    tallies.resize(std::max(tallies.size(), later.tallies.size()));
    for (std::size_t i = 0; i < later.tallies.size(); ++i) tallies[i].merge(later.tallies[i]);
}

ZoneBlock::ZoneBlock(const ZoneQuestion& question, std::span<const ZoneBand> bands, bool ground,
                     const Locator& locator)
    : question_(question),
      bands_(bands),
      ground_(ground),
      locator_(locator.clone()),
      planes_(bands.size()) {
    for (const auto& band : bands) readers_.emplace_back(*band.source);
    if (question.slope_deg) slope_.emplace(*question.slope_deg);
    if (ground && question.classes) classes_.emplace(*question.classes);
}

void ZoneBlock::read(const Window& block) {
    block_ = block;
    for (std::size_t i = 0; i < readers_.size(); ++i) readers_[i].read(block, planes_[i]);
    if (classes_) classes_->read_codes(block, codes_);
    map_areas(block);
    surface_areas(block);
}

/// The parabola through three areas of a row, at its pixels: areas vary smoothly, and each row has its own.
void ZoneBlock::map_areas(const Window& block) {
    map_m2_ = Plane<double>(block.width, block.height);
    const auto area_at = [&](double column, double row) {
        const auto matrix = locator_.matrix(column + 0.5, row + 0.5);
        return matrix ? std::abs(matrix->determinant()) : std::numeric_limits<double>::quiet_NaN();
    };
    const double last = std::max(1, block.width - 1);
    for (int r = 0; r < block.height; ++r) {
        const double row = static_cast<double>(block.row + r),
                     left = static_cast<double>(block.column);
        const double a = area_at(left, row), b = area_at(left + last / 2, row),
                     c = area_at(left + last, row);
        const auto out = map_m2_.row(r);
        for (std::size_t i = 0; i < out.size(); ++i) {
            const double u = static_cast<double>(i) / last;
            const double area =
                a * (1 - u) * (1 - 2 * u) + b * 4 * u * (1 - u) + c * u * (2 * u - 1);
            out[i] = std::isnan(area) ? 0 : area;  // off the globe
        }
    }
}

void ZoneBlock::surface_areas(const Window& block) {
    surface_m2_ = Plane<double>(block.width, block.height);
    if (slope_) slope_->read(block, slope_deg_);
    for (int r = 0; r < block.height; ++r) {
        const auto map = map_m2_.row(r), surface = surface_m2_.row(r);
        std::copy(map.begin(), map.end(), surface.begin());
        if (!slope_) continue;
        const auto slope = slope_deg_.row(r);
        for (std::size_t i = 0; i < slope.size(); ++i)
            if (!std::isnan(slope[i]))
                surface[i] /= std::cos(static_cast<double>(slope[i]) * std::numbers::pi / 180);
    }
}

ZonePiece ZoneBlock::look(const Polygon& zone) {
    ZonePiece piece;
    const auto window = overlap(zone, block_);
    if (window.width == 0 || window.height == 0) return piece;
    cover(zone.rings, window, shares_);
    if (ground_) add_ground(window, piece);
    piece.tallies.resize(bands_.size());
    for (std::size_t band = 0; band < bands_.size(); ++band) {
        add_band(band, window, piece);
        piece.tallies[band].settle();
    }
    return piece;
}

void ZoneBlock::add_ground(const Window& window, ZonePiece& piece) const {
    const int top = static_cast<int>(window.row - block_.row);
    const auto left = static_cast<std::size_t>(window.column - block_.column);
    for (int r = 0; r < window.height; ++r) {
        const auto share = shares_.row(r);
        const auto map = map_m2_.row(top + r).subspan(left),
                   surface = surface_m2_.row(top + r).subspan(left);
        for (std::size_t i = 0; i < share.size(); ++i) {
            if (share[i] == 0) continue;
            piece.covered_px += share[i];
            piece.map_area_m2 += share[i] * map[i];
            piece.surface_area_m2 += share[i] * surface[i];
            if (!classes_) continue;
            const auto code = codes_.row(top + r)[left + i];
            if (code != no_code) piece.classes_m2[code] += share[i] * map[i];
        }
    }
}

void ZoneBlock::add_band(std::size_t band, const Window& window, ZonePiece& piece) const {
    const int top = static_cast<int>(window.row - block_.row);
    const auto left = static_cast<std::size_t>(window.column - block_.column);
    const auto& areas =
        question_.layers[bands_[band].layer].per_surface_area ? surface_m2_ : map_m2_;
    auto& tally = piece.tallies[band];
    for (int r = 0; r < window.height; ++r) {
        const auto share = shares_.row(r);
        const auto value = planes_[band].row(top + r).subspan(left);
        const auto area = areas.row(top + r).subspan(left);
        for (std::size_t i = 0; i < share.size(); ++i) {
            if (share[i] == 0 || std::isnan(value[i])) continue;
            if (ground_ && band == 0) piece.first_layer_px += share[i];
            if (area[i] > 0) tally.add(value[i], share[i] * area[i]);
        }
    }
}

}  // namespace sunbudget
