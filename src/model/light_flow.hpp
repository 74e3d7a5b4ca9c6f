#pragma once

#include <cstddef>
#include <optional>
#include <span>
#include <vector>

#include "cloud_index.hpp"
#include "flow_notes.hpp"
#include "open_planes.hpp"

namespace sunbudget {

/// One thread's light on the ground as it lies, window by window: open light brought together with shadows
/// and clouds, over the ground as it is and after each change of it.
class LightFlow {
  public:
    /// Everything given outlives it.
    LightFlow(const Run& run, const Needs& needs, const SharedLight& shared, int thread,
              Ground& ground, Beside& beside, const FlowNotes& notes);

    /// Heights and open light of the ground's window.
    void begin();
    /// Light of some bands (none: of no sun), and slopes and sky view with the first.
    void some_bands(std::size_t first, std::size_t count);
    /// The first bands over, flags where there is no light.
    void flag_missing();

    /// `held` counts the bands of some_bands().
    [[nodiscard]] const BandPlanes& band(std::size_t held) const { return bands_[held]; }
    /// Nothing where no raster tells of clouds.
    [[nodiscard]] const Plane<float>* cloud_index(std::size_t held) const {
        return clouds_.empty() ? nullptr : &clouds_.of(held);
    }
    /// Whether sky light hangs on the albedo of the ground, so that changes have their own.
    [[nodiscard]] bool ground_lights_sky() const { return open_.ground_lights_sky(); }

    void watch(Probe& probe);
    [[nodiscard]] std::uint64_t infinities() const { return shader_ ? shader_->infinities() : 0; }

  private:
    using Part = LightField::Part;

    /// Light from around that one ground has: the ground as it is, or after a change.
    struct Around {
        Plane<float>& open_diffuse;
        Plane<float>& albedo_seen;
        Plane<float>& reflected;
        Plane<float>* diffuse;  ///< nothing: that of the ground as it is serves
    };
    [[nodiscard]] Around around(std::size_t held);
    [[nodiscard]] Around around(std::size_t held, ChangedAlbedo& change);
    /// The row of a plane over the ground's window that lies over a window inside.
    [[nodiscard]] std::span<float> row(Plane<float>& plane, const Window& window, int r) const;

    void see_albedo();
    void add_from_ground(std::size_t block, std::size_t band, Plane<float>& diffuse);

    void flat_bands(std::size_t first, std::size_t count);
    void flat_block(std::size_t block, std::size_t band, std::size_t held);
    void dim_flat(std::size_t band, std::size_t held);

    void terrain_bands(std::size_t first, std::size_t count);
    void terrain_block(std::size_t block, std::size_t first, std::size_t count);
    [[nodiscard]] std::vector<ShadedBlock> shade(const Window& block, std::size_t first,
                                                 std::size_t count);
    void compose(const ShadedBlock& part, std::size_t held);
    void compose_sun(const ShadedBlock& part, std::size_t held, int r,
                     std::span<float> circumsolar);
    void compose_around(const ShadedBlock& part, int r, std::span<const float> circumsolar,
                        const Around& around);
    void dim(const ShadedBlock& part, std::size_t held, double overcast);
    void dim_row_of(const ShadedBlock& part, std::size_t held, int r, const Around& around,
                    std::span<float> beam, std::span<float> sky, double overcast);

    const Run& run_;
    const Needs& needs_;
    LightField* field_;
    Ground& ground_;
    Beside& beside_;
    const FlowNotes& notes_;
    std::optional<Locator> own_locator_;  ///< where no light field has one
    const Locator* locator_ = nullptr;    ///< with terrain
    std::optional<BlockShader> shader_;
    OpenPlanes open_;
    CloudIndex clouds_;
    std::vector<BandPlanes> bands_;
};

}  // namespace sunbudget
