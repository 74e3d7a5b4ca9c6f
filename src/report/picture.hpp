#pragma once

#include <span>
#include <string>
#include <string_view>
#include <vector>

#include "sunbudget/base/plane.hpp"
#include "sunbudget/raster/png.hpp"
#include "sunbudget/tables/layers.hpp"

namespace sunbudget {

/// Colours along a scale from 0 to 1, from src/report/data/colour_maps.csv.
class ColourMap {
  public:
    [[nodiscard]] static const ColourMap& named(std::string_view name);
    [[nodiscard]] Colour at(double share) const;
    /// As CSS writes it, from left to right.
    [[nodiscard]] std::string gradient() const;

  private:
    struct Stop {
        double at;
        Colour colour;
    };
    std::vector<Stop> stops_;
};

/// How values become colours.
struct ColourScale {
    double low = 0, high = 1;
    double step = 1;   ///< between two marks of the legend
    std::string map;   ///< of colours
    bool cut = false;  ///< some values lie beyond and take the end's colour
};
/// Fits the middle 96 % of the values; two-sided ones symmetrically about 0.
[[nodiscard]] ColourScale scale_for(const Layer& layer, bool difference,
                                    std::span<const Plane<float>* const> planes);

/// A step that people read easily: 1, 2 or 5 times a power of ten, not below `least`.
[[nodiscard]] double readable_step(double least);

/// As a data URI; pixels without value are see-through.
[[nodiscard]] std::string picture_of(const Plane<float>& values, const ColourScale& scale);
/// Whole numbers 0 to palette.size() - 1.
[[nodiscard]] std::string picture_of_kinds(const Plane<float>& values,
                                           std::span<const Colour> palette);

/// "#rrggbb".
[[nodiscard]] std::string css(const Colour& colour);

}  // namespace sunbudget
