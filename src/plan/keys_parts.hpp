#pragma once

#include <array>
#include <optional>
#include <string>
#include <string_view>
#include <utility>
#include <vector>

#include "keys.hpp"

namespace sunbudget {

// The plan's sections, one file each or a few together.
[[nodiscard]] Form surface_form();
[[nodiscard]] Form terrain_form();
[[nodiscard]] Form sky_form();
[[nodiscard]] Form weather_form();
[[nodiscard]] Form longwave_form();
[[nodiscard]] std::vector<Form> surface_temperature_forms();
[[nodiscard]] Form outputs_form();
[[nodiscard]] Form zones_form();
[[nodiscard]] Form change_form();
[[nodiscard]] Form report_form();

/// Short ways to write a form down, for those files alone.
namespace forms {

inline Form of(ValueKind kind) {
    return {.kind = kind};
}
inline Form number() {
    return of(ValueKind::number);
}
inline Form number(double min, double max) {
    return {.kind = ValueKind::number, .min = min, .max = max};
}
inline Form number_above(double min) {
    return {.kind = ValueKind::number, .min = min, .above_min = true};
}
inline Form integer(double min, double max) {
    return {.kind = ValueKind::integer, .min = min, .max = max};
}
inline Form length(double min_m, double max_m) {
    return {.kind = ValueKind::length, .min = min_m, .max = max_m};
}
inline Form duration(double min_s, double max_s) {
    return {.kind = ValueKind::duration, .min = min_s, .max = max_s};
}
inline Form quantity(ValueKind kind, double min, double max) {
    return {.kind = kind, .min = min, .max = max};
}
// From below the coldest night of Antarctica to above the hottest ground.
inline Form temperature() {
    return quantity(ValueKind::temperature, 180, 380);
}
inline Form path_beside_names() {
    return {.kind = ValueKind::path, .beside_names = true};
}
inline Form choice(std::vector<std::string> choices) {
    return {.kind = ValueKind::choice, .choices = std::move(choices)};
}
template <std::size_t N>
Form choice(const std::array<std::string_view, N>& names) {
    return choice(std::vector<std::string>(names.begin(), names.end()));
}
inline Form map(std::vector<Key> keys, std::vector<Rule> rules = {}) {
    return {.kind = ValueKind::map, .keys = std::move(keys), .rules = std::move(rules)};
}
inline Form list(Form item, double min, std::optional<double> max = {}, bool distinct = false) {
    return {.kind = ValueKind::list, .min = min, .max = max, .distinct = distinct, .items = {item}};
}

inline Rule exactly_one(std::vector<std::string> keys) {
    return {Rule::Type::exactly_one, std::move(keys)};
}
inline Rule at_most_one(std::vector<std::string> keys) {
    return {Rule::Type::at_most_one, std::move(keys)};
}
inline Rule needs(std::string key, std::vector<std::string> others) {
    others.insert(others.begin(), std::move(key));
    return {Rule::Type::needs, std::move(others)};
}

}  // namespace forms

}  // namespace sunbudget
