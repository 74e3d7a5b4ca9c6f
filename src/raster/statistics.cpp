#include "sunbudget/raster/statistics.hpp"

#include <algorithm>
#include <array>
#include <cmath>
#include <cstddef>

#include "sunbudget/base/simd.hpp"

namespace sunbudget {

namespace {
// Sums run in this many strands, pixel i in strand i % strands: the same sums on every CPU.
constexpr std::size_t strands = 16;

struct Strands {
    std::array<double, strands> sum{};
    std::array<std::int32_t, strands> count{};
    std::array<float, strands> min{};
    std::array<float, strands> max{};
};

SUNBUDGET_CLONES Strands first_pass(const float* row, std::size_t size) {
    Strands s;  // its own, so that it may stay in registers
    s.min.fill(std::numeric_limits<float>::infinity());
    s.max.fill(-std::numeric_limits<float>::infinity());
    for (std::size_t first = 0; first < size; first += strands)
        for (std::size_t k = 0; k < strands; ++k) {
            const float value = row[first + k];
            s.sum[k] += static_cast<double>(zero_if_nan(value));
            s.count[k] += zero_or_one(value == value);
            s.min[k] = value < s.min[k] ? value : s.min[k];
            s.max[k] = value > s.max[k] ? value : s.max[k];
        }
    return s;
}

SUNBUDGET_CLONES std::array<double, strands> second_pass(const float* row, std::size_t size,
                                                         double mean) {
    std::array<double, strands> squares{};
    for (std::size_t first = 0; first < size; first += strands)
        for (std::size_t k = 0; k < strands; ++k) {
            const double difference = zero_if_nan(static_cast<double>(row[first + k]) - mean);
            squares[k] += difference * difference;
        }
    return squares;
}

template <typename Number>
double total(const std::array<Number, strands>& parts) {
    double sum = 0;
    for (const auto part : parts) sum += static_cast<double>(part);
    return sum;
}

void merge(BlockStatistics& into, const BlockStatistics& other) noexcept {
    if (other.count == 0) return;
    const auto before = static_cast<double>(into.count);
    const auto added = static_cast<double>(other.count);
    const double share = added / (before + added);
    const double apart = other.mean - into.mean;
    into.count += other.count;
    into.min = std::min(into.min, other.min);
    into.max = std::max(into.max, other.max);
    into.mean += apart * share;
    into.squares += other.squares + apart * apart * before * share;
}

/// Figures of up to `piece` pixels, a multiple of `strands`; what is missing there is NaN.
BlockStatistics of_piece(const float* row, std::size_t size) noexcept {
    const Strands s = first_pass(row, size);
    const double count = total(s.count);
    if (count == 0) return {};
    const double mean = total(s.sum) / count;
    const auto squares = second_pass(row, size, mean);
    return {static_cast<std::uint64_t>(count),
            static_cast<double>(*std::min_element(s.min.begin(), s.min.end())),
            static_cast<double>(*std::max_element(s.max.begin(), s.max.end())), mean,
            total(squares)};
}
}  // namespace

void add_row(BlockStatistics& block, std::span<const float> row) noexcept {
    const std::size_t whole = row.size() / strands * strands;
    if (whole > 0) merge(block, of_piece(row.data(), whole));
    if (whole == row.size()) return;
    std::array<float, strands> rest;
    rest.fill(std::numeric_limits<float>::quiet_NaN());
    std::copy(row.begin() + static_cast<std::ptrdiff_t>(whole), row.end(), rest.begin());
    merge(block, of_piece(rest.data(), strands));
}

BandStatistics combined(std::span<const BlockStatistics> blocks, std::uint64_t pixels) noexcept {
    BlockStatistics all;
    for (const auto& block : blocks) merge(all, block);
    if (all.count == 0) return {0, pixels, 0, 0, 0, 0};
    return {all.count, pixels,   all.min,
            all.max,   all.mean, std::sqrt(all.squares / static_cast<double>(all.count))};
}

}  // namespace sunbudget
