#pragma once

#include <cstddef>
#include <list>
#include <map>
#include <utility>
#include <vector>

#include "sunbudget/base/plane.hpp"
#include "sunbudget/raster/polygons.hpp"

namespace sunbudget {

/// Polygons that something is done in, found by block of the grid's lattice. Never changes, and may be
/// shared between threads.
class TreatedArea {
  public:
    /// Polygons may carry one number each. What lies further from the grid than any horizon is left out.
    TreatedArea(std::vector<Polygon> polygons, const Grid& grid);

    [[nodiscard]] const std::vector<Polygon>& polygons() const { return polygons_; }
    /// Whether an outline's rectangle comes near a window.
    [[nodiscard]] bool touches(const Window& window) const;

  private:
    friend class TreatedReader;
    std::vector<Polygon> polygons_;
    std::map<std::pair<long, long>, std::vector<std::size_t>>
        by_block_;  ///< numbers of polygons, ascending
};

/// The shares of pixels inside the polygons. One object a thread.
///
/// Worked out for whole blocks of the lattice, so that the bits of a pixel do not depend on the window it is
/// asked for with. Where polygons overlap a pixel counts once.
class TreatedReader {
  public:
    explicit TreatedReader(const TreatedArea& area) : area_(area) {}

    /// [0, 1], exactly 1 inside. `shares` becomes as large as the window, which may reach beyond the grid.
    void shares(const Window& window, Plane<float>& shares);
    /// Shares times the polygons' numbers; polygons without a number count as 0.
    void numbers(const Window& window, Plane<float>& sums);

  private:
    struct Block {
        std::pair<long, long> place;
        Plane<float> shares, numbers;
    };
    const Block* block(std::pair<long, long> place);
    void fill(const Window& window, Plane<float> Block::*what, Plane<float>& out);

    const TreatedArea& area_;
    std::list<Block> recent_;  ///< the latest first
    Plane<double> scratch_;
};

}  // namespace sunbudget
