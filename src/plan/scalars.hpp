#pragma once

#include <optional>
#include <span>
#include <string>
#include <string_view>

#include "keys.hpp"
#include "sunbudget/plan/plan.hpp"
#include "tree.hpp"

namespace sunbudget {

struct Unit {
    std::string_view name;
    double factor;
    double offset = 0;
};
/// The units a quantity of that kind may have, in m, s, K, hPa, K/km or m/s; empty for other kinds.
[[nodiscard]] std::span<const Unit> units_of(ValueKind kind);

// One reader per kind of value. Nothing where the value has another form.
[[nodiscard]] std::optional<double> read_number(const Node& node);
/// Whole numbers, 3.0 among them.
[[nodiscard]] std::optional<double> read_integer(const Node& node);
/// true or false, in YAML 1.2's three spellings.
[[nodiscard]] std::optional<bool> read_boolean(const Node& node);
/// A text that is in quotes, or looks like neither number nor boolean.
[[nodiscard]] std::optional<std::string> read_text(const Node& node);
/// In m, s, K, hPa, K/km or m/s.
[[nodiscard]] std::optional<double> read_quantity(const Node& node, ValueKind kind);
[[nodiscard]] std::optional<HourWindow> read_hours(const Node& node);
/// The band is what follows the last colon, unless a slash follows it.
[[nodiscard]] std::optional<PlanRaster> read_raster(const Node& node);

/// Why a scalar does not fit.
struct Mismatch {
    std::string what;
    std::string todo;
};
/// Nothing when the scalar fits the form.
[[nodiscard]] std::optional<Mismatch> mismatch(const Node& scalar, const Form& form);

}  // namespace sunbudget
