#pragma once

#include <string>

#include "layer_maps.hpp"
#include "zone_view.hpp"

namespace sunbudget {

/// The parts of the report that speak of zones; empty where the run has none.
class ZoneSections {
  public:
    ZoneSections(const Run& run, const Execution& execution, const OutputSet& outputs,
                 const LayerMaps& maps)
        : run_(run), execution_(execution), outputs_(outputs), maps_(maps) {}

    /// A map with their outlines, and the table beside it.
    [[nodiscard]] std::string zones() const;
    /// Savings by zone and change, before and after, by cost, in summer and winter.
    [[nodiscard]] std::string change_zones() const;

  private:
    [[nodiscard]] ZoneView savings() const;
    [[nodiscard]] ZoneView with_changed_zones(ZoneView view) const;
    [[nodiscard]] std::string outlines(const ZoneView& view, const MapFrame& frame) const;

    const Run& run_;
    const Execution& execution_;
    const OutputSet& outputs_;
    const LayerMaps& maps_;
};

}  // namespace sunbudget
