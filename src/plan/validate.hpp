#pragma once

#include "keys.hpp"
#include "tree.hpp"

namespace sunbudget {

/// Holds the tree against the table of keys; reports what does not fit and marks it bad.
void validate(Node& root, Mistakes& mistakes);

}  // namespace sunbudget
