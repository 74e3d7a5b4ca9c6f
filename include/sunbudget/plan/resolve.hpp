#pragma once

#include <cstdint>
#include <filesystem>

#include "sunbudget/model/run.hpp"
#include "sunbudget/plan/plan.hpp"

namespace sunbudget {

struct ResolveOptions {
    int threads = 1;
    std::uint64_t memory_bytes = std::uint64_t{1} << 30;
    /// Count the classes of every pixel (a run, `check --full`), or of a sample of blocks (`check`).
    bool scan_everything = true;
    /// The one file that is written, where it is not a folder of them.
    std::filesystem::path single_file{};
};

/// Opens and checks everything a plan names and fixes the run.
///
/// errors  Error(usage) or Error(input) with every problem that could be found, each with the plan's
///         file, line and key
[[nodiscard]] Run resolve(const Plan& plan, const ResolveOptions& options);

}  // namespace sunbudget
