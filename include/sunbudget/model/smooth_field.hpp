#pragma once

#include <functional>
#include <memory>
#include <optional>
#include <span>
#include <vector>

#include "sunbudget/base/plane.hpp"

namespace sunbudget {

/// Several values that vary smoothly with place and height and are dear to compute (the light of a
/// whole year), known at every pixel for the price of a few nodes.
///
/// The raster is cut into square cells on a fixed lattice, each with 3 x 3 nodes in place and 3 in
/// height, interpolated by quadratics. A cell that misses the function by more than the tolerance at
/// four points between its nodes is cut into four, down to cells of two pixels whose nodes are the
/// pixels. Neighbouring cells share the nodes of their common edge, so there is no step there beyond
/// the tolerance. What a pixel gets depends on its place alone, never on the order of asking.
class SmoothField {
  public:
    /// Writes the values at a pixel centre (0, 0 is the first pixel's) and height; NaN where there
    /// is none. Called from several threads at once; `thread` tells them apart.
    using Function = std::function<void(double column, double row, double height_m, int thread,
                                        std::span<double> values)>;

    struct Shape {
        int width = 0;  ///< of the raster, pixels
        int height = 0;
        std::size_t values = 1;                   ///< how many the function writes
        double tolerance = 0;                     ///< in the values' own unit
        std::optional<double> constant_height_m;  ///< set: the height never varies
    };

    SmoothField(Shape shape, Function function);
    ~SmoothField();
    SmoothField(const SmoothField&) = delete;
    SmoothField& operator=(const SmoothField&) = delete;

    class Block;
    /// The cells under a window of at most 256 x 256 pixels that does not cross a multiple of 256.
    /// `heights_m` covers `frame`, which holds the window, and decides which heights are prepared;
    /// it is not used where the height is constant.
    [[nodiscard]] Block prepare(const Window& window, const Window& frame,
                                const Plane<float>& heights_m, int thread);

  private:
    struct Work;
    std::unique_ptr<Work> work_;
};

/// One window's share of the field, all values.
class SmoothField::Block {
  public:
    Block();
    ~Block();
    Block(Block&&) noexcept;
    Block& operator=(Block&&) noexcept;

    /// One value at every pixel of the window; NaN where the height is NaN or the function has none.
    /// `heights_m` and `out` cover the frame that the block was prepared in; nothing is written
    /// outside the window.
    void fill(std::size_t value, const Plane<float>& heights_m, Plane<float>& out) const;

  private:
    friend class SmoothField;
    struct Cells;
    std::unique_ptr<Cells> cells_;
};

}  // namespace sunbudget
