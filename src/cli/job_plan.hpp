#pragma once

#include <string>
#include <utility>
#include <vector>

#include "context.hpp"

namespace sunbudget {

/// What the flags of a one-line job say; each fills a key of a plan.
struct JobFlags {
    std::string cover, classes, default_class, albedo, elevation, like;
    std::vector<std::string> bands;
    std::string sensor, product, scene, quality;
    std::string at, from, to, step, hours, zone, totals, turbidity, unit;
    std::string out;
    std::vector<std::string> set;
    RunFlags run;
    Common common;
};

/// "blue=F,red=F": NAME=FILE, and a piece without a name belongs to the file before it.
[[nodiscard]] std::vector<std::pair<std::string, std::string>> named_bands(
    const std::vector<std::string>& flags);

/// The plan that the flags of a job for `layer` stand for. Throws Error(usage) as parse_plan does.
[[nodiscard]] Plan plan_of(const JobFlags& flags, const std::string& layer);
/// The plan as it reads in the file it will be saved in. Its output folder is left to the default: a
/// whole run writes more than one file, and shall not do so where a job put its one.
[[nodiscard]] Plan saved_plan(Plan plan, const std::string& file);
/// The same error with flags for the keys of a plan that the user never saw.
[[nodiscard]] Error in_flags(const Error& error);

}  // namespace sunbudget
