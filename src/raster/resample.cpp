#include "resample.hpp"

#include <algorithm>
#include <cmath>
#include <limits>

#include "sunbudget/raster/source.hpp"

namespace sunbudget {
namespace {

/// Most source pixels held at once; a single target pixel may still need more.
constexpr double most_source_pixels = 1 << 19;

/// Middles this near to a border between source pixels lie on it, and belong to the pixel after it:
/// else rounding noise would choose.
constexpr double border_px = 1e-6;

long below(double place) {
    return static_cast<long>(std::floor(place + border_px));
}

/// A rectangle of the window asked for, in its own pixels.
struct Part {
    int column, row, width, height;
};

/// The columns (or rows) under a box, first to last inclusive.
struct Span {
    long first, last;
};
Span under(double middle, double extent) {
    return {below(middle - 0.5 * extent),
            static_cast<long>(std::ceil(middle + 0.5 * extent - border_px)) - 1};
}

/// What a part of the window needs of the source.
struct Need {
    Window window;
    /// Columns left of this one are read one turn further right; the part lies across the back of
    /// the globe.
    long turned_before = std::numeric_limits<long>::min();
    bool empty = true;

    [[nodiscard]] double pixels() const {
        return static_cast<double>(window.width) * static_cast<double>(window.height);
    }
};

class Pieces {
  public:
    Pieces(const PixelMap& map, const Window& window)
        : map_(map), source_(map.source()), placed_(map.place(window)) {}

    /// Calls work(part, need) for parts that together make the window.
    template <typename Work>
    void each(const Part& part, const Work& work) const {
        const auto need = need_of(part);
        const bool one_pixel = part.width == 1 && part.height == 1;
        if (need.empty || one_pixel || need.pixels() <= most_source_pixels) return work(part, need);
        const bool across = part.width >= part.height;
        Part first = part, second = part;
        (across ? first.width : first.height) /= 2;
        if (across) {
            second.column += first.width;
            second.width -= first.width;
        } else {
            second.row += first.height;
            second.height -= first.height;
        }
        each(first, work);
        each(second, work);
    }

    /// Whether a target pixel's middle lies on the source.
    [[nodiscard]] bool on_source(int c, int r) const {
        const double x = placed_.column.at(c, r), y = placed_.row.at(c, r);
        if (std::isnan(x) || std::isnan(y)) return false;
        const long row = below(y);
        if (row < 0 || row >= source_.height) return false;
        long column = below(x);
        if (map_.period() > 0) column = (column % map_.period() + map_.period()) % map_.period();
        return column >= 0 && column < source_.width;
    }
    [[nodiscard]] Span columns(int c, int r) const {
        return under(placed_.column.at(c, r), static_cast<double>(placed_.columns_wide.at(c, r)));
    }
    [[nodiscard]] Span rows(int c, int r) const {
        return under(placed_.row.at(c, r), static_cast<double>(placed_.rows_high.at(c, r)));
    }
    [[nodiscard]] const PlacedWindow& placed() const { return placed_; }
    [[nodiscard]] const PixelMap& map() const { return map_; }

  private:
    [[nodiscard]] Need need_of(const Part& part) const;

    const PixelMap& map_;
    const Grid& source_;
    PlacedWindow placed_;
};

/// Least and greatest of many.
struct Range {
    long first = std::numeric_limits<long>::max();
    long last = std::numeric_limits<long>::min();
    void add(const Span& span, long shift) {
        first = std::min(first, span.first + shift);
        last = std::max(last, span.last + shift);
    }
    [[nodiscard]] long size() const { return last - first + 1; }
};

Need Pieces::need_of(const Part& part) const {
    Range rows, plain, turned;
    const long period = map_.period();
    const long middle = source_.width / 2;
    for (int r = part.row; r < part.row + part.height; ++r)
        for (int c = part.column; c < part.column + part.width; ++c) {
            if (!on_source(c, r)) continue;
            const auto span = columns(c, r);
            rows.add(this->rows(c, r), 0);
            plain.add(span, 0);
            turned.add(span, span.first < middle ? period : 0);
        }
    Need need;
    if (rows.first > rows.last) return need;
    need.empty = false;
    Range columns = plain;
    if (period > 0 && turned.size() < plain.size()) {
        columns = turned;
        need.turned_before = middle;
    }
    if (period == 0) {
        columns.first = std::max(0L, columns.first);
        columns.last = std::min<long>(source_.width - 1, columns.last);
    }
    rows.first = std::max(0L, rows.first);
    rows.last = std::min<long>(source_.height - 1, rows.last);
    need.window = {columns.first, rows.first, static_cast<int>(columns.size()),
                   static_cast<int>(rows.size())};
    return need;
}

/// A box's edges along one axis, put onto borders they all but touch.
struct Edges {
    double from, to;
    Edges(double middle, double extent)
        : from(settled(middle - 0.5 * extent)), to(settled(middle + 0.5 * extent)) {}
    static double settled(double place) {
        const double whole = std::round(place);
        return std::abs(place - whole) < border_px ? whole : place;
    }
    /// Length inside the pixel [i, i + 1].
    [[nodiscard]] double inside(long i) const {
        const auto left = static_cast<double>(i);
        return std::min(to, left + 1) - std::max(from, left);
    }
    [[nodiscard]] double within(double first, double last) const {
        return std::max(0.0, std::min(to, last) - std::max(from, first));
    }
};

/// The mean of one target pixel. Sums run row by row over the pixel's own box, so they do not depend
/// on which window was loaded.
float mean_of(const Pieces& pieces, int c, int r, const Need& need, const Plane<float>& loaded) {
    const auto& placed = pieces.placed();
    const auto& source = pieces.map().source();
    const Edges across(placed.column.at(c, r), static_cast<double>(placed.columns_wide.at(c, r)));
    const Edges down(placed.row.at(c, r), static_cast<double>(placed.rows_high.at(c, r)));
    auto columns = pieces.columns(c, r);
    auto rows = pieces.rows(c, r);
    const long turn = columns.first < need.turned_before ? pieces.map().period() : 0;
    if (pieces.map().period() == 0) {
        columns.first = std::max(0L, columns.first);
        columns.last = std::min<long>(source.width - 1, columns.last);
    }
    rows.first = std::max(0L, rows.first);
    rows.last = std::min<long>(source.height - 1, rows.last);
    double sum = 0, weight = 0;
    for (long row = rows.first; row <= rows.last; ++row) {
        const double high = down.inside(row);
        const auto values = loaded.row(static_cast<int>(row - need.window.row));
        for (long column = columns.first; column <= columns.last; ++column) {
            const float value =
                values[static_cast<std::size_t>(column + turn - need.window.column)];
            if (std::isnan(value)) continue;
            const double share = high * across.inside(column);
            sum += share * static_cast<double>(value);
            weight += share;
        }
    }
    const bool all_round = pieces.map().period() == source.width;
    const double on_source = down.within(0, source.height) *
                             (all_round ? across.to - across.from : across.within(0, source.width));
    // A box that is exactly half covered counts, whichever way its sum was rounded.
    if (weight <= 0 || weight < (0.5 - border_px) * on_source)
        return std::numeric_limits<float>::quiet_NaN();
    return static_cast<float>(sum / weight);
}

template <typename Value>
void shape(const Window& window, Plane<Value>& out, Value none) {
    if (out.width() != window.width || out.height() != window.height)
        out = Plane<Value>(window.width, window.height);
    out.fill(none);
}

}  // namespace

void take_nearest(const PixelMap& map, const Window& window, const LoadWindow<std::int32_t>& load,
                  Plane<std::int32_t>& out) {
    shape(window, out, no_code);
    const Pieces pieces(map, window);
    Plane<std::int32_t> loaded;
    pieces.each({0, 0, window.width, window.height}, [&](const Part& part, const Need& need) {
        if (need.empty) return;
        load(need.window, loaded);
        for (int r = part.row; r < part.row + part.height; ++r)
            for (int c = part.column; c < part.column + part.width; ++c) {
                if (!pieces.on_source(c, r)) continue;
                const long turn =
                    pieces.columns(c, r).first < need.turned_before ? map.period() : 0;
                const long column = below(pieces.placed().column.at(c, r)) + turn;
                const long row = below(pieces.placed().row.at(c, r));
                out.at(c, r) = loaded.at(static_cast<int>(column - need.window.column),
                                         static_cast<int>(row - need.window.row));
            }
    });
}

void take_mean(const PixelMap& map, const Window& window, const LoadWindow<float>& load,
               Plane<float>& out) {
    shape(window, out, std::numeric_limits<float>::quiet_NaN());
    const Pieces pieces(map, window);
    Plane<float> loaded;
    pieces.each({0, 0, window.width, window.height}, [&](const Part& part, const Need& need) {
        if (need.empty) return;
        load(need.window, loaded);
        for (int r = part.row; r < part.row + part.height; ++r)
            for (int c = part.column; c < part.column + part.width; ++c)
                if (pieces.on_source(c, r)) out.at(c, r) = mean_of(pieces, c, r, need, loaded);
    });
}

}  // namespace sunbudget
