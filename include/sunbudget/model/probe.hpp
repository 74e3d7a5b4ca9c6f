#pragma once

#include <cstddef>
#include <optional>
#include <string>
#include <vector>

#include "sunbudget/base/plane.hpp"

namespace sunbudget {

/// A number on the way from inputs to layers, at one pixel.
struct Term {
    std::optional<std::size_t> band;  ///< nothing: of the whole run
    std::string name;                 ///< snake_case
    std::string unit;  ///< as the layers write theirs: "1", "m", "h", "degree", "W/m2"
    std::string text;  ///< in words
    double value = 0;  ///< NaN where there is none
};

/// How high the ground stands in one direction.
struct HorizonPoint {
    double azimuth_rad = 0;  ///< clockwise from true north
    double tangent = 0;      ///< of the elevation angle; NaN where there is none
};

/// Listens to the flow at one pixel. The flow does the same with a probe as without.
class Probe {
  public:
    Probe(long column, long row) : column_(column), row_(row) {}

    [[nodiscard]] bool inside(const Window& window) const noexcept {
        return column_ >= window.column && column_ < window.column + window.width &&
               row_ >= window.row && row_ < window.row + window.height;
    }
    /// The pixel's value of a plane that covers `window`, which must hold the pixel.
    template <class Value>
    [[nodiscard]] Value of(const Plane<Value>& plane, const Window& window) const noexcept {
        return plane.at(static_cast<int>(column_ - window.column),
                        static_cast<int>(row_ - window.row));
    }
    void note(Term term) { terms_.push_back(std::move(term)); }
    /// A direction that was looked along before is not kept again.
    void note_horizon(HorizonPoint point);

    [[nodiscard]] long column() const noexcept { return column_; }
    [[nodiscard]] long row() const noexcept { return row_; }
    [[nodiscard]] const std::vector<Term>& terms() const noexcept { return terms_; }
    /// In the order of azimuths.
    [[nodiscard]] const std::vector<HorizonPoint>& horizon() const noexcept { return horizon_; }

  private:
    long column_, row_;
    std::vector<Term> terms_;
    std::vector<HorizonPoint> horizon_;
};

}  // namespace sunbudget
