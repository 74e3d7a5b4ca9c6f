#include "sunbudget/model/elevation.hpp"

#include <algorithm>
#include <array>
#include <cmath>

#include "sunbudget/raster/locator.hpp"

namespace sunbudget {

namespace {

/// Height at a hole's pixel on the line between the nearest ground on either side; NaN where one side
/// has none within reach. The hole itself may be at most bridged_px pixels long.
float along_line(const Plane<float>& heights_m, int column, int row, int across, int down) {
    std::array<int, 2> away{};
    std::array<float, 2> ground{};
    for (std::size_t side = 0; side < 2; ++side) {
        const int sign = side == 0 ? -1 : 1;
        for (int step = 1; step <= bridged_px && away[side] == 0; ++step) {
            const float height =
                heights_m.at(column + sign * step * across, row + sign * step * down);
            if (std::isnan(height)) continue;
            away[side] = step;
            ground[side] = height;
        }
        if (away[side] == 0) return std::numeric_limits<float>::quiet_NaN();
    }
    if (away[0] + away[1] - 1 > bridged_px) return std::numeric_limits<float>::quiet_NaN();
    const float share = static_cast<float>(away[0]) / static_cast<float>(away[0] + away[1]);
    return ground[0] + share * (ground[1] - ground[0]);
}

float bridged(const Plane<float>& heights_m, int column, int row) {
    constexpr std::array<std::array<int, 2>, 4> ways{{{1, 0}, {0, 1}, {1, 1}, {1, -1}}};
    float sum = 0;
    int lines = 0;
    for (const auto& [across, down] : ways) {
        const float height = along_line(heights_m, column, row, across, down);
        if (std::isnan(height)) continue;
        sum += height;
        ++lines;
    }
    return sum / static_cast<float>(lines);  // 0 / 0 is NaN: no line met ground on both sides
}

}  // namespace

long bridge_holes(const Plane<float>& heights_m, Plane<float>& out) {
    long filled = 0;
    for (int r = 0; r < out.height(); ++r) {
        const auto from = heights_m.row(r + bridged_px)
                              .subspan(bridged_px, static_cast<std::size_t>(out.width()));
        const auto to = out.row(r);
        std::copy(from.begin(), from.end(), to.begin());
        for (int c = 0; c < out.width(); ++c) {
            if (!std::isnan(to[static_cast<std::size_t>(c)])) continue;
            const float height = bridged(heights_m, c + bridged_px, r + bridged_px);
            filled += !std::isnan(height);
            to[static_cast<std::size_t>(c)] = height;
        }
    }
    return filled;
}

ElevationReader::ElevationReader(std::span<const Source> sources) {
    for (const auto& source : sources) readers_.emplace_back(source);
}

ElevationReader::ElevationReader(const Terrain& terrain) : ElevationReader(terrain.elevation) {
    if (terrain.raised) raised_.emplace(*terrain.raised);
}

void ElevationReader::read_all(const Window& window, Plane<float>& heights_m) {
    readers_.front().read(window, heights_m);
    for (std::size_t n = 1; n < readers_.size(); ++n) {
        readers_[n].read(window, next_);
        for (int r = 0; r < window.height; ++r) {
            const auto to = heights_m.row(r);
            const auto from = next_.row(r);
            for (std::size_t i = 0; i < to.size(); ++i) to[i] = std::isnan(to[i]) ? from[i] : to[i];
        }
    }
}

void ElevationReader::read(const Window& window, Plane<float>& heights_m) {
    read_all({window.column - bridged_px, window.row - bridged_px, window.width + 2 * bridged_px,
              window.height + 2 * bridged_px},
             wide_);
    if (heights_m.width() != window.width || heights_m.height() != window.height)
        heights_m = Plane<float>(window.width, window.height);
    bridge_holes(wide_, heights_m);
    if (raised_) raised_->heights(window, heights_m);
}

std::uint64_t ElevationReader::infinities() const {
    std::uint64_t count = 0;
    for (const auto& reader : readers_) count += reader.infinities();
    return count;
}

Window extent_on_grid(std::span<const Source> sources, const Grid& grid) {
    double left = grid.width, top = grid.height, right = 0, bottom = 0;
    for (const auto& source : sources) {
        const auto& from = source.info().grid;
        constexpr int steps = 32;
        std::vector<double> column, row;
        for (int i = 0; i <= steps; ++i)
            for (int j = 0; j <= steps; ++j) {
                column.push_back(from.width * (i / double{steps}));
                row.push_back(from.height * (j / double{steps}));
            }
        places_in(grid, from, column, row);
        for (std::size_t i = 0; i < column.size(); ++i) {
            if (std::isnan(column[i]) || std::isnan(row[i])) continue;
            left = std::min(left, column[i]);
            right = std::max(right, column[i]);
            top = std::min(top, row[i]);
            bottom = std::max(bottom, row[i]);
        }
    }
    // A source that wraps round the world, or one seen from another side of it, says nothing useful here.
    const auto whole = [](double value) { return std::clamp(value, -1e6, 1e6); };
    const long first_column = static_cast<long>(std::floor(whole(left)));
    const long first_row = static_cast<long>(std::floor(whole(top)));
    return {first_column, first_row,
            static_cast<int>(std::ceil(whole(right))) - static_cast<int>(first_column),
            static_cast<int>(std::ceil(whole(bottom))) - static_cast<int>(first_row)};
}

}  // namespace sunbudget
