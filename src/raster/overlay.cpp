#include "overlay.hpp"

#include <algorithm>
#include <array>
#include <cmath>
#include <vector>

namespace sunbudget {
namespace {

/// Grids this near to each other, in pixels, are one lattice.
constexpr double lattice_tolerance = 1e-6;

struct Place {
    double column, row;
};

/// A lattice of steps x steps target places.
std::vector<Place> corners(const Grid& grid, int steps) {
    std::vector<Place> places;
    for (int r = 0; r <= steps; ++r)
        for (int c = 0; c <= steps; ++c)
            places.push_back({std::round(static_cast<double>(c) * grid.width / steps),
                              std::round(static_cast<double>(r) * grid.height / steps)});
    return places;
}
std::vector<Place> middles(const Grid& grid, int steps) {
    std::vector<Place> places;
    for (int r = 0; r < steps; ++r)
        for (int c = 0; c < steps; ++c)
            places.push_back({std::floor((c + 0.5) * grid.width / steps) + 0.5,
                              std::floor((r + 0.5) * grid.height / steps) + 0.5});
    return places;
}

std::vector<Place> mapped(const PixelMap& map, const std::vector<Place>& places) {
    std::vector<double> x, y;
    for (const auto& place : places) {
        x.push_back(place.column);
        y.push_back(place.row);
    }
    map.exact(x, y);
    std::vector<Place> found;
    for (std::size_t i = 0; i < x.size(); ++i) found.push_back({x[i], y[i]});
    return found;
}

bool on(const Grid& grid, const Place& place) {
    return place.column >= 0 && place.column < grid.width && place.row >= 0 &&
           place.row < grid.height;
}

/// Whether every place is the first one's shift away, turns round the globe allowed where the
/// columns meet behind it.
bool find_shift(const PixelMap& map, Overlay& overlay) {
    const auto from = corners(map.target(), 8);
    const auto to = mapped(map, from);
    const double columns = std::round(to[0].column - from[0].column);
    const double rows = std::round(to[0].row - from[0].row);
    const auto period = static_cast<double>(map.period());
    for (std::size_t i = 0; i < from.size(); ++i) {
        double dx = to[i].column - from[i].column - columns;
        if (period > 0) dx -= period * std::round(dx / period);
        const double dy = to[i].row - from[i].row - rows;
        if (!(std::abs(dx) < lattice_tolerance) || !(std::abs(dy) < lattice_tolerance))
            return false;
    }
    overlay.column_shift = static_cast<long>(columns);
    overlay.row_shift = static_cast<long>(rows);
    return true;
}

/// Source pixels along the sides of the target pixel at a place.
void measure(const PixelMap& map, const Place& at, Overlay& overlay) {
    const auto ends = mapped(map, {{at.column - 0.5, at.row},
                                   {at.column + 0.5, at.row},
                                   {at.column, at.row - 0.5},
                                   {at.column, at.row + 0.5}});
    const auto turned = [&map](double d) {
        return map.turn() ? d - *map.turn() * std::round(d / *map.turn()) : d;
    };
    const double wide = std::hypot(turned(ends[1].column - ends[0].column),
                                   turned(ends[3].column - ends[2].column));
    const double high = std::hypot(ends[1].row - ends[0].row, ends[3].row - ends[2].row);
    if (std::isfinite(wide)) overlay.columns_per_pixel = wide;
    if (std::isfinite(high)) overlay.rows_per_pixel = high;
}

/// The found place nearest to the mean of all of them.
Place middle_of(const std::vector<Place>& places) {
    Place mean{0, 0};
    for (const auto& place : places) {
        mean.column += place.column / static_cast<double>(places.size());
        mean.row += place.row / static_cast<double>(places.size());
    }
    return *std::min_element(places.begin(), places.end(), [&mean](const Place& a, const Place& b) {
        return std::hypot(a.column - mean.column, a.row - mean.row) <
               std::hypot(b.column - mean.column, b.row - mean.row);
    });
}

}  // namespace

Overlay overlay_of(const PixelMap& map) {
    Overlay overlay;
    constexpr int steps = 64;
    const auto places = middles(map.target(), steps);
    const auto sources = mapped(map, places);
    std::vector<Place> covered;
    for (std::size_t i = 0; i < places.size(); ++i)
        if (on(map.source(), sources[i])) covered.push_back(places[i]);
    if (!covered.empty()) {
        overlay.coverage = static_cast<double>(covered.size()) / (steps * steps);
        measure(map, middle_of(covered), overlay);
    } else {
        // A raster smaller than the sample's mesh: look from its side.
        const PixelMap back(map.source(), map.target());
        std::vector<Place> hits;
        for (const auto& place : mapped(back, middles(map.source(), steps)))
            if (on(map.target(), place)) hits.push_back(place);
        if (hits.empty()) return overlay;
        measure(map, middle_of(hits), overlay);
        const double pixels = static_cast<double>(map.source().width) * map.source().height /
                              (overlay.columns_per_pixel * overlay.rows_per_pixel);
        overlay.coverage = pixels * static_cast<double>(hits.size()) / (steps * steps) /
                           (static_cast<double>(map.target().width) * map.target().height);
    }
    overlay.copied = find_shift(map, overlay);
    return overlay;
}

}  // namespace sunbudget
