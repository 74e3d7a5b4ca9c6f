#include "sunbudget/engine/estimate.hpp"

#include <algorithm>
#include <atomic>
#include <chrono>
#include <cmath>
#include <cstdlib>
#include <filesystem>
#include <mutex>
#include <optional>

#include "sunbudget/base/error.hpp"
#include "sunbudget/base/parallel.hpp"
#include "sunbudget/model/flow.hpp"
#include "sunbudget/raster/pyramid.hpp"
#include "sunbudget/raster/statistics.hpp"
#include "sunbudget/raster/tile_codec.hpp"

namespace sunbudget {

namespace {

using Clock = std::chrono::steady_clock;

double seconds_since(Clock::time_point start) { return std::chrono::duration<double>(Clock::now() - start).count(); }

/// Encodes what a window gives, as the run would, and counts the bytes.
class CountingSink : public Sink {
  public:
    explicit CountingSink(int tile) : tile_(tile) {}
    void put(std::size_t, std::size_t, const Window&, const Plane<float>& plane) override {
        for (int r = 0; r < plane.height(); ++r) {
            BlockStatistics block;
            add_row(block, plane.row(r));
        }
        encode(plane);
    }
    void put(std::size_t, std::size_t, const Window&, const Plane<std::uint16_t>& plane) override { encode(plane); }

    std::uint64_t bytes = 0;

  private:
    template <typename T>
    void encode(const Plane<T>& plane) {
        for (int row = 0; row < plane.height(); row += tile_)
            for (int column = 0; column < plane.width(); column += tile_) {
                Plane<T> square(tile_, tile_);
                for (int r = 0; r < std::min(tile_, plane.height() - row); ++r)
                    std::copy_n(plane.row(row + r).data() + column, std::min(tile_, plane.width() - column), square.row(r).data());
                bytes += encode_tile(square).size();
            }
    }
    int tile_;
};

/// A folder for the coarse levels of the elevation, gone with the object.
struct ScratchFolder {
    std::filesystem::path path;
    ScratchFolder() {
        std::string pattern = (std::filesystem::temp_directory_path() / "sunbudget-XXXXXX").string();
        if (mkdtemp(pattern.data()) == nullptr)
            throw Error(Cause::output, "cannot make a folder for scratch files", pattern, "point TMPDIR to a place with room");
        path = pattern;
    }
    ~ScratchFolder() {
        std::error_code ignored;
        std::filesystem::remove_all(path, ignored);
    }
};

/// At most `count` of the grid's windows, evenly spread.
std::vector<Window> spread(const Run& run, int unit, int count) {
    const int columns = (run.grid.width + unit - 1) / unit, rows = (run.grid.height + unit - 1) / unit;
    const long all = static_cast<long>(columns) * rows;
    const long wanted = std::min<long>(count, all);
    std::vector<Window> windows;
    for (long i = 0; i < wanted; ++i) {
        // The golden ratio keeps the sample from lining up in one column.
        const long n = (all * (2 * i + 1) / (2 * wanted) / columns) * columns +
                       static_cast<long>(static_cast<double>(columns) * std::fmod(0.6180339887 * static_cast<double>(i + 1), 1.0));
        const int column = static_cast<int>(n % columns) * unit, row = static_cast<int>(n / columns) * unit;
        windows.push_back({column, row, std::min(unit, run.grid.width - column), std::min(unit, run.grid.height - row)});
    }
    return windows;
}

}  // namespace

Estimate estimate(const Run& run, const EngineOptions& options, int windows) {
    const int unit = std::max(run.tile, block_px);
    const auto sample = spread(run, unit, windows);
    const ScratchFolder scratch;
    const SharedLight light(run, options.threads, scratch.path);
    std::vector<std::optional<Flow>> flows(static_cast<std::size_t>(options.threads));
    std::mutex mutex;
    double first_s = 0, again_s = 0, pixels = 0;
    std::uint64_t bytes = 0;
    // The first pass makes the light's nodes, the second shows what a pixel costs once they are there.
    for (const bool again : {false, true})
        parallel_for(sample.size(), options.threads, [&](std::size_t i, int thread) {
            auto& flow = flows[static_cast<std::size_t>(thread)];
            if (!flow) flow.emplace(run, light, thread);
            CountingSink sink(run.tile);
            const auto start = Clock::now();
            flow->compute(sample[i], sink);
            const double seconds = seconds_since(start);
            const std::lock_guard hold(mutex);
            (again ? again_s : first_s) += seconds;
            if (!again) return;
            bytes += sink.bytes;
            pixels += static_cast<double>(sample[i].width) * sample[i].height;
        });
    const double all_pixels = static_cast<double>(run.grid.width) * run.grid.height;
    const double scale = all_pixels / std::max(1.0, pixels);
    constexpr double with_overviews = 4.0 / 3.0;
    Estimate result;
    result.windows = static_cast<int>(sample.size());
    const double core_s = again_s * scale + std::max(0.0, first_s - again_s);
    result.seconds = core_s / options.threads;
    result.output_bytes = static_cast<std::uint64_t>(static_cast<double>(bytes) * scale * (run.overviews ? with_overviews : 1.0));
    result.scratch_bytes = result.output_bytes;
    result.memory_bytes = memory_needed(run, options);
    return result;
}

}  // namespace sunbudget
