#pragma once

#include <filesystem>
#include <string>
#include <vector>

#include "sunbudget/base/error.hpp"
#include "sunbudget/plan/plan.hpp"

namespace sunbudget::test {

[[nodiscard]] std::string text_of_file(const std::filesystem::path& file);
/// What the parser says is wrong; empty for a good plan.
[[nodiscard]] std::vector<Problem> problems_of(const PlanText& plan);
/// The plan of that text, in a file plan.yaml of the folder /plans.
[[nodiscard]] Plan plan_of(const std::string& text, const std::vector<Override>& overrides = {});

/// The plan's numbers of the sky's turbidity, by month.
[[nodiscard]] inline Monthly turbidity_of(const Plan& plan) {
    return std::get<Monthly>(**plan.sky[SkyParameter::turbidity]);
}

/// A good plan of four lines, without time; tests add to it.
inline const std::string small_plan =
    "sunbudget: 1\n"
    "surface: {albedo: {value: 0.2}}\n"
    "grid: {crs: EPSG:32633, bounds: [0, 0, 300, 300], cell: 30}\n"
    "outputs: {layers: [albedo]}\n";

}  // namespace sunbudget::test
