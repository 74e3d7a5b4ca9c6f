#pragma once

#include "mistakes.hpp"
#include "sunbudget/plan/plan.hpp"
#include "tree.hpp"

namespace sunbudget {

/// The typed plan from a tree that `validate` has seen; what it marked bad is left out.
[[nodiscard]] Plan fill_plan(const std::string& file, const Node& root);

/// What no single value shows: the order of dates, layers without what they need.
void cross_check(const Plan& plan, const Node& root, Mistakes& mistakes);

}  // namespace sunbudget
