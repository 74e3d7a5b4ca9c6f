#include "sunbudget/engine/estimate.hpp"

#include <algorithm>
#include <chrono>
#include <cmath>
#include <limits>
#include <numeric>
#include <optional>

#include "scratch_folder.hpp"
#include "sunbudget/base/parallel.hpp"
#include "sunbudget/model/flow.hpp"
#include "sunbudget/model/surface.hpp"
#include "sunbudget/raster/pyramid.hpp"
#include "sunbudget/raster/statistics.hpp"
#include "sunbudget/raster/tile_codec.hpp"

namespace sunbudget {

namespace {

using Clock = std::chrono::steady_clock;

double seconds_since(Clock::time_point start) {
    return std::chrono::duration<double>(Clock::now() - start).count();
}

/// Half as many columns and rows: the mean of the valid pixels, or the upper left one of flags.
Plane<float> folded(const Plane<float>& plane, float quantum) {
    Plane<float> half(std::max(1, plane.width() / 2), std::max(1, plane.height() / 2));
    for (int r = 0; r < half.height(); ++r) {
        const auto upper = plane.row(2 * r),
                   lower = plane.row(std::min(2 * r + 1, plane.height() - 1));
        for (std::size_t i = 0; i < half.row(r).size(); ++i) {
            float sum = 0, valid = 0;
            for (const float value : {upper[2 * i], upper[std::min(2 * i + 1, upper.size() - 1)],
                                      lower[2 * i], lower[std::min(2 * i + 1, lower.size() - 1)]})
                if (!std::isnan(value)) {
                    sum += value;
                    ++valid;
                }
            half.row(r)[i] = sum / valid;
        }
        round_row(half.row(r), quantum);
    }
    return half;
}

Plane<std::uint16_t> folded(const Plane<std::uint16_t>& plane, float) {
    Plane<std::uint16_t> half(std::max(1, plane.width() / 2), std::max(1, plane.height() / 2));
    for (int r = 0; r < half.height(); ++r)
        for (std::size_t i = 0; i < half.row(r).size(); ++i)
            half.row(r)[i] = plane.row(2 * r)[2 * i];
    return half;
}

/// Encodes what a window gives as the run would, overviews among it, and counts the bytes. A window's
/// own overviews are smaller than a tile, which costs a little more than tiles put together from many.
class CountingSink : public Sink {
  public:
    explicit CountingSink(const Run& run) : run_(run) {}
    void put(std::size_t layer, std::size_t, const Window&, const Plane<float>& plane) override {
        for (int r = 0; r < plane.height(); ++r) {
            BlockStatistics block;
            add_row(block, plane.row(r));
        }
        count(layer, plane, std::numeric_limits<float>::quiet_NaN());
    }
    void put(std::size_t layer, std::size_t, const Window&,
             const Plane<std::uint16_t>& plane) override {
        count(layer, plane, std::uint16_t{0});
    }

    std::uint64_t bytes = 0;

  private:
    template <typename T>
    void count(std::size_t layer, const Plane<T>& plane, T nothing) {
        encode(plane, nothing, run_.tile);
        const auto& file = run_.layers[layer].file;
        Plane<T> half;
        const auto levels = layout_of(file).levels.size();
        for (std::size_t level = 1;
             level < levels && (level == 1 || half.width() * half.height() > 1); ++level) {
            half = folded(level == 1 ? plane : half, file.quantum);
            // The smallest square of sixteenths that holds it: what lies around it costs nothing.
            encode(half, nothing,
                   std::min(run_.tile, (std::max(half.width(), half.height()) + 15) / 16 * 16));
        }
    }

    template <typename T>
    void encode(const Plane<T>& plane, T nothing, int side) {
        for (int row = 0; row < plane.height(); row += side)
            for (int column = 0; column < plane.width(); column += side) {
                Plane<T> square(side, side, nothing);
                for (int r = 0; r < std::min(side, plane.height() - row); ++r)
                    std::copy_n(plane.row(row + r).data() + column,
                                std::min(side, plane.width() - column), square.row(r).data());
                bytes += encode_tile(square).size();
            }
    }
    const Run& run_;
};

/// The side of the windows a run works through.
int unit_px(const Run& run) {
    return std::max(run.tile, block_px);
}

long windows_of(const Run& run) {
    const long unit = unit_px(run);
    return ((run.grid.width + unit - 1) / unit) * ((run.grid.height + unit - 1) / unit);
}

/// At most `count` of the grid's windows, evenly spread.
std::vector<Window> spread(const Run& run, int count) {
    const int unit = unit_px(run);
    const int columns = (run.grid.width + unit - 1) / unit;
    const long all = windows_of(run);
    const long wanted = std::min<long>(count, all);
    std::vector<Window> windows;
    for (long i = 0; i < wanted; ++i) {
        // The golden ratio keeps the sample from lining up in one column.
        const long n = (all * (2 * i + 1) / (2 * wanted) / columns) * columns +
                       static_cast<long>(static_cast<double>(columns) *
                                         std::fmod(0.6180339887 * static_cast<double>(i + 1), 1.0));
        const int column = static_cast<int>(n % columns) * unit,
                  row = static_cast<int>(n / columns) * unit;
        windows.push_back({column, row, std::min(unit, run.grid.width - column),
                           std::min(unit, run.grid.height - row)});
    }
    return windows;
}

/// What the sample took and gave.
struct Sampled {
    double shared_s = 0;  ///< what is made once for the whole grid
    double read_s = 0;    ///< decoding the surface's inputs for the first time
    double first_s = 0;   ///< computing and encoding, what windows share included
    double again_s = 0;   ///< the last few windows with everything at hand
    double late_s = 0;    ///< the same windows for the first time
    double late_pixels = 0;
    double pixels = 0;
    std::uint64_t bytes = 0;
};

/// Runs `work` on every window and gives the seconds each took, all threads busy.
template <typename Work>
std::vector<double> timed(const std::vector<Window>& windows, int threads, const Work& work) {
    std::vector<double> seconds(windows.size());
    parallel_for(windows.size(), threads, [&](std::size_t i, int thread) {
        const auto start = Clock::now();
        work(i, thread);
        seconds[i] = seconds_since(start);
    });
    return seconds;
}

double pixels_of(const Window& window) {
    return static_cast<double>(window.width) * window.height;
}

double sum_of(const std::vector<double>& values) {
    return std::accumulate(values.begin(), values.end(), 0.0);
}

Sampled sample_of(const Run& run, const EngineOptions& options,
                  const std::vector<Window>& windows) {
    Sampled sampled;
    const auto threads = static_cast<std::size_t>(options.threads);
    std::vector<std::optional<SurfaceReader>> readers(threads);
    std::vector<Plane<float>> albedo(threads);
    std::vector<Plane<std::uint16_t>> flags(threads);
    // One pixel each: files are opened once a thread, however many windows there are.
    for (std::size_t t = 0; t < threads; ++t)
        readers[t].emplace(run).read({windows.front().column, windows.front().row, 1, 1}, albedo[t],
                                     flags[t]);
    const auto read = timed(windows, options.threads, [&](std::size_t i, int thread) {
        readers[static_cast<std::size_t>(thread)]->read(windows[i],
                                                        albedo[static_cast<std::size_t>(thread)],
                                                        flags[static_cast<std::size_t>(thread)]);
    });
    sampled.read_s = sum_of(read);
    const auto start = Clock::now();
    const ScratchFolder scratch;
    const SharedLight light(run, options.threads, scratch.path);
    sampled.shared_s = seconds_since(start);
    std::vector<std::optional<Flow>> flows(threads);
    std::vector<std::uint64_t> bytes(windows.size());
    const auto compute = [&](const Window& window, int thread) {
        auto& flow = flows[static_cast<std::size_t>(thread)];
        if (!flow) flow.emplace(run, light, thread);
        CountingSink sink(run);
        flow->compute(window, sink);
        return sink.bytes;
    };
    // The first pass makes what windows share, the second shows what a pixel costs once that is there.
    const auto first = timed(windows, options.threads, [&](std::size_t i, int thread) {
        bytes[i] = compute(windows[i], thread);
    });
    sampled.first_s = sum_of(first);
    sampled.bytes = std::accumulate(bytes.begin(), bytes.end(), std::uint64_t{0});
    for (const auto& window : windows) sampled.pixels += pixels_of(window);
    constexpr std::size_t repeated = 4;
    const auto late = windows.size() - std::min(repeated, windows.size());
    sampled.again_s = sum_of(timed(
        std::vector(windows.begin() + static_cast<long>(late), windows.end()), options.threads,
        [&](std::size_t i, int thread) { (void)compute(windows[late + i], thread); }));
    for (auto i = late; i < windows.size(); ++i) {
        sampled.late_s += first[i];
        sampled.late_pixels += pixels_of(windows[i]);
    }
    return sampled;
}

/// How often a run decodes the surface's inputs before it computes: a cover's classes are counted, and
/// what was decoded then is still at hand where it fits GDAL's cache.
double decoding_passes(const Run& run, const EngineOptions& options) {
    const auto* cover = std::get_if<CoverSurface>(&run.surface);
    if (cover == nullptr) return 1;
    return decoded_bytes(cover->codes) <= raster_cache_bytes(options.memory_bytes) ? 1 : 2;
}

/// A finished file beside its tiles: directories, tile tables and metadata.
std::uint64_t header_bytes(const OutputLayer& layer) {
    constexpr std::uint64_t directory = 1500, per_tile = 12;
    std::uint64_t text = 0;
    for (const auto& [key, value] : layer.file.metadata) text += key.size() + value.size() + 32;
    const auto layout = layout_of(layer.file);
    return text + directory * layout.levels.size() + per_tile * layout.tile_count();
}

}  // namespace

Estimate estimate(const Run& run, const EngineOptions& options) {
    // Shade and sky cost a hundred times what a flat pixel does.
    const int wanted = run.terrain ? 16 : 48;
    const auto sample = spread(run, wanted);
    const auto sampled = sample_of(run, options, sample);
    const double all_pixels = static_cast<double>(run.grid.width) * run.grid.height;
    const double scale = all_pixels / std::max(1.0, sampled.pixels);
    Estimate result;
    result.windows = static_cast<int>(sample.size());
    result.output_bytes = static_cast<std::uint64_t>(static_cast<double>(sampled.bytes) * scale);
    // A pixel costs what it does when repeated; what windows share is made once in the sample, and by the
    // others as often as by the sample's last ones.
    const double late_pixels = std::max(1.0, sampled.late_pixels);
    const double pixel_s = sampled.again_s / late_pixels,
                 late_share_s = std::max(0.0, sampled.late_s / late_pixels - pixel_s);
    const double shared_s = std::max(0.0, sampled.first_s - pixel_s * sampled.pixels) +
                            late_share_s * (all_pixels - sampled.pixels);
    const double core_s =
        pixel_s * all_pixels + sampled.read_s * scale * decoding_passes(run, options) + shared_s;
    const double busy = static_cast<double>(std::min<long>(options.threads, windows_of(run)));
    // Finishing copies the encoded tiles, makes the file safe on the disk and reads it back.
    constexpr double finishing_bytes_per_s = 150e6;
    result.seconds = sampled.shared_s + core_s / busy +
                     static_cast<double>(result.output_bytes) / finishing_bytes_per_s;
    result.scratch_bytes = result.output_bytes;
    for (const auto& layer : run.layers) result.output_bytes += header_bytes(layer);
    result.memory_bytes = memory_needed(run, options);
    return result;
}

}  // namespace sunbudget
