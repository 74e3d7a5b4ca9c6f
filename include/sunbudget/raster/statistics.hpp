#pragma once

#include <cstdint>
#include <limits>
#include <span>

namespace sunbudget {

/// Figures of the valid pixels of one block of the run's fixed lattice (256 x 256 pixels).
struct BlockStatistics {
    std::uint64_t count = 0;
    double min = std::numeric_limits<double>::infinity();
    double max = -std::numeric_limits<double>::infinity();
    double mean = 0;
    double squares = 0;  ///< sum of squared differences from the mean

    friend bool operator==(const BlockStatistics&, const BlockStatistics&) = default;
};

/// Takes in one row of a block; a block's rows come from top to bottom, each whole.
///
/// nodata  NaN pixels are not counted
/// errors  none
/// source  pairwise update of mean and squares: Chan, Golub & LeVeque (1983), Am. Stat. 37, 242
void add_row(BlockStatistics& block, std::span<const float> row) noexcept;

/// The figures of a band, as they stand in its file.
struct BandStatistics {
    std::uint64_t count = 0;   ///< valid pixels
    std::uint64_t pixels = 0;  ///< all pixels of the raster
    double min = 0;            ///< this and the following have no meaning when count is 0
    double max = 0;
    double mean = 0;
    double stddev = 0;  ///< of the population, as GDAL states it

    friend bool operator==(const BandStatistics&, const BandStatistics&) = default;
};

/// The blocks of a band, row of blocks by row of blocks. The order fixes the last bits: given so,
/// the figures do not depend on threads, tiles or parts.
[[nodiscard]] BandStatistics combined(std::span<const BlockStatistics> blocks,
                                      std::uint64_t pixels) noexcept;

}  // namespace sunbudget
