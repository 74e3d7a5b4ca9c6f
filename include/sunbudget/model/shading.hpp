#pragma once

#include <deque>
#include <filesystem>
#include <map>
#include <memory>
#include <mutex>
#include <optional>
#include <vector>

#include "sunbudget/model/height_levels.hpp"
#include "sunbudget/model/light.hpp"
#include "sunbudget/model/sun_sectors.hpp"
#include "sunbudget/model/terrain.hpp"

namespace sunbudget {

class Probe;

/// Shared by the threads of a run with terrain: coarse levels, and the suns of a region of several
/// blocks, sorted once.
class SharedTerrain {
  public:
    SharedTerrain(const Terrain& terrain, const Grid& grid,
                  const std::filesystem::path& scratch_folder);
    ~SharedTerrain();

    [[nodiscard]] const Terrain& terrain() const { return terrain_; }
    [[nodiscard]] HeightLevels& levels() { return *levels_; }
    /// The height that suns are shaded at. One for the whole run: what it errs by for pixels far above or
    /// below and long in shadow (0.2 % of a day's light at 1500 m) then changes smoothly from pixel to pixel;
    /// one for each region made steps of 0.2 W m-2 at their borders.
    [[nodiscard]] double middle_height_m() const { return middle_height_m_; }
    /// The sectors of the region a block lies in. What a block gets does not depend on who asks first.
    [[nodiscard]] std::shared_ptr<const SunSectors> sectors(const Window& block,
                                                            std::size_t first_band,
                                                            std::size_t bands,
                                                            const LightField& light, int thread);

  private:
    struct Key {
        long column = 0, row = 0;
        std::size_t first_band = 0;
        friend auto operator<=>(const Key&, const Key&) = default;
    };
    struct Entry {
        std::once_flag once;
        std::shared_ptr<const SunSectors> sectors;
        std::size_t bytes = 0;  ///< 0 until they are sorted
    };
    void make_room(const Key& key, Entry& added);

    const Terrain& terrain_;
    const Grid& grid_;
    double middle_height_m_;
    long region_px_ = 256;
    std::unique_ptr<HeightLevels> levels_;
    std::mutex mutex_;
    std::map<Key, std::shared_ptr<Entry>> regions_;
    std::deque<Key> oldest_first_;
    std::size_t kept_bytes_ = 0;
};

/// What terrain makes of the light of one block.
struct ShadedBlock {
    Window block;
    bool located = false;  ///< false: the projection has no place for it, nothing below is set
    Plane<float> east, north, up;  ///< unit normals
    Plane<float> sky_view;         ///< empty unless asked for
    std::size_t first_band = 0;
    /// By band, over the reference place, on the inclined surface: beam, light from around the sun, and
    /// hours in the sun.
    std::vector<Plane<float>> beam, around, hours;
    std::vector<WholeSun> whole;  ///< by band, of the reference place
};

/// One thread's horizons and shadows, block by block.
class BlockShader {
  public:
    BlockShader(SharedTerrain& shared, const LightField* light, const Locator& locator, int thread);
    ~BlockShader();

    /// Slopes, sky view and the shaded sums of some bands (none: slopes and sky view alone).
    ///
    /// block   at most 256 pixels a side, inside one block of the lattice
    void shade(const Window& block, std::size_t first_band, std::size_t bands, bool sky_view,
               ShadedBlock& out);

    /// Heights of a window as the run has them; NaN where there is no ground.
    void heights(const Window& window, Plane<float>& heights_m);
    /// From now on tells the probe the horizons of its pixel; it must outlive the shader.
    void watch(Probe& probe);
    [[nodiscard]] std::uint64_t infinities() const;

  private:
    struct State;
    std::unique_ptr<State> state_;
};

/// The parts of a block of the lattice inside which the grid's north turns by little: the block itself,
/// but for the surroundings of a pole.
[[nodiscard]] std::vector<Window> steady_parts(const Window& block, const Locator& locator);

}  // namespace sunbudget
