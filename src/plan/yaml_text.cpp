#include "yaml_text.hpp"

#include <algorithm>
#include <array>
#include <string_view>
#include <utility>
#include <vector>

#include "sunbudget/base/text.hpp"

namespace sunbudget {

namespace {

// Only what no YAML reader, old or new, could take for anything but this text goes without quotes.
bool is_plain(std::string_view text) {
    constexpr std::array<std::string_view, 10> words{"null", "true", "false", "yes", "no",
                                                     "on",   "off",  "y",     "n",   "~"};
    const auto is_safe = [](char c) {
        return std::isalnum(static_cast<unsigned char>(c)) != 0 ||
               static_cast<unsigned char>(c) >= 0x80 ||
               std::string_view(" _./+-:").find(c) != std::string_view::npos;
    };
    if (text.empty() || !std::ranges::all_of(text, is_safe)) return false;
    if (std::string_view(" +-:").find(text.front()) != text.npos) return false;
    if (text.back() == ' ' || text.back() == ':' || text.find(": ") != text.npos) return false;
    return plain_kind(text) == Plain::text &&
           std::ranges::find(words, lower_case(text)) == words.end();
}

std::string double_quoted(std::string_view text) {
    std::string quoted = "\"";
    for (const char c : text) {
        if (c == '"' || c == '\\') quoted += '\\';
        quoted += c;
    }
    return quoted + "\"";
}

std::string flow(const Node& node) {
    if (node.shape == Node::Shape::scalar)
        return node.quoted ? double_quoted(node.text) : node.text;
    std::vector<std::string> parts;
    for (const auto& child : node.children)
        parts.push_back((child.key.empty() ? "" : child.key + ": ") + flow(child));
    const auto inside = joined(parts, ", ");
    return node.shape == Node::Shape::list ? "[" + inside + "]" : "{" + inside + "}";
}

void print(const Node& map, const std::string& indent, std::string& text) {
    for (const auto& child : map.children) {
        text += indent + child.key + ":";
        if (child.shape == Node::Shape::map) {
            text += "\n";
            print(child, indent + "  ", text);
        } else if (!child.children.empty() && child.children[0].shape == Node::Shape::map) {
            text += "\n";
            for (const auto& item : child.children) text += indent + "  - " + flow(item) + "\n";
        } else {
            text += " " + flow(child) + "\n";
        }
    }
}

}  // namespace

Node scalar(std::string text, bool quoted) {
    Node node;
    node.shape = Node::Shape::scalar;
    node.text = std::move(text);
    node.quoted = quoted;
    return node;
}

Node text_node(std::string text) {
    const bool quoted = !is_plain(text);
    return scalar(std::move(text), quoted);
}

Node number_node(double value) {
    return scalar(shortest(value), false);
}

std::string yaml_of(const Node& map) {
    std::string text;
    print(map, "", text);
    return text;
}

}  // namespace sunbudget
