#pragma once

#include <span>
#include <vector>

#include "sunbudget/base/plane.hpp"
#include "sunbudget/physics/direction.hpp"

namespace sunbudget {

/// Stands for "no ground here" in patches: so low that no look is ever stopped by it, not even
/// after interpolation with a neighbour, and a number, so that a maximum needs no test for NaN.
inline constexpr float no_ground_m = -1e30F;

[[nodiscard]] constexpr bool is_ground(float height_m) noexcept {
    return height_m > -1e29F;
}

/// Pixels seen at full resolution, along the direction's larger step; further away, levels. Every
/// doubling of the distance moves to the next level, again steps 33 to 64 of its cells.
inline constexpr int near_steps = 64;

/// Full-resolution heights of a block and what stands around it.
struct HeightPatch {
    Window window;                ///< in pixels of the raster
    Plane<float> height_m;        ///< of the window's size; no_ground_m where there is none
    Plane<float> tile_maximum_m;  ///< of 16 x 16 pixels each, from the window's corner

    /// Greatest height in a window of pixels of the patch (counted from its corner, clipped to it),
    /// or of a few pixels more around it.
    [[nodiscard]] float highest_m(Window pixels) const noexcept;
};

/// The patch that a block's near horizons need: near_steps pixels more on every side.
[[nodiscard]] Window patch_window(Window block) noexcept;

/// Takes heights with NaN where there is no ground (outside the raster too).
[[nodiscard]] HeightPatch make_height_patch(Window window, Plane<float> height_m);

/// Cells of one level around a block.
struct LevelPatch {
    int level = 1;
    Window window;  ///< in cells of the level
    Plane<float>
        sight_m;  ///< the height that stops a look: the maximum, less an even slope's part in it
    /// Two heights from which eyes look, for the cells of observer_window(block, level) only;
    /// low_m < high_m.
    Plane<float> low_m;
    Plane<float> high_m;
};

/// Cells from which a block is looked at, at a level: those whose values its pixels interpolate,
/// directly (level 1) or through the levels below.
[[nodiscard]] Window observer_window(Window block, int level) noexcept;

/// Cells that a level's patch must hold for a block: the observers', near_steps around them, and
/// two more whose only use is to be the neighbours of the rest.
[[nodiscard]] Window level_window(Window block, int level) noexcept;

/// Takes maxima and means of a level_window with NaN where there is no ground (outside the raster too).
[[nodiscard]] LevelPatch make_level_patch(int level, Window window, const Plane<float>& maximum_m,
                                          const Plane<float>& mean_m);

/// Levels a reach asks for; 0 where near_steps steps of this length go further.
[[nodiscard]] int levels_for(double step_m, const Sight& sight) noexcept;

}  // namespace sunbudget
