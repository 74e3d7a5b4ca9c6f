#pragma once

#include "sunbudget/engine/execute.hpp"
#include "sunbudget/tables/quality.hpp"

namespace sunbudget {

/// Pixels for which a meaning of the quality layer holds.
[[nodiscard]] inline std::uint64_t pixels_of(const QualityRow& row, const Execution& execution) {
    std::uint64_t pixels = 0;
    for (const auto& [flag, count] : execution.flags)
        if ((flag & row.mask) == row.value) pixels += count;
    return pixels;
}

}  // namespace sunbudget
