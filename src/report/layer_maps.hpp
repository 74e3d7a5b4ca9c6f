#pragma once

#include <optional>
#include <string>

#include "map_figure.hpp"
#include "sunbudget/engine/execute.hpp"
#include "sunbudget/engine/output_set.hpp"

namespace sunbudget {

/// One layer's band as the report shows it.
struct Shown {
    std::size_t layer = 0, band = 0;
    Plane<float> values;
};

/// The run's layers as maps, each an article with its figure and what stands beside it.
class LayerMaps {
  public:
    LayerMaps(const Run& run, const Execution& execution, const OutputSet& outputs)
        : run_(run), execution_(execution), outputs_(outputs) {}

    /// The plan's report shows the layer.
    [[nodiscard]] bool chosen(std::size_t layer) const;
    [[nodiscard]] std::optional<std::size_t> layer_named(const std::string& name) const;
    /// The period with the greatest mean, of the layer itself where this is a change of it.
    [[nodiscard]] std::size_t band_to_show(std::size_t layer) const;
    [[nodiscard]] Shown shown(std::size_t layer, std::size_t band) const;
    [[nodiscard]] std::string caption(const Shown& map, const ColourScale* scale,
                                      const MapFrame& frame) const;
    [[nodiscard]] std::string alt_text(const Shown& map) const;

    [[nodiscard]] std::string layer_article(std::size_t layer) const;
    /// The quality layer: where the albedo came from.
    [[nodiscard]] std::string kinds_article(std::size_t layer) const;
    /// Two layers of one scale, one over the other.
    [[nodiscard]] std::string slider_article(std::size_t before, std::size_t after) const;

  private:
    [[nodiscard]] std::string article(std::size_t layer, const std::string& figure,
                                      const std::string& beside) const;
    [[nodiscard]] std::string curve(std::size_t layer) const;
    [[nodiscard]] std::string kinds_figure(const Shown& map, const std::array<bool, 8>& met) const;

    const Run& run_;
    const Execution& execution_;
    const OutputSet& outputs_;
};

}  // namespace sunbudget
