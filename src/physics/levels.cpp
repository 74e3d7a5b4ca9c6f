#include "sunbudget/physics/levels.hpp"

#include <algorithm>
#include <array>
#include <cassert>
#include <limits>
#include <utility>

namespace sunbudget {

namespace {

constexpr float missing = std::numeric_limits<float>::quiet_NaN();

using Four = std::array<float, 4>;

float maximum_of(const Four& cells) noexcept {
    float best = missing;
    for (const float cell : cells)
        if (!(cell <= best) && cell == cell) best = cell;
    return best;
}

float mean_of(const Four& cells) noexcept {
    float sum = 0;
    float count = 0;
    for (const float cell : cells) {
        const bool there = cell == cell;
        sum += there ? cell : 0.0F;
        count += there ? 1.0F : 0.0F;
    }
    return sum / count;  // 0 / 0 is NaN: no ground
}

template <typename Combine>
void halve(std::span<const float> upper, std::span<const float> lower, std::span<float> out,
           Combine combine) noexcept {
    assert(lower.empty() || lower.size() == upper.size());
    assert(out.size() == (upper.size() + 1) / 2);
    const auto cell = [](std::span<const float> row, std::size_t i) {
        return i < row.size() ? row[i] : missing;
    };
    for (std::size_t i = 0; i < out.size(); ++i)
        out[i] = combine(Four{cell(upper, 2 * i), cell(upper, 2 * i + 1), cell(lower, 2 * i),
                              cell(lower, 2 * i + 1)});
}

}  // namespace

void halve_maximum(std::span<const float> upper, std::span<const float> lower,
                   std::span<float> out) noexcept {
    halve(upper, lower, out, maximum_of);
}

void halve_mean(std::span<const float> upper, std::span<const float> lower,
                std::span<float> out) noexcept {
    halve(upper, lower, out, mean_of);
}

LevelBuilder::LevelBuilder(int width, int levels, Sink sink)
    : sink_(std::move(sink)), levels_(static_cast<std::size_t>(levels)) {
    for (int level = 1; level <= levels; ++level) {
        auto& state = levels_[static_cast<std::size_t>(level - 1)];
        state.maximum.resize(static_cast<std::size_t>(cells_along(width, level)));
        state.mean.resize(state.maximum.size());
    }
}

void LevelBuilder::add_row(std::span<const float> height_m) {
    if (!levels_.empty()) take(0, height_m, height_m);
}

void LevelBuilder::finish() {
    for (std::size_t i = 0; i < levels_.size(); ++i)
        if (levels_[i].waiting) emit(i, {}, {});
}

void LevelBuilder::take(std::size_t index, std::span<const float> maximum,
                        std::span<const float> mean) {
    auto& level = levels_[index];
    if (level.waiting) {
        emit(index, maximum, mean);
        return;
    }
    level.waiting_maximum.assign(maximum.begin(), maximum.end());
    level.waiting_mean.assign(mean.begin(), mean.end());
    level.waiting = true;
}

void LevelBuilder::emit(std::size_t index, std::span<const float> lower_maximum,
                        std::span<const float> lower_mean) {
    auto& level = levels_[index];
    halve_maximum(level.waiting_maximum, lower_maximum, level.maximum);
    halve_mean(level.waiting_mean, lower_mean, level.mean);
    level.waiting = false;
    sink_(static_cast<int>(index) + 1, level.rows++, level.maximum, level.mean);
    if (index + 1 < levels_.size()) take(index + 1, level.maximum, level.mean);
}

std::vector<Level> build_levels(const Plane<float>& height_m, int levels) {
    std::vector<Level> made;
    for (int level = 1; level <= levels; ++level) {
        const int width = cells_along(height_m.width(), level);
        const int height = cells_along(height_m.height(), level);
        made.push_back({Plane<float>(width, height), Plane<float>(width, height)});
    }
    LevelBuilder builder(
        height_m.width(), levels,
        [&made](int level, int row, std::span<const float> maximum, std::span<const float> mean) {
            auto& target = made[static_cast<std::size_t>(level - 1)];
            std::ranges::copy(maximum, target.maximum_m.row(row).begin());
            std::ranges::copy(mean, target.mean_m.row(row).begin());
        });
    for (int row = 0; row < height_m.height(); ++row) builder.add_row(height_m.row(row));
    builder.finish();
    return made;
}

}  // namespace sunbudget
