#pragma once

#include <string>

#include "tree.hpp"

namespace sunbudget {

// Scalars as they stand in a plan, and the text of a whole one.
[[nodiscard]] Node scalar(std::string text, bool quoted);
/// In quotes where without them it could be taken for anything else.
[[nodiscard]] Node text_node(std::string text);
[[nodiscard]] Node number_node(double value);

/// A map as YAML: maps in block style, all that is deeper in a list in flow style.
[[nodiscard]] std::string yaml_of(const Node& map);

}  // namespace sunbudget
