#pragma once

#include <cstdint>
#include <map>
#include <optional>
#include <span>
#include <vector>

#include "sunbudget/decide/zone_figures.hpp"
#include "sunbudget/decide/zones.hpp"
#include "sunbudget/raster/locator.hpp"

namespace sunbudget {

/// A band to be looked at: of a layer, or of its uncertainty.
struct ZoneBand {
    std::size_t layer = 0, band = 0;
    bool uncertainty = false;
    const Source* source = nullptr;
};

/// What one block gives one zone, or all blocks so far.
struct ZonePiece {
    double map_area_m2 = 0, surface_area_m2 = 0, covered_px = 0, first_layer_px = 0;
    std::map<std::int32_t, double> classes_m2;
    std::vector<ZoneTally> tallies;  ///< by band

    void merge(const ZonePiece& later);
};

/// One thread's readers and planes: what a block of the grid gives each zone.
class ZoneBlock {
  public:
    /// `ground`: areas and classes are asked for. Everything given outlives it.
    ZoneBlock(const ZoneQuestion& question, std::span<const ZoneBand> bands, bool ground,
              const Locator& locator);

    void read(const Window& block);
    /// What the block read last gives a zone.
    [[nodiscard]] ZonePiece look(const Polygon& zone);

  private:
    void map_areas(const Window& block);
    void surface_areas(const Window& block);
    void add_ground(const Window& window, ZonePiece& piece) const;
    void add_band(std::size_t band, const Window& window, ZonePiece& piece) const;

    const ZoneQuestion& question_;
    std::span<const ZoneBand> bands_;
    bool ground_;
    Locator locator_;
    std::vector<Reader> readers_;
    std::optional<Reader> slope_, classes_;
    Window block_;
    std::vector<Plane<float>> planes_;
    Plane<std::int32_t> codes_;
    Plane<float> slope_deg_;
    Plane<double> map_m2_, surface_m2_, shares_;
};

}  // namespace sunbudget
