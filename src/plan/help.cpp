#include "keys.hpp"
#include "sunbudget/base/text.hpp"
#include "sunbudget/plan/plan.hpp"

namespace sunbudget {

namespace {

void print_keys(const std::vector<Key>& keys, const std::string& indent, std::string& text);

std::string rule_text(const Rule& rule) {
    if (rule.type == Rule::Type::exactly_one) return "exactly one of: " + joined(rule.keys, ", ");
    if (rule.type == Rule::Type::at_most_one) return "at most one of: " + joined(rule.keys, ", ");
    const std::vector<std::string> others(rule.keys.begin() + 1, rule.keys.end());
    return rule.keys[0] + " needs " + joined(others, ", ");
}

void print_map(const Form& form, const std::string& indent, std::string& text) {
    for (const auto& rule : form.rules) text += indent + "# " + rule_text(rule) + "\n";
    print_keys(form.keys, indent, text);
}

void print_key(const Key& key, const std::string& indent, std::string& text) {
    auto doc = key.doc;
    if (key.required) doc += "; required";
    if (!key.default_text.empty()) doc += "; default: " + key.default_text;
    text += indent + "# " + doc + "\n" + indent + key.name + ":";
    for (const auto& form : key.forms)
        if (form.kind == ValueKind::map) {
            text += "\n";
            return print_map(form, indent + "  ", text);
        }
    text += " " + expected(key.forms) + "\n";
    for (const auto& form : key.forms)
        if (form.kind == ValueKind::list && form.items.front().kind == ValueKind::map)
            print_map(form.items.front(), indent + "  ", text);
}

void print_keys(const std::vector<Key>& keys, const std::string& indent, std::string& text) {
    for (const auto& key : keys) print_key(key, indent, text);
}

}  // namespace

std::string plan_help() {
    std::string text =
        "# The keys of a plan file (YAML 1.2 without anchors, aliases and tags). Paths are "
        "relative\n"
        "# to the plan file; PATH:N or PATH:NAME picks a band of a raster.\n";
    print_map(plan_form(), "", text);
    return text;
}

}  // namespace sunbudget
