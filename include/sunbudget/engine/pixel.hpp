#pragma once

#include <cstdint>
#include <optional>
#include <string>
#include <vector>

#include "sunbudget/engine/execute.hpp"
#include "sunbudget/model/probe.hpp"
#include "sunbudget/raster/locator.hpp"

namespace sunbudget {

/// What one input raster gave one pixel.
struct InputPixel {
    const InputFile* file = nullptr;
    std::optional<PixelPlace>
        place;  ///< of the pixel's middle in the file; nothing where it lies beside it
    std::optional<double>
        raw;  ///< the file's own number under the middle; nothing where it means no data
    std::optional<double> value;  ///< as the run takes it: scaled, resampled; a code for classes
};

/// All a run makes of one pixel.
struct PixelAccount {
    Probe probe;
    std::optional<Geodetic> place;  ///< of the pixel's middle
    std::vector<InputPixel> inputs;
    std::vector<std::vector<double>>
        layers;  ///< as stored, by layer and band; NaN where there is no value
    std::uint16_t quality = 0;
};

/// Computes the block of the run's lattice that holds a pixel, by the very functions of a run, and
/// keeps what it made of that pixel. The figures are those of the run's files.
///
/// in      column, row  inside the grid
/// errors  those of execute(); Error(output) when there is no room for scratch files
[[nodiscard]] PixelAccount account_of(const Run& run, long column, long row);

}  // namespace sunbudget
