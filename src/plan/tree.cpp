#include "tree.hpp"

#include <algorithm>
#include <array>

namespace sunbudget {

const Node* Node::find(std::string_view name) const {
    const auto found = std::ranges::find(children, name, &Node::key);
    return shape == Shape::map && found != children.end() ? &*found : nullptr;
}

Node* Node::find(std::string_view name) {
    return const_cast<Node*>(static_cast<const Node&>(*this).find(name));
}

bool Node::has(std::string_view name) const {
    const Node* child = find(name);
    return child != nullptr && !child->bad;
}

namespace {
bool all_of_text(std::string_view text, std::string_view allowed) {
    return !text.empty() && text.find_first_not_of(allowed) == text.npos;
}

// Octal, hexadecimal and not-a-number: numbers to YAML, none to us.
bool odd_number(std::string_view text) {
    if (text.starts_with("0x")) return all_of_text(text.substr(2), "0123456789abcdefABCDEF");
    if (text.starts_with("0o")) return all_of_text(text.substr(2), "01234567");
    if (text.starts_with('+') || text.starts_with('-')) text.remove_prefix(1);
    constexpr std::array names{".inf", ".Inf", ".INF", ".nan", ".NaN", ".NAN"};
    return std::ranges::find(names, text) != names.end();
}

// The core schema's decimal forms, which include some that no double can hold (1e999).
bool decimal_number(std::string_view text) {
    if (text.starts_with('+') || text.starts_with('-')) text.remove_prefix(1);
    const auto exponent = text.find_first_of("eE");
    if (exponent != text.npos) {
        auto digits = text.substr(exponent + 1);
        if (digits.starts_with('+') || digits.starts_with('-')) digits.remove_prefix(1);
        if (!all_of_text(digits, "0123456789")) return false;
        text = text.substr(0, exponent);
    }
    return all_of_text(text, "0123456789.") && text != "." && std::ranges::count(text, '.') <= 1;
}

// A whole paragraph in a message helps nobody.
std::string shortened(std::string text) {
    std::ranges::replace(text, '\n', ' ');
    if (text.size() <= 60) return text;
    std::size_t end = 57;
    while ((static_cast<unsigned char>(text[end]) & 0xc0u) == 0x80) --end;
    return text.substr(0, end) + "...";
}
}  // namespace

Plain plain_kind(std::string_view text) {
    constexpr std::array booleans{"true", "True", "TRUE", "false", "False", "FALSE"};
    if (std::ranges::find(booleans, text) != booleans.end()) return Plain::boolean;
    return decimal_number(text) || odd_number(text) ? Plain::number : Plain::text;
}

std::string described(const Node& node) {
    const auto count = std::to_string(node.children.size());
    switch (node.shape) {
        case Node::Shape::nothing:
            return "nothing";
        case Node::Shape::list:
            return "a list of " + count;
        case Node::Shape::map:
            return "a map of " + count + (node.children.size() == 1 ? " key" : " keys");
        case Node::Shape::scalar:
            break;
    }
    const auto text = shortened(node.text);
    if (node.quoted) return "\"" + text + "\" in quotes";
    switch (plain_kind(node.text)) {
        case Plain::number:
            return "the number " + text;
        case Plain::boolean:
            return text;
        case Plain::text:
            break;
    }
    return "\"" + text + "\"";
}

}  // namespace sunbudget
