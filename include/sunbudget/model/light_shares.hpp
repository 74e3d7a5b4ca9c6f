#pragma once

#include <cstddef>
#include <vector>

#include "sunbudget/physics/cloudy_sky.hpp"
#include "sunbudget/physics/sun_day.hpp"

namespace sunbudget {

/// What a real sky leaves of the clear sky's light, constant over each interval of a record. The whole of
/// time has a value: what lies between two intervals (the station's night) takes the nearer one's.
class LightShares {
  public:
    struct Piece {
        TimeSpan span;
        LightShare share;
    };
    /// in      pieces in order, not overlapping; at least one
    explicit LightShares(std::vector<Piece> pieces);

    /// The mean over [begin, end], or the value at an instant where both are the same.
    [[nodiscard]] LightShare over(UtcSeconds begin, UtcSeconds end) const;
    [[nodiscard]] const std::vector<Piece>& pieces() const { return pieces_; }

  private:
    std::vector<Piece> pieces_;
    std::vector<UtcSeconds> borders_;    ///< between a piece's reach and the next's
    std::vector<LightShare> integrals_;  ///< from the first border to each, times seconds

    [[nodiscard]] std::size_t index_of(UtcSeconds utc) const;
    [[nodiscard]] LightShare integral_to(UtcSeconds utc) const;
};

}  // namespace sunbudget
