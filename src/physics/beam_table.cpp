#include "sunbudget/physics/beam_table.hpp"

#include <algorithm>
#include <cassert>
#include <cmath>
#include <cstring>

#include "sunbudget/base/simd.hpp"

namespace sunbudget {

namespace {

/// Pixels worked on together: positions and look-ups stay in the first-level cache.
constexpr std::size_t chunk = 64;

/// The same where nothing is looked up: seven rows of it fit there, and more pixels share a sun's set-up.
constexpr std::size_t sun_chunk = 256;

/// Where the middles of a sector's halves lie between its two directions.
constexpr std::array<float, 2> middle{0.25F, 0.75F};

/// Share of a sun's rise that stands above a horizon: 1 below its lowest, 0 above its highest.
double share_above(const SunStep& sun, double sine) noexcept {
    if (sine <= sun.sine_low && sine < sun.sine_high) return 1;
    if (sine >= sun.sine_high) return 0;
    return (sun.sine_high - sine) / (sun.sine_high - sun.sine_low);
}

struct Positions {
    std::array<int, chunk> index;
    std::array<float, chunk> share;
};

SUNBUDGET_CLONES
void positions(const float* before, const float* after, float weight, Positions& at,
               std::size_t count) noexcept {
    for (std::size_t i = 0; i < count; ++i) {
        const float place =
            (before[i] + weight * (after[i] - before[i])) * static_cast<float>(BeamTable::bins);
        const float known = place > 0 ? place : 0.0F;  // NaN becomes 0 here and stays in the share
        const int index = std::min(static_cast<int>(known), BeamTable::bins - 1);
        at.index[i] = index;
        at.share[i] = place - static_cast<float>(index);
    }
}

/// Eight lanes side by side. Only plain vector arithmetic, so that every CPU gives the same bits.
using Lanes = float __attribute__((vector_size(32)));
using Pick = int __attribute__((vector_size(32)));

struct LookUp {
    const BeamTable::Entry *first, *second;  ///< of the table's two halves
    const Positions *at_first, *at_second;
    const float *east, *north, *up;
    float *beam, *hours, *around;  ///< around may be null
};

/// Looks up both halves' entries between two of a table, and adds their product with the normals: beam
/// in the lower four lanes, light from around the sun in the upper four.
SUNBUDGET_CLONES
void add_from_table(const LookUp& t, std::size_t count) noexcept {
    for (std::size_t i = 0; i < count; ++i) {
        Lanes low, high, other_low, other_high;
        std::memcpy(&low, t.first + t.at_first->index[i], sizeof low);
        std::memcpy(&high, t.first + t.at_first->index[i] + 1, sizeof high);
        std::memcpy(&other_low, t.second + t.at_second->index[i], sizeof other_low);
        std::memcpy(&other_high, t.second + t.at_second->index[i] + 1, sizeof other_high);
        const Lanes found = (low + t.at_first->share[i] * (high - low)) +
                            (other_low + t.at_second->share[i] * (other_high - other_low));
        const Lanes normal{t.east[i], t.north[i], t.up[i], 1.0F,
                           t.east[i], t.north[i], t.up[i], 0.0F};
        const Lanes parts = found * normal;
        const Lanes level = parts + __builtin_shuffle(parts, Pick{1, 1, 1, 1, 5, 5, 5, 5});
        const Lanes whole = level + __builtin_shuffle(parts, Pick{2, 2, 2, 2, 6, 6, 6, 6});
        t.beam[i] += whole[0];
        t.hours[i] += parts[3];
        if (t.around != nullptr) t.around[i] += whole[4];
    }
}

struct OneSun {
    float east, north, up, hours;
    float around_east, around_north, around_up;
    float high;      ///< sine of the highest elevation
    float per_sine;  ///< 1 / (highest - lowest)
    float share;     ///< between the directions
};

OneSun one_sun(const PlacedSun& placed) noexcept {
    const auto& sun = placed.sun;
    // A sun that does not rise within the step is above a horizon or not: any steep ramp says which.
    const double rise = std::max(sun.sine_high - sun.sine_low, 1e-30);
    return {static_cast<float>(sun.beam[0]),   static_cast<float>(sun.beam[1]),
            static_cast<float>(sun.beam[2]),   static_cast<float>(sun.hours),
            static_cast<float>(sun.around[0]), static_cast<float>(sun.around[1]),
            static_cast<float>(sun.around[2]), static_cast<float>(sun.sine_high),
            static_cast<float>(1 / rise),      static_cast<float>(placed.share)};
}

struct SunRows {
    const float *before, *after, *east, *north, *up;
    float *beam, *hours, *around;
};

SUNBUDGET_CLONES
void add_one(const OneSun sun, const SunRows row, std::size_t count) noexcept {
    const auto* before = row.before;
    const auto* after = row.after;
    float* __restrict beam = row.beam;
    float* __restrict hours = row.hours;
    for (std::size_t i = 0; i < count; ++i) {
        const float horizon = before[i] + sun.share * (after[i] - before[i]);
        const float above = (sun.high - horizon) * sun.per_sine;
        const float capped = above > 1 ? 1.0F : above;
        const float lit = capped < 0 ? 0.0F : capped;  // NaN stays
        const float facing =
            (row.east[i] * sun.east + row.north[i] * sun.north) + row.up[i] * sun.up;
        const float front = facing < 0 ? 0.0F : facing;
        beam[i] += lit * front;
        hours[i] += lit * sun.hours;
    }
}

SUNBUDGET_CLONES
void add_one_around(const OneSun sun, const SunRows row, std::size_t count) noexcept {
    const auto* before = row.before;
    const auto* after = row.after;
    float* __restrict around = row.around;
    for (std::size_t i = 0; i < count; ++i) {
        const float horizon = before[i] + sun.share * (after[i] - before[i]);
        const float above = (sun.high - horizon) * sun.per_sine;
        const float capped = above > 1 ? 1.0F : above;
        const float lit = capped < 0 ? 0.0F : capped;
        const float facing = (row.east[i] * sun.around_east + row.north[i] * sun.around_north) +
                             row.up[i] * sun.around_up;
        around[i] += lit * (facing < 0 ? 0.0F : facing);
    }
}

SUNBUDGET_CLONES
void sine_row(const float* tangent, float* __restrict sine, std::size_t count) noexcept {
    for (std::size_t i = 0; i < count; ++i)
        sine[i] = tangent[i] / std::sqrt(1.0F + tangent[i] * tangent[i]);
}

}  // namespace

void horizon_sines(std::span<const float> tangent, std::span<float> sine) noexcept {
    assert(tangent.size() == sine.size());
    sine_row(tangent.data(), sine.data(), sine.size());
}

void BeamTable::add(const SunStep& sun, double share) {
    assert(entries_.empty() && share >= 0 && share < 1);
    constexpr std::size_t size = bins + 1;
    part_.resize(2 * size);
    whole_.resize(2 * size);
    ++suns_;
    const std::size_t start = share < 0.5 ? 0 : size;
    const Sum sum{sun.beam[0],   sun.beam[1],   sun.beam[2],  sun.hours,
                  sun.around[0], sun.around[1], sun.around[2]};
    const auto add_to = [&](Sum& target, double times) {
        for (std::size_t k = 0; k < sum.size(); ++k) target[k] += times * sum[k];
    };
    // The last entry at or below the sun's lowest; it counts whole there and for every lower horizon.
    auto entry = static_cast<int>(std::clamp(std::floor(sun.sine_low * bins), -1.0, double{bins}));
    while (entry >= 0 && share_above(sun, entry / double{bins}) < 1) --entry;
    if (entry >= 0) add_to(whole_[start + static_cast<std::size_t>(entry)], 1);
    for (int next = std::max(entry + 1, 0); next <= bins; ++next) {
        const double lit = share_above(sun, next / double{bins});
        if (lit <= 0) break;
        add_to(part_[start + static_cast<std::size_t>(next)], lit);
    }
}

void BeamTable::finish() {
    entries_.resize(part_.size());
    for (int which = 0; which < 2 && suns_ > 0; ++which) {
        Sum above{};
        for (int entry = bins; entry >= 0; --entry) {
            const auto at = static_cast<std::size_t>(which * (bins + 1) + entry);
            for (std::size_t k = 0; k < above.size(); ++k) {
                above[k] += whole_[at][k];
                entries_[at].lane[k] = static_cast<float>(above[k] + part_[at][k]);
            }
        }
    }
    std::vector<Sum>().swap(part_);  // = {} would keep the memory
    std::vector<Sum>().swap(whole_);
}

void add_beams(std::span<const BeamTable> tables, const HorizonPair& horizon,
               const NormalRow& normal, std::span<const BeamSums> sums) noexcept {
    assert(tables.size() == sums.size() && horizon.before.size() == horizon.after.size());
    const std::size_t width = horizon.before.size();
    std::array<Positions, 2> at;
    for (std::size_t from = 0; from < width; from += chunk) {
        const std::size_t count = std::min(chunk, width - from);
        for (std::size_t half = 0; half < 2; ++half)
            positions(horizon.before.data() + from, horizon.after.data() + from, middle[half],
                      at[half], count);
        for (std::size_t period = 0; period < tables.size(); ++period) {
            if (tables[period].empty()) continue;
            const auto& sum = sums[period];
            add_from_table(
                {tables[period].half(0), tables[period].half(1), &at[0], &at[1],
                 normal.east.data() + from, normal.north.data() + from, normal.up.data() + from,
                 sum.beam.data() + from, sum.hours.data() + from,
                 sum.around.empty() ? nullptr : sum.around.data() + from},
                count);
        }
    }
}

void add_suns(std::span<const PlacedSun> suns, const HorizonPair& horizon, const NormalRow& normal,
              const BeamSums& sums) noexcept {
    const std::size_t width = sums.beam.size();
    assert(horizon.before.size() == width && horizon.after.size() == width);
    assert(sums.hours.size() == width && normal.up.size() == width);
    for (std::size_t from = 0; from < width; from += sun_chunk) {
        const std::size_t count = std::min(sun_chunk, width - from);
        const SunRows row{horizon.before.data() + from,
                          horizon.after.data() + from,
                          normal.east.data() + from,
                          normal.north.data() + from,
                          normal.up.data() + from,
                          sums.beam.data() + from,
                          sums.hours.data() + from,
                          sums.around.empty() ? nullptr : sums.around.data() + from};
        for (const auto& placed : suns) add_one(one_sun(placed), row, count);
        if (row.around != nullptr)
            for (const auto& placed : suns) add_one_around(one_sun(placed), row, count);
    }
}

}  // namespace sunbudget
