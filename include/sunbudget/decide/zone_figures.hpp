#pragma once

#include <cstdint>
#include <optional>
#include <span>
#include <utility>
#include <vector>

namespace sunbudget {

/// Figures of one layer's band over one zone.
struct ZoneFigures {
    double weight = 0;  ///< area with a value, m2; 0: the rest has no meaning
    double mean = 0;
    double min = 0;
    double max = 0;
    double std = 0;  ///< of the population, weighted by area
    double p10 = 0, p50 = 0, p90 = 0;
    double above_share = 0;  ///< of the area with a value, where it exceeds the threshold

    friend bool operator==(const ZoneFigures&, const ZoneFigures&) = default;
};

/// Adds up a band over a zone, piece by piece. The same pieces in the same order give the same bits.
class ZoneTally {
  public:
    /// in      weight  area, above 0; value  finite
    void add(float value, double weight) { fresh_.push_back({value, weight}); }
    /// After the last pixel of a piece.
    void settle();
    /// Takes in a later piece, settled.
    void merge(const ZoneTally& later);
    [[nodiscard]] ZoneFigures figures(std::optional<double> above) const;
    [[nodiscard]] bool empty() const noexcept { return weights_.empty(); }

  private:
    using Weighted = std::pair<float, double>;
    void thin_out();
    std::vector<Weighted> fresh_;
    std::vector<Weighted> weights_;  ///< by value, each once
    double weight_ = 0, mean_ = 0, squares_ = 0;
    int dropped_bits_ = 0;  ///< of the values that percentiles are found among
};

}  // namespace sunbudget
