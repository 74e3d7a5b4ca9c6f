#include "ground.hpp"

#include <algorithm>
#include <limits>
#include <numbers>

#include "planes.hpp"
#include "sunbudget/model/neighbourhood.hpp"
#include "sunbudget/physics/gradient.hpp"
#include "sunbudget/physics/height_patch.hpp"

namespace sunbudget {

std::vector<Window> blocks_of(const Window& window) {
    std::vector<Window> blocks;
    for (int row = 0; row < window.height; row += block_px)
        for (int column = 0; column < window.width; column += block_px)
            blocks.push_back({window.column + column, window.row + row,
                              std::min(block_px, window.width - column),
                              std::min(block_px, window.height - row)});
    return blocks;
}

void Ground::read(const Window& where, bool uncertainty) {
    window = where;
    blocks = blocks_of(window);
    surface_.read(window, albedo, flags);
    if (uncertainty) surface_.uncertainty(window, albedo, flags, albedo_uncertainty);
}

void Ground::see_albedo(Beside& beside) {
    fit(albedo_seen, window);
    if (!run_.has_surface()) {
        albedo_seen.fill(static_cast<float>(albedo_where_unknown));
        beside.see(static_cast<float>(albedo_where_unknown));
        return;
    }
    Plane<float> around;
    Plane<std::uint16_t> unused;
    for (const auto& block : blocks) {
        surface_.read(patch_window(block), around, unused);
        const auto mean = mean_around(around, near_steps);
        for (int r = 0; r < block.height; ++r)
            std::ranges::copy(mean.row(r), over(albedo_seen, window, block, r).begin());
        beside.see(block, window, around, mean);
    }
}

void Ground::forget_planes() {
    for (auto* plane : {&sky_view, &slope_deg, &aspect_deg}) {
        fit(*plane, window);
        plane->fill(std::numeric_limits<float>::quiet_NaN());
    }
}

void Ground::keep(const ShadedBlock& part) {
    constexpr auto deg = static_cast<float>(180 / std::numbers::pi);
    for (int r = 0; r < part.block.height; ++r) {
        const auto slope = over(slope_deg, window, part.block, r),
                   aspect = over(aspect_deg, window, part.block, r);
        slope_and_aspect(part.east.row(r), part.north.row(r), part.up.row(r), slope, aspect);
        for (auto& value : slope) value *= deg;
        for (auto& value : aspect) {
            value *= deg;
            // North is 0, also for what the stored step would round up to 360.
            if (value > 360 - 1.0F / 128) value = 0;
        }
        if (!part.sky_view.empty())
            std::ranges::copy(part.sky_view.row(r), over(sky_view, window, part.block, r).begin());
    }
}

}  // namespace sunbudget
