#include "cloud_index.hpp"

#include <algorithm>
#include <limits>

#include "planes.hpp"
#include "sunbudget/physics/cloudy_sky.hpp"

namespace sunbudget {

CloudIndex::CloudIndex(const Run& run) : run_(run) {
    for (const auto& raster : run.light.rasters) readers_.emplace_back(raster);
}

void CloudIndex::read(const Window& window, std::size_t first_band, std::size_t bands) {
    if (empty()) return;
    index_.resize(bands);
    for (std::size_t i = 0; i < bands; ++i) {
        fit(index_[i], window);
        readers_[std::min(first_band + i, readers_.size() - 1)].read(window, index_[i]);
        for (int r = 0; r < window.height; ++r)
            for (auto& value : index_[i].row(r))
                value = static_cast<float>(index_of(static_cast<double>(value), first_band + i));
    }
}

double CloudIndex::index_of(double value, std::size_t band) const {
    constexpr double none = std::numeric_limits<double>::quiet_NaN();
    // Beside bright clouds a moment may have half as much again as the clear sky, no more.
    constexpr double highest_index = 1.5;
    if (!run_.light.rasters_are_cloud) return value >= 0 && value <= highest_index ? value : none;
    if (!(value >= 0 && value <= 1)) return none;
    return run_.times->instant ? kasten_czeplak1980_index(value)
                               : 1 - (1 - run_.light.overcast[band]) * value;
}

}  // namespace sunbudget
