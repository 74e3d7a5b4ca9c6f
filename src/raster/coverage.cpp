#include "sunbudget/raster/coverage.hpp"

#include <algorithm>
#include <cmath>

namespace sunbudget {

namespace {

/// A piece of an edge inside one row: from x0 to x1 while it goes down by `drop` (negative: up).
/// Adds to `cells` the changes of the area to its right from one cell to the next.
void add_piece(double x0, double x1, double drop, std::span<double> cells) {
    const auto width = static_cast<double>(cells.size());
    if (x0 > x1) std::swap(x0, x1);
    const double slant = x1 - x0;
    double from = x0;
    if (from < 0) {  // what lies left of the window covers all of its row
        const double end = std::min(0.0, x1);
        cells[0] += slant > 0 ? drop * (end - from) / slant : drop;
        if (x1 <= 0) return;
        from = 0;
    }
    do {
        if (from >= width) return;
        const double column = std::floor(from);
        const double to = std::min(x1, column + 1);
        const double part = slant > 0 ? drop * (to - from) / slant : drop;
        const double right_of_it = column + 1 - (from + to) / 2;
        const auto cell = static_cast<std::size_t>(column);
        cells[cell] += part * right_of_it;
        if (cell + 1 < cells.size()) cells[cell + 1] += part * (1 - right_of_it);
        from = to;
    } while (from < x1);
}

/// Places are counted from the window's corner.
void add_edge(PixelPlace a, PixelPlace b, Plane<double>& cells) {
    const double sense = b.row > a.row ? 1 : -1;
    if (sense < 0) std::swap(a, b);
    const double top = std::max(0.0, a.row), bottom = std::min<double>(cells.height(), b.row);
    const double per_row = (b.column - a.column) / (b.row - a.row);
    // Ends are taken as they are: neighbours that share an edge get the same numbers.
    const auto column_at = [&](double row) {
        return row == a.row   ? a.column
               : row == b.row ? b.column
                              : a.column + (row - a.row) * per_row;
    };
    for (double row = std::floor(top); row < bottom; ++row) {
        const double from = std::max(top, row), to = std::min(bottom, row + 1);
        add_piece(column_at(from), column_at(to), sense * (to - from),
                  cells.row(static_cast<int>(row)));
    }
}

}  // namespace

double signed_area(std::span<const PixelPlace> ring) noexcept {
    if (ring.empty()) return 0;
    // Counted from the first place, so that small rings far from the corner keep their digits.
    const auto origin = ring.front();
    double twice = 0;
    for (std::size_t i = 0; i < ring.size(); ++i) {
        const auto &a = ring[i], &b = ring[i + 1 < ring.size() ? i + 1 : 0];
        twice += (b.column - origin.column) * (a.row - origin.row) -
                 (a.column - origin.column) * (b.row - origin.row);
    }
    return twice / 2;
}

void cover(const Rings& rings, const Window& window, Plane<double>& shares) {
    if (shares.width() != window.width || shares.height() != window.height)
        shares = Plane<double>(window.width, window.height);
    else
        shares.fill(0);
    const auto inside = [&](const PixelPlace& place) {
        return PixelPlace{place.column - static_cast<double>(window.column),
                          place.row - static_cast<double>(window.row)};
    };
    for (const auto& ring : rings)
        for (std::size_t i = 0; i < ring.size(); ++i) {
            const auto a = inside(ring[i]), b = inside(ring[i + 1 < ring.size() ? i + 1 : 0]);
            const bool beside = std::max(a.row, b.row) <= 0 ||
                                std::min(a.row, b.row) >= window.height ||
                                std::min(a.column, b.column) >= window.width;
            if (a.row != b.row && !beside) add_edge(a, b, shares);
        }
    for (int r = 0; r < window.height; ++r) {
        double share = 0;
        for (auto& cell : shares.row(r)) {
            share += cell;
            cell = share < 1e-12 ? 0 : std::min(share, 1.0);
        }
    }
}

}  // namespace sunbudget
