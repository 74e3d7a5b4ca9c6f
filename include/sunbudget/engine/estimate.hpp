#pragma once

#include <cstdint>

#include "sunbudget/engine/execute.hpp"

namespace sunbudget {

/// What a run will take, from a few windows computed for the purpose.
struct Estimate {
    int windows = 0;  ///< computed as a sample
    double seconds = 0;
    std::uint64_t memory_bytes = 0;
    std::uint64_t output_bytes = 0;   ///< of the finished files
    std::uint64_t scratch_bytes = 0;  ///< beside them while the run goes on
};

/// Reads, computes and encodes a few dozen windows at most, spread over the grid, and scales up.
[[nodiscard]] Estimate estimate(const Run& run, const EngineOptions& options);

}  // namespace sunbudget
