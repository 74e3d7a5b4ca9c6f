#include <nlohmann/json.hpp>

#include "keys.hpp"
#include "scalars.hpp"
#include "sunbudget/base/text.hpp"
#include "sunbudget/plan/plan.hpp"

namespace sunbudget {

namespace {

using Json = nlohmann::ordered_json;

Json of_forms(const std::vector<Form>& forms);

// Numbers that are whole are written so.
Json number_json(double value) {
    const auto whole = static_cast<std::int64_t>(value);
    return static_cast<double>(whole) == value ? Json(whole) : Json(value);
}

Json of_pattern(const std::string& pattern) {
    return {{"type", "string"}, {"pattern", pattern}};
}

Json of_number(const Form& form) {
    if (!form.choices.empty()) {
        Json choices = Json::array();
        for (const auto& text : form.choices) choices.push_back(number_json(*parse_number(text)));
        return {{"enum", choices}};
    }
    Json schema{{"type", form.kind == ValueKind::integer ? "integer" : "number"}};
    if (form.min) schema[form.above_min ? "exclusiveMinimum" : "minimum"] = number_json(*form.min);
    if (form.max) schema["maximum"] = number_json(*form.max);
    return schema;
}

Json of_quantity(const Form& form) {
    std::vector<std::string> names;
    for (const auto& unit : units_of(form.kind)) names.emplace_back(unit.name);
    return of_pattern(R"(^[-+]?([0-9]+(\.[0-9]*)?|\.[0-9]+) ?()" + joined(names, "|") + ")$");
}

Json of_list(const Form& form) {
    Json schema{{"type", "array"}, {"items", of_forms(form.items)}};
    schema["minItems"] = number_json(*form.min);
    if (form.max) schema["maxItems"] = number_json(*form.max);
    if (form.distinct) schema["uniqueItems"] = true;
    return schema;
}

Json of_rule(const Rule& rule) {
    if (rule.type == Rule::Type::at_most_one) return {{"not", {{"required", rule.keys}}}};
    Json ways = Json::array();
    for (const auto& key : rule.keys) ways.push_back({{"required", Json::array({key})}});
    return {{"oneOf", ways}};
}

Json of_key(const Key& key) {
    Json schema = of_forms(key.forms);
    auto description = key.doc;
    if (!key.default_text.empty()) description += "; default: " + key.default_text;
    schema["description"] = description;
    return schema;
}

Json of_map(const Form& form) {
    Json schema{{"type", "object"}, {"additionalProperties", false}};
    for (const auto& key : form.keys) {
        schema["properties"][key.name] = of_key(key);
        if (key.required) schema["required"].push_back(key.name);
    }
    for (const auto& rule : form.rules) {
        if (rule.type != Rule::Type::needs) {
            schema["allOf"].push_back(of_rule(rule));
            continue;
        }
        const std::vector<std::string> others(rule.keys.begin() + 1, rule.keys.end());
        schema["dependentRequired"][rule.keys[0]] = others;
    }
    return schema;
}

Json of_form(const Form& form) {
    // No control characters: names and paths end up in metadata and on terminals.
    const std::string printable_text = R"(^[^\u0000-\u001f\u007f]+$)";
    const std::string hour = "[0-9]{1,2}(:[0-5][0-9])?";
    switch (form.kind) {
        case ValueKind::map:
            return of_map(form);
        case ValueKind::list:
            return of_list(form);
        case ValueKind::choice:
            return {{"enum", form.choices}};
        case ValueKind::number:
        case ValueKind::integer:
            return of_number(form);
        case ValueKind::boolean:
            return {{"type", "boolean"}};
        case ValueKind::length:
        case ValueKind::duration:
        case ValueKind::temperature:
        case ValueKind::difference:
        case ValueKind::pressure:
        case ValueKind::lapse:
        case ValueKind::speed:
            return of_quantity(form);
        case ValueKind::path:
            return of_pattern(form.beside_names
                                  ? R"(^[^\u0000-\u001f\u007f]*[./][^\u0000-\u001f\u007f]*$)"
                                  : printable_text);
        case ValueKind::raster:
            return of_pattern(
                form.beside_names
                    ? R"(^(?!.*:0*$)(?=.*[./])[^:\u0000-\u001f\u007f][^\u0000-\u001f\u007f]*$)"
                    : R"(^(?!.*:0*$)[^:\u0000-\u001f\u007f][^\u0000-\u001f\u007f]*$)");
        case ValueKind::date:
            return of_pattern("^[0-9]{4}-[0-9]{2}-[0-9]{2}$");
        case ValueKind::instant:
            return of_pattern(
                R"(^[0-9]{4}-[0-9]{2}-[0-9]{2}[T ][0-9]{2}:[0-9]{2}(:[0-9]{2}(\.[0-9]+)?)?(Z|[-+][0-9]{2}:[0-9]{2})?$)");
        case ValueKind::hours:
            return of_pattern("^" + hour + "-" + hour + "$");
        case ValueKind::text:
        case ValueKind::zone:
            return of_pattern(printable_text);
    }
    return {};
}

Json of_forms(const std::vector<Form>& forms) {
    if (forms.size() == 1) return of_form(forms.front());
    Json ways = Json::array();
    for (const auto& form : forms) ways.push_back(of_form(form));
    return {{"anyOf", ways}};
}

}  // namespace

std::string plan_schema_json() {
    Json schema{
        {"$schema", "https://json-schema.org/draft/2020-12/schema"},
        {"title", "sunbudget plan"},
        {"description", "One run of sunbudget, as YAML 1.2 without anchors, aliases and tags"}};
    schema.update(of_map(plan_form()));
    return schema.dump(2) + "\n";
}

}  // namespace sunbudget
