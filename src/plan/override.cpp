#include <algorithm>
#include <array>

#include "sunbudget/base/text.hpp"
#include "tree.hpp"

namespace sunbudget {

namespace {

const std::string option = "--set";

bool means_nothing(std::string_view text) {
    constexpr std::array<std::string_view, 5> names{"", "~", "null", "Null", "NULL"};
    return std::ranges::find(names, text) != names.end();
}

std::string single_quoted(std::string_view text) {
    std::string quoted = "'";
    for (const char c : text) quoted += c == '\'' ? "''" : std::string(1, c);
    return quoted + "'";
}

void place_below(Node& node, const std::string& path) {
    node.place = {option, 0, path};
    int item = 0;
    for (auto& child : node.children)
        place_below(child, node.shape == Node::Shape::map
                               ? path + "." + child.key
                               : path + "[" + std::to_string(++item) + "]");
}

// A colon, a hash or a leading word must not change what a value on the command line means: only
// lists, maps and quoted texts are YAML, everything else stands for itself.
Node value_of(std::string_view text, Mistakes& mistakes) {
    const bool is_yaml = !text.empty() && std::string_view("[{\"'").find(text.front()) != text.npos;
    Node node = read_tree(option, is_yaml ? std::string(text) : single_quoted(text), mistakes);
    if (is_yaml) return node;
    node.quoted = false;
    if (means_nothing(text)) node.shape = Node::Shape::nothing;
    return node;
}

Node& child_of(Node& map, const std::string& name) {
    if (Node* child = map.find(name)) return *child;
    Node child;
    child.key = name;
    child.place = {option, 0, map.place.key.empty() ? name : map.place.key + "." + name};
    map.children.push_back(std::move(child));
    return map.children.back();
}

}  // namespace

void apply_override(Node& root, const Override& change, Mistakes& mistakes) {
    const auto equals = change.find('=');
    const std::string path(trimmed(std::string_view(change).substr(0, equals)));
    const Place place{option, 0, path};
    const auto names = split(path, '.');
    if (equals == change.npos || std::ranges::find(names, "") != names.end())
        return mistakes.add({option, 0, change}, "this names no key and value",
                            "write --set key.path=value, such as --set sky.turbidity=3.5");
    try {
        Node value = value_of(trimmed(std::string_view(change).substr(equals + 1)), mistakes);
        place_below(value, path);
        Node* node = &root;
        for (const auto& name : names) {
            if (node->shape == Node::Shape::nothing) node->shape = Node::Shape::map;
            if (node->shape != Node::Shape::map)
                return mistakes.add(place,
                                    "there is " + described(*node) + " on the way to this key",
                                    "set it as a whole with --set " + node->place.key + "=...");
            node = &child_of(*node, name);
        }
        value.key = names.back();
        *node = std::move(value);
    } catch (const Error& error) {
        mistakes.add(place, error.problems().front().what, error.problems().front().todo);
    }
}

}  // namespace sunbudget
