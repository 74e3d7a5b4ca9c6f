#include <algorithm>
#include <cmath>

#include "sunbudget/model/shading.hpp"

namespace sunbudget {

namespace {

/// Suns are sorted once for a square of this size: over half of it, 0.1 degrees of the sun's height, the
/// light itself is corrected to the pixel's own place.
constexpr double region_m = 20000;
/// Sorted suns that are kept: regions are visited one after the other, and twelve monthly tables of one
/// take 8 MB.
constexpr std::size_t sectors_kept_bytes = std::size_t{48} << 20;

double side_m(const PixelMatrix& matrix) {
    return std::max(length_of_m(matrix, 1, 0), length_of_m(matrix, 0, 1));
}

/// Mean height of pixels spread evenly over the grid; 0 where none of them has one.
double mean_height_m(const Terrain& terrain, const Grid& grid) {
    constexpr long samples = 16;
    ElevationReader reader(terrain);
    Plane<float> height_m;
    double sum = 0, count = 0;
    for (long r = 0; r < samples; ++r)
        for (long c = 0; c < samples; ++c) {
            reader.read({(2 * c + 1) * grid.width / (2 * samples),
                         (2 * r + 1) * grid.height / (2 * samples), 1, 1},
                        height_m);
            if (std::isnan(height_m.at(0, 0))) continue;
            sum += static_cast<double>(height_m.at(0, 0));
            ++count;
        }
    return count > 0 ? sum / count : 0;
}

}  // namespace

SharedTerrain::SharedTerrain(const Terrain& terrain, const Grid& grid,
                             const std::filesystem::path& scratch_folder)
    : terrain_(terrain), grid_(grid), middle_height_m_(mean_height_m(terrain, grid)) {
    const Locator locator(grid);
    double step_m = 1e30, cell_m = 0;
    // The finest cells of the grid decide how many levels the reach takes.
    for (const double u : {0.02, 0.5, 0.98})
        for (const double v : {0.02, 0.5, 0.98})
            if (const auto matrix = locator.matrix(u * grid.width, v * grid.height)) {
                step_m = std::min({step_m, length_of_m(*matrix, 1, 0), length_of_m(*matrix, 0, 1)});
                cell_m = std::max(cell_m, side_m(*matrix));
            }
    if (cell_m == 0) step_m = cell_m = terrain.sight.reach_m;
    while (region_px_ < 4096 && static_cast<double>(region_px_) * 2 * cell_m <= region_m)
        region_px_ *= 2;
    const int levels = std::min(levels_for(step_m, terrain.sight), HeightLevels::most_levels);
    levels_ = std::make_unique<HeightLevels>(terrain.elevation, grid, levels, step_m, terrain.sight,
                                             scratch_folder);
}
SharedTerrain::~SharedTerrain() = default;

std::shared_ptr<const SunSectors> SharedTerrain::sectors(const Window& block,
                                                         std::size_t first_band, std::size_t bands,
                                                         const LightField& light, int thread) {
    const Key key{block.column / region_px_, block.row / region_px_, first_band};
    std::shared_ptr<Entry> entry;
    {
        const std::lock_guard hold(mutex_);
        auto& found = regions_[key];
        if (!found) {
            found = std::make_shared<Entry>();
            oldest_first_.push_back(key);
        }
        entry = found;
    }
    std::call_once(entry->once, [&] {
        const long column =
            std::min(key.column * region_px_ + region_px_ / 2, static_cast<long>(grid_.width - 1));
        const long row =
            std::min(key.row * region_px_ + region_px_ / 2, static_cast<long>(grid_.height - 1));
        // A region in the middle of which the projection has no place takes the block's own.
        const auto middle = light.locator(thread).at(static_cast<double>(column) + 0.5,
                                                     static_cast<double>(row) + 0.5);
        const auto place =
            middle ? middle
                   : light.locator(thread).at(static_cast<double>(block.column) + block.width / 2.0,
                                              static_cast<double>(block.row) + block.height / 2.0);
        entry->sectors = std::make_shared<const SunSectors>(light.point(), *place, middle_height_m_,
                                                            first_band, bands, terrain_.directions);
        make_room(key, *entry);
    });
    return entry->sectors;
}

/// Makes room for a new entry's suns. Whoever works with forgotten ones still holds them.
void SharedTerrain::make_room(const Key& key, Entry& added) {
    const std::lock_guard hold(mutex_);
    if (const auto found = regions_.find(key);
        found == regions_.end() || found->second.get() != &added)
        return;
    added.bytes = added.sectors->bytes();
    for (kept_bytes_ += added.bytes;
         kept_bytes_ > sectors_kept_bytes && oldest_first_.size() > 1;) {
        const auto oldest = regions_.find(oldest_first_.front());
        kept_bytes_ -= oldest->second->bytes;
        regions_.erase(oldest);
        oldest_first_.pop_front();
    }
}

}  // namespace sunbudget
