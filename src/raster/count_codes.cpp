#include <gdal_priv.h>

#include <algorithm>
#include <array>
#include <cmath>
#include <optional>
#include <unordered_map>

#include "band_reader.hpp"
#include "pixel_map.hpp"
#include "sunbudget/base/parallel.hpp"
#include "sunbudget/raster/source.hpp"

namespace sunbudget {
namespace {

/// Counts of one thread: a table for small codes, a map for the rest.
class Tally {
  public:
    void add(std::span<const std::int32_t> codes) {
        for (const auto code : codes) {
            if (code >= 0 && code < table_size)
                ++table_[static_cast<std::size_t>(code)];
            else
                ++others_[code];
        }
    }
    /// Four tables in turn, so that a run of one code does not wait for its own last count.
    void add(std::span<const std::uint8_t> bytes) {
        std::size_t i = 0;
        for (; i + 4 <= bytes.size(); i += 4)
            for (std::size_t k = 0; k < 4; ++k) ++byte_tables_[k][bytes[i + k]];
        for (; i < bytes.size(); ++i) ++byte_tables_[0][bytes[i]];
    }
    void add_to(CodeCounts& all, std::optional<double> nodata) const {
        for (std::size_t code = 0; code < 256; ++code) {
            std::uint64_t count = 0;
            for (const auto& table : byte_tables_) count += table[code];
            if (count == 0) continue;
            const bool none = nodata && *nodata == static_cast<double>(code);
            (none ? all.without_code : all.counts[static_cast<std::int32_t>(code)]) += count;
        }
        for (std::size_t code = 0; code < table_.size(); ++code)
            if (table_[code] > 0) all.counts[static_cast<std::int32_t>(code)] += table_[code];
        for (const auto& [code, count] : others_)
            (code == no_code ? all.without_code : all.counts[code]) += count;
    }

  private:
    static constexpr std::int32_t table_size = 65536;
    std::array<std::array<std::uint64_t, 256>, 4> byte_tables_{};
    std::vector<std::uint64_t> table_ = std::vector<std::uint64_t>(table_size);
    std::unordered_map<std::int32_t, std::uint64_t> others_;
};

/// The source's columns and rows under the target's outline, by 256 places along each side and
/// across the middle.
Window covered_by_target(const PixelMap& map) {
    const auto& target = map.target();
    constexpr int steps = 256;
    std::vector<double> x, y;
    const auto add = [&](double u, double v) {
        x.push_back(u * target.width);
        y.push_back(v * target.height);
    };
    for (int i = 0; i <= steps; ++i) {
        const double u = static_cast<double>(i) / steps;
        for (const double v : {0.0, 0.25, 0.5, 0.75, 1.0}) {
            add(u, v);
            add(v, u);
        }
    }
    map.exact(x, y);
    const auto& source = map.source();
    double left = source.width, right = 0, top = source.height, bottom = 0;
    for (std::size_t i = 0; i < x.size(); ++i) {
        if (std::isnan(x[i])) continue;
        left = std::min(left, x[i]);
        right = std::max(right, x[i]);
        top = std::min(top, y[i]);
        bottom = std::max(bottom, y[i]);
    }
    const auto first = [](double place) {
        return static_cast<long>(std::floor(std::max(0.0, place) + 1e-6));
    };
    const auto last = [](double place, int size) {
        return static_cast<long>(std::ceil(std::min<double>(size, place) - 1e-6));
    };
    const long column = first(left), row = first(top);
    return {column, row, static_cast<int>(std::max(0L, last(right, source.width) - column)),
            static_cast<int>(std::max(0L, last(bottom, source.height) - row))};
}

/// Windows of whole stored blocks, about a million pixels each, cut to `area`. Flipped rasters are
/// cut along the same lines; their blocks are merely met in another order.
std::vector<Window> block_windows(const RasterInfo& info, const Window& area) {
    constexpr int wanted_side_px = 1024;
    constexpr int wanted_px = wanted_side_px * wanted_side_px;
    const int width = info.block_width * std::max(1, wanted_side_px / info.block_width);
    const double blocks_down = static_cast<double>(wanted_px) / width / info.block_height;
    const int height = info.block_height * std::max(1, static_cast<int>(blocks_down));
    std::vector<Window> windows;
    const long end_row = area.row + area.height, end_column = area.column + area.width;
    for (long row = area.row / height * height; row < end_row; row += height)
        for (long column = area.column / width * width; column < end_column; column += width) {
            const long left = std::max(column, area.column), top = std::max(row, area.row);
            windows.push_back({left, top,
                               static_cast<int>(std::min(column + width, end_column) - left),
                               static_cast<int>(std::min(row + height, end_row) - top)});
        }
    return windows;
}

CodeCounts count_in(const Source& source, int threads, const std::vector<Window>& windows) {
    struct Worker {
        std::optional<BandReader> band;
        Plane<std::int32_t> codes;
        Tally tally;
    };
    std::vector<Worker> workers(static_cast<std::size_t>(std::max(1, threads)));
    parallel_for(windows.size(), threads, [&](std::size_t index, int thread) {
        auto& worker = workers[static_cast<std::size_t>(thread)];
        if (!worker.band) worker.band.emplace(source.info(), source.nodata(), Scaling{}, 0);
        if (worker.band->holds_bytes()) return worker.tally.add(worker.band->bytes(windows[index]));
        worker.band->read_codes(windows[index], worker.codes);
        for (int r = 0; r < worker.codes.height(); ++r) worker.tally.add(worker.codes.row(r));
    });
    CodeCounts all;
    for (const auto& worker : workers) worker.tally.add_to(all, source.nodata());
    return all;
}

std::vector<Window> windows_of(const Source& source) {
    const PixelMap map(source.target(), source.info().grid);
    return block_windows(source.info(), covered_by_target(map));
}

}  // namespace

std::uint64_t CodeCounts::total() const noexcept {
    std::uint64_t sum = without_code;
    for (const auto& [code, count] : counts) sum += count;
    return sum;
}

CodeCounts count_codes(const Source& source, int threads) {
    return count_in(source, threads, windows_of(source));
}

CodeCounts sample_codes(const Source& source, int threads, int blocks) {
    const auto all = windows_of(source);
    if (all.size() <= static_cast<std::size_t>(blocks)) return count_in(source, threads, all);
    std::vector<Window> some;
    for (std::size_t i = 0; i < static_cast<std::size_t>(blocks); ++i)
        some.push_back(all[i * all.size() / static_cast<std::size_t>(blocks)]);
    return count_in(source, threads, some);
}

}  // namespace sunbudget
