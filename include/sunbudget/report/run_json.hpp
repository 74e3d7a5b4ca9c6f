#pragma once

#include <filesystem>
#include <string>
#include <vector>

#include "sunbudget/engine/execute.hpp"
#include "sunbudget/model/run.hpp"

namespace sunbudget {

/// run.json: what was computed, from which files, by which methods, and what came out. Holds no
/// clock, host or folder, so that equal runs give equal text.
[[nodiscard]] std::string run_json(const Run& run, const Execution& execution);

/// What tells one run from another: the plan, the content of its inputs, the program's version.
[[nodiscard]] std::string run_digest(const Run& run);
/// The digest that a folder's run.json holds; empty when there is none.
[[nodiscard]] std::string recorded_run_digest(const std::filesystem::path& folder);

/// A short account for people, one line each: the means of each layer, pixels without value and why.
[[nodiscard]] std::vector<std::string> summary(const Run& run, const Execution& execution);

/// What has to be said when all is done: that nearly nothing came out, and why.
[[nodiscard]] std::vector<std::string> closing_warnings(const Run& run, const Execution& execution);

}  // namespace sunbudget
