#include "validate.hpp"

#include <algorithm>

#include "scalars.hpp"
#include "sunbudget/base/text.hpp"

namespace sunbudget {

namespace {

bool fits_shape(const Form& form, Node::Shape shape) {
    if (form.kind == ValueKind::map) return shape == Node::Shape::map;
    if (form.kind == ValueKind::list) return shape == Node::Shape::list;
    return shape == Node::Shape::scalar;
}

class Validator {
  public:
    explicit Validator(Mistakes& mistakes) : mistakes_(mistakes) {}
    void value(Node& node, const std::vector<Form>& forms);

  private:
    void map(Node& node, const Form& form);
    void list(Node& node, const Form& form);
    void scalar(Node& node, const std::vector<Form>& forms);
    void required_keys(const Node& node, const Form& form);
    void rules(const Node& node, const Form& form);
    bool needs(const Node& node, const std::vector<std::string>& keys);
    void refuse(Node& node, const std::string& what, const std::string& todo = {}) {
        node.bad = true;
        mistakes_.add(node.place, what, todo);
    }

    Mistakes& mistakes_;
};

void Validator::value(Node& node, const std::vector<Form>& forms) {
    if (node.bad) return;
    const auto fits = [&](const Form& form) { return fits_shape(form, node.shape); };
    const auto form = std::ranges::find_if(forms, fits);
    if (form == forms.end())
        return refuse(node, "found " + described(node) + ", expected " + expected(forms));
    if (node.shape == Node::Shape::scalar) return scalar(node, forms);
    node.shape == Node::Shape::map ? map(node, *form) : list(node, *form);
}

// The advice of the first form that has any: forms that read text as a name come before paths.
void Validator::scalar(Node& node, const std::vector<Form>& forms) {
    std::vector<Mismatch> found;
    for (const auto& form : forms) {
        if (!fits_shape(form, Node::Shape::scalar)) continue;
        auto against = mismatch(node, form);
        if (!against) return;
        // A length or number out of range is no file of that name.
        if (read_quantity(node, form.kind) ||
            (form.kind == ValueKind::number && parse_number(node.text)))
            return refuse(node, against->what, against->todo);
        found.push_back(std::move(*against));
    }
    if (forms.size() == 1) return refuse(node, found.front().what, found.front().todo);
    const auto advice = std::ranges::find_if(found, [](const auto& f) { return !f.todo.empty(); });
    refuse(node, "found " + described(node) + ", expected " + expected(forms),
           advice == found.end() ? "" : advice->todo);
}

void Validator::map(Node& node, const Form& form) {
    const auto names = names_of(form.keys);
    for (auto& child : node.children) {
        const auto key = std::ranges::find(form.keys, child.key, &Key::name);
        if (key == form.keys.end())
            refuse(child, "there is no key \"" + child.key + "\"", suggestion(child.key, names));
        else
            value(child, key->forms);
    }
    required_keys(node, form);
    rules(node, form);
}

void Validator::required_keys(const Node& node, const Form& form) {
    for (const auto& key : form.keys)
        if (key.required && node.find(key.name) == nullptr)
            mistakes_.add(node.place, "the key \"" + key.name + "\" is missing",
                          "add " + key.name + ": " + expected(key.forms));
}

void Validator::rules(const Node& node, const Form& form) {
    bool lacks = false;
    for (const auto& rule : form.rules)
        if (rule.type == Rule::Type::needs) lacks = needs(node, rule.keys) || lacks;
    for (const auto& [type, keys] : form.rules) {
        if (type == Rule::Type::needs) continue;
        const auto count = std::ranges::count_if(
            keys, [&](const std::string& name) { return node.find(name) != nullptr; });
        if (count > 1)
            mistakes_.add(node.place, joined(keys, " and ") + " exclude each other",
                          "keep one of them");
        // Whoever wrote "to" meant "from": one problem is enough.
        if (count == 0 && type == Rule::Type::exactly_one && !lacks)
            mistakes_.add(node.place, "neither " + joined(keys, " nor ") + " is given",
                          "add one of them");
    }
}

bool Validator::needs(const Node& node, const std::vector<std::string>& keys) {
    const Node* one = node.find(keys.front());
    if (one == nullptr) return false;
    bool lacks = false;
    for (std::size_t i = 1; i < keys.size(); ++i) {
        if (node.find(keys[i]) != nullptr) continue;
        lacks = true;
        mistakes_.add(one->place, "\"" + keys[0] + "\" is given without \"" + keys[i] + "\"",
                      "add " + keys[i] + " or remove " + keys[0]);
    }
    return lacks;
}

// A list is good as a whole or not at all.
void Validator::list(Node& node, const Form& form) {
    const auto problems_before = mistakes_.count();
    const auto count = static_cast<double>(node.children.size());
    if (count < *form.min || count > form.max.value_or(count))
        refuse(node, "found " + described(node) + ", expected " + expected(form));
    for (auto& item : node.children) {
        value(item, form.items);
        if (!form.distinct || item.bad) continue;
        const auto first = std::ranges::find(node.children, item.text, &Node::text);
        if (&*first != &item)
            refuse(item, "\"" + item.text + "\" is listed twice", "keep one of the two");
    }
    node.bad = mistakes_.count() > problems_before;
}

}  // namespace

void validate(Node& root, Mistakes& mistakes) {
    Validator(mistakes).value(root, {plan_form()});
}

}  // namespace sunbudget
