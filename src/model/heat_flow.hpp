#pragma once

#include <cstdint>
#include <memory>
#include <optional>
#include <vector>

#include "sunbudget/base/plane.hpp"
#include "sunbudget/model/run.hpp"

namespace sunbudget {

/// Planes of one band; those that no layer of the run needs are left empty.
struct HeatPlanes {
    Plane<float> down, up, net, surface_k;
};

/// One thread's longwave and surface temperature, window by window.
class HeatFlow {
  public:
    /// `field` is nothing where the run has no longwave, or has its air by the pixel.
    HeatFlow(const Run& run, LongwaveField* field, int thread);
    ~HeatFlow();
    HeatFlow(HeatFlow&&) noexcept;

    /// Reads what holds for all bands of a window that lies on the lattice of blocks. `heights_m` is looked at
    /// where the run has terrain; `flags` are the layer quality's.
    void read(const Window& window, const std::vector<Window>& blocks,
              const Plane<float>& heights_m, const Plane<std::uint16_t>& flags);

    /// NaN where nobody knows it.
    [[nodiscard]] const Plane<float>& emissivity() const;
    /// 1 where the surface is dry and built or bare, 0 elsewhere, NaN without a class.
    [[nodiscard]] const Plane<float>& dry() const;

    /// One band. `sky_view` is empty on open ground; `net_shortwave` is looked at for the balance alone.
    [[nodiscard]] const HeatPlanes& band(std::size_t band, const Plane<float>& sky_view,
                                         const Plane<float>& net_shortwave);

    /// The last band once more, over ground changed in itself: `up`, `net` and a balanced `surface_k`. Only where the
    /// run has longwave.
    void beside(const Plane<float>& emissivity, const Plane<float>& dry,
                const Plane<float>& net_shortwave, HeatPlanes& changed);

    /// Of the last band, on the way to it: the air, and what the whole sky sends to level open ground.
    [[nodiscard]] const Plane<float>& air_k() const;
    [[nodiscard]] const Plane<float>& sky() const;

    [[nodiscard]] std::uint64_t infinities() const;

  private:
    struct State;
    std::unique_ptr<State> state_;
};

/// Takes away what lies outside the scope of a dry surface's balance: all that is not dry, and what has no class.
void keep_dry(std::span<const float> dry, std::span<float> values) noexcept;

}  // namespace sunbudget
