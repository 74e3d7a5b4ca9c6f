#include "sunbudget/decide/zone_figures.hpp"

#include <algorithm>
#include <bit>
#include <cassert>
#include <cmath>

namespace sunbudget {

namespace {

/// Values of our own layers are multiples of a quantum, and some ten thousand at most; only rasters from elsewhere
/// come near this.
constexpr std::size_t most_values = std::size_t{1} << 18;

void join_equal(std::vector<std::pair<float, double>>& weights) {
    std::size_t last = 0;
    for (std::size_t i = 1; i < weights.size(); ++i) {
        if (weights[i].first == weights[last].first)
            weights[last].second += weights[i].second;
        else
            weights[++last] = weights[i];
    }
    if (!weights.empty()) weights.resize(last + 1);
}

/// The value below which a share of the weight lies: the first at which the sum reaches it.
double percentile(std::span<const std::pair<float, double>> weights, double target) {
    double sum = 0;
    for (const auto& [value, weight] : weights)
        if ((sum += weight) >= target) return static_cast<double>(value);
    return static_cast<double>(weights.back().first);
}

}  // namespace

void ZoneTally::settle() {
    if (fresh_.empty()) return;
    ZoneTally piece;
    double sum = 0;
    for (const auto& [value, weight] : fresh_) {
        piece.weight_ += weight;
        sum += weight * static_cast<double>(value);
    }
    piece.mean_ = sum / piece.weight_;
    for (const auto& [value, weight] : fresh_) {
        const double difference = static_cast<double>(value) - piece.mean_;
        piece.squares_ += weight * difference * difference;
    }
    // Stable: equal values keep the order of the pixels, so their sum has the same bits.
    std::stable_sort(fresh_.begin(), fresh_.end(),
                     [](const Weighted& a, const Weighted& b) { return a.first < b.first; });
    join_equal(fresh_);
    piece.weights_.swap(fresh_);
    merge(piece);
}

void ZoneTally::merge(const ZoneTally& later) {
    assert(later.fresh_.empty());
    if (later.weights_.empty()) return;
    const double all = weight_ + later.weight_;
    const double apart = later.mean_ - mean_;
    const double share = later.weight_ / all;
    squares_ += later.squares_ + apart * apart * weight_ * share;
    mean_ += apart * share;
    weight_ = all;
    std::vector<Weighted> merged;
    merged.reserve(weights_.size() + later.weights_.size());
    std::merge(weights_.begin(), weights_.end(), later.weights_.begin(), later.weights_.end(),
               std::back_inserter(merged),
               [](const Weighted& a, const Weighted& b) { return a.first < b.first; });
    join_equal(merged);
    weights_.swap(merged);
    thin_out();
}

/// Drops bits of the values until they are few enough: percentiles then err by one part in 2^(23 - bits).
void ZoneTally::thin_out() {
    while (weights_.size() > most_values) {
        ++dropped_bits_;
        const std::uint32_t mask = ~((1u << dropped_bits_) - 1);
        for (auto& [value, weight] : weights_)
            value = std::bit_cast<float>(std::bit_cast<std::uint32_t>(value) & mask);
        join_equal(weights_);
    }
}

ZoneFigures ZoneTally::figures(std::optional<double> above) const {
    if (weights_.empty()) return {};
    ZoneFigures found;
    found.weight = weight_;
    found.mean = mean_;
    found.std = std::sqrt(squares_ / weight_);
    found.min = static_cast<double>(weights_.front().first);
    found.max = static_cast<double>(weights_.back().first);
    found.p10 = percentile(weights_, 0.1 * weight_);
    found.p50 = percentile(weights_, 0.5 * weight_);
    found.p90 = percentile(weights_, 0.9 * weight_);
    if (above)
        for (const auto& [value, weight] : weights_)
            if (static_cast<double>(value) > *above) found.above_share += weight / weight_;
    return found;
}

}  // namespace sunbudget
