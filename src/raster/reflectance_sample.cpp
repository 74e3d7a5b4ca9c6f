#include <algorithm>
#include <cassert>
#include <cmath>

#include "sunbudget/base/parallel.hpp"
#include "sunbudget/raster/plausibility.hpp"

namespace sunbudget {
namespace {

constexpr int block_px = 256;
constexpr double most_pixels = 1 << 18;

std::vector<Window> blocks_of(const Grid& grid) {
    std::vector<Window> blocks;
    for (int row = 0; row < grid.height; row += block_px)
        for (int column = 0; column < grid.width; column += block_px)
            blocks.push_back({column, row, std::min(block_px, grid.width - column),
                              std::min(block_px, grid.height - row)});
    return blocks;
}

/// At most `count` of them, spread evenly from the first on.
std::vector<Window> some_of(const std::vector<Window>& all, int count) {
    const auto wanted = static_cast<std::size_t>(std::max(1, count));
    if (all.size() <= wanted) return all;
    std::vector<Window> some;
    for (std::size_t i = 0; i < wanted; ++i) some.push_back(all[i * all.size() / wanted]);
    return some;
}

/// Every `step`-th column of every `step`-th row is kept.
int step_for(const std::vector<Window>& blocks) {
    double pixels = 0;
    for (const auto& block : blocks) pixels += static_cast<double>(block.width) * block.height;
    return std::max(1, static_cast<int>(std::ceil(std::sqrt(pixels / most_pixels))));
}

/// One thread's readers and planes.
struct Worker {
    std::vector<Reader> readers;
    std::vector<Plane<float>> planes;
};

/// One block's pixels, band by band.
struct BlockSample {
    std::vector<std::vector<float>> bands;
    std::uint64_t looked_at = 0;
};

void keep_pixels(const std::vector<Plane<float>>& planes, int step, BlockSample& sample) {
    sample.bands.resize(planes.size());
    for (int row = 0; row < planes.front().height(); row += step)
        for (int column = 0; column < planes.front().width(); column += step) {
            ++sample.looked_at;
            const auto at = static_cast<std::size_t>(column);
            const bool has_all = std::none_of(planes.begin(), planes.end(), [&](const auto& plane) {
                return std::isnan(plane.row(row)[at]);
            });
            if (!has_all) continue;
            for (std::size_t b = 0; b < planes.size(); ++b)
                sample.bands[b].push_back(planes[b].row(row)[at]);
        }
}

ReflectanceSample joined_sample(std::span<const SampledBand> bands,
                                const std::vector<BlockSample>& blocks) {
    ReflectanceSample all;
    for (const auto& band : bands) all.bands.push_back({band.role, {}});
    for (const auto& block : blocks) {
        all.pixels_looked_at += block.looked_at;
        for (std::size_t b = 0; b < block.bands.size(); ++b)
            all.bands[b].reflectance.insert(all.bands[b].reflectance.end(), block.bands[b].begin(),
                                            block.bands[b].end());
    }
    return all;
}

}  // namespace

ReflectanceSample sample_reflectance(std::span<const SampledBand> bands, int threads, int blocks) {
    assert(!bands.empty());
    const auto& grid = bands.front().source->target();
    const auto all = blocks_of(grid);
    const auto windows = some_of(all, blocks);
    const int step = step_for(windows);
    std::vector<BlockSample> samples(windows.size());
    std::vector<Worker> workers(static_cast<std::size_t>(std::max(1, threads)));
    parallel_for(windows.size(), std::max(1, threads), [&](std::size_t index, int thread) {
        auto& worker = workers[static_cast<std::size_t>(thread)];
        if (worker.readers.empty())
            for (const auto& band : bands) worker.readers.emplace_back(*band.source);
        worker.planes.resize(bands.size());
        for (std::size_t b = 0; b < bands.size(); ++b)
            worker.readers[b].read(windows[index], worker.planes[b]);
        keep_pixels(worker.planes, step, samples[index]);
    });
    auto sample = joined_sample(bands, samples);
    sample.whole = windows.size() == all.size() && step == 1;
    return sample;
}

}  // namespace sunbudget
