#pragma once

#include <vector>

#include "sunbudget/physics/quality_bits.hpp"
#include "sunbudget/raster/source.hpp"

namespace sunbudget {

/// A quality raster of an image and what its codes mean.
struct QualityRaster {
    Source codes;
    std::vector<QualityBits> tests;
    RejectReason missing = not_rejected;  ///< for pixels without a code
};

}  // namespace sunbudget
