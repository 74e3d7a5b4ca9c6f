#pragma once

#include <filesystem>
#include <memory>
#include <vector>

#include "sunbudget/model/elevation.hpp"
#include "sunbudget/physics/direction.hpp"
#include "sunbudget/physics/height_patch.hpp"

namespace sunbudget {

/// Coarser levels of the elevation on the run's lattice, made in pieces as they are asked for and kept
/// in one scratch file a level. Shared by all threads.
class HeightLevels {
  public:
    /// Levels 1 to `levels` around the grid, as far as `sight` reaches and the rasters lie.
    ///
    /// errors  Error(output) when the scratch files cannot be written
    HeightLevels(std::span<const Source> sources, const Grid& grid, int levels, double step_m,
                 const Sight& sight, const std::filesystem::path& scratch_folder);
    ~HeightLevels();

    [[nodiscard]] int levels() const;
    /// What a block's far horizons need, level by level. `reader` is the calling thread's own.
    [[nodiscard]] std::vector<LevelPatch> patches(const Window& block, ElevationReader& reader);

    /// The greatest number of levels there can be: pieces of this size are made at once.
    static constexpr int most_levels = 11;

  private:
    struct Store;
    std::unique_ptr<Store> store_;
};

}  // namespace sunbudget
