#pragma once

#include <cstdint>
#include <vector>

#include "beside.hpp"
#include "sunbudget/base/plane.hpp"
#include "sunbudget/model/shading.hpp"
#include "sunbudget/model/surface.hpp"

namespace sunbudget {

/// Windows of the lattice's blocks inside a window that starts on the lattice.
[[nodiscard]] std::vector<Window> blocks_of(const Window& window);

/// One thread's ground, window by window: what light falls on and layers are made from.
class Ground {
  public:
    explicit Ground(const Run& run) : run_(run), surface_(run) {}

    /// Albedo and flags of a window, the albedo's uncertainty if asked for.
    void read(const Window& where, bool uncertainty);
    /// The mean albedo around each pixel, block by block so that its bits hang on the lattice alone; the same for
    /// the changes.
    void see_albedo(Beside& beside);
    /// Slope, aspect and sky view: nothing is known yet.
    void forget_planes();
    /// Those of a part, for their layers and for every band.
    void keep(const ShadedBlock& part);
    [[nodiscard]] std::uint64_t infinities() const { return surface_.infinities(); }

    Window window;
    std::vector<Window> blocks;  ///< of the window
    Plane<float> albedo, albedo_uncertainty;
    Plane<float> albedo_seen;  ///< where sky or ground in view send its light back
    Plane<std::uint16_t> flags;
    Plane<float> heights_m, sky_view, slope_deg, aspect_deg;  ///< past terrain

  private:
    const Run& run_;
    SurfaceReader surface_;
};

}  // namespace sunbudget
