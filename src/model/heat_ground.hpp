#pragma once

#include <cstdint>
#include <initializer_list>
#include <optional>

#include "sunbudget/base/plane.hpp"
#include "sunbudget/model/run.hpp"

namespace sunbudget {

/// A reader where there is a source.
[[nodiscard]] std::optional<Reader> reader_of(const std::optional<Source>& source);
/// Infinite numbers that readers met, those that are there.
[[nodiscard]] std::uint64_t infinities_of(
    std::initializer_list<const std::optional<Reader>*> readers);

/// One thread's ground as its heat sees it, window by window: emissivity, dryness, and a raster's temperatures.
class HeatGround {
  public:
    explicit HeatGround(const Run& run);

    /// `flags` are the layer quality's.
    void read(const Window& where, const Plane<std::uint16_t>& flags);

    /// Empty where the run has none; NaN where nobody knows it.
    [[nodiscard]] const Plane<float>& emissivity() const { return emissivity_; }
    /// 1 where the surface is dry and built or bare, 0 elsewhere, NaN without a class.
    [[nodiscard]] const Plane<float>& dry() const { return dry_; }
    /// Whether a raster tells the ground's temperature; that is without what clouds hide.
    [[nodiscard]] bool has_surface() const { return surface_.has_value(); }
    [[nodiscard]] const Plane<float>& surface_k() const { return surface_k_; }
    [[nodiscard]] std::uint64_t infinities() const {
        return infinities_of({&emissivity_raster_, &surface_});
    }

  private:
    void read_emissivity(const Plane<std::uint16_t>& flags);
    void read_from_ndvi(const Plane<std::uint16_t>& flags);
    void read_dry();
    void read_surface();
    void drop_clouded();

    const Heat& heat_;
    const CoverSurface* classes_;
    std::optional<ChangeReader> change_;  ///< one that has been carried out
    std::optional<Reader> cover_, emissivity_raster_, red_, nir_, surface_, surface_quality_;
    Window window_;
    Plane<float> emissivity_, dry_, surface_k_;
    Plane<float> built_, class_emissivity_, red_plane_, nir_plane_;  ///< for NDVI
};

}  // namespace sunbudget
