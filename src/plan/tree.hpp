#pragma once

#include <string>
#include <string_view>
#include <vector>

#include "mistakes.hpp"
#include "sunbudget/plan/plan.hpp"

namespace sunbudget {

/// What a scalar written without quotes is, after YAML 1.2's core schema.
enum class Plain { text, number, boolean };

/// A plan file before anybody asks what its keys mean.
struct Node {
    enum class Shape { nothing, scalar, list, map };
    Shape shape = Shape::nothing;
    std::string key;   ///< the name under which its map has it; empty in a list
    std::string text;  ///< of a scalar
    bool quoted = false;
    bool bad = false;  ///< a problem with it has been reported: skip it
    Place place;
    std::vector<Node> children;  ///< of a list or a map, in the file's order

    [[nodiscard]] const Node* find(std::string_view name) const;
    [[nodiscard]] Node* find(std::string_view name);
    /// Is there, and nothing is wrong with it.
    [[nodiscard]] bool has(std::string_view name) const;
};

[[nodiscard]] Plain plain_kind(std::string_view text);
/// `the number 3`, `"3" in quotes`, `a list of 2`: for messages.
[[nodiscard]] std::string described(const Node& node);

/// Reads the one document of a plan. Reports duplicate keys, anchors, aliases and tags; throws at
/// once when the text is no YAML, no UTF-8, has two documents, or goes beyond the caps of
/// 1 MiB, 100,000 values, 1,000 keys in a map and 32 levels.
[[nodiscard]] Node read_tree(const std::string& file, std::string text, Mistakes& mistakes);

/// Puts `key.path=value` into the tree; maps on the way are made where they are missing.
void apply_override(Node& root, const Override& change, Mistakes& mistakes);

}  // namespace sunbudget
