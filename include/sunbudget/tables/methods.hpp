#pragma once

#include <optional>
#include <span>
#include <string>
#include <string_view>
#include <vector>

namespace sunbudget {

/// An interval of numbers; `low_open` leaves its lower end out.
struct Range {
    double low = 0;
    double high = 0;
    bool low_open = false;

    [[nodiscard]] bool holds(double value) const noexcept {
        return (low_open ? value > low : value >= low) && value <= high;
    }
    /// "0 to 1", "above 0 and up to 9".
    [[nodiscard]] std::string text() const;
};

/// One number a method asks for.
struct Parameter {
    std::string name;
    std::string unit;                     ///< "1" for pure numbers
    std::optional<double> default_value;  ///< nothing: it must be given
    Range usual;                          ///< outside: a warning
    Range allowed;                        ///< outside: refused; holds `usual`
    std::string text;
};

enum class Verdict { fine, unusual, refused };
/// NaN is refused.
[[nodiscard]] Verdict judge(const Parameter& parameter, double value) noexcept;

/// One published way to compute something. A family is a choice between methods.
struct Method {
    std::string family;
    std::string name;
    std::string text;
    std::string source;
    std::vector<Parameter> parameters;

    /// nullptr when there is none of that name.
    [[nodiscard]] const Parameter* parameter(std::string_view wanted) const noexcept;
};

/// Every method; the first of a family is its default.
[[nodiscard]] std::span<const Method> methods();
[[nodiscard]] std::vector<std::string> method_families();
/// Empty for a family that does not exist.
[[nodiscard]] std::vector<std::string> method_names(std::string_view family);
/// Those of a family that have the parameter.
[[nodiscard]] std::vector<std::string> methods_with(std::string_view family,
                                                    std::string_view parameter);
/// Throws Error(usage) with a suggestion when the family has no such method.
[[nodiscard]] const Method& method(std::string_view family, std::string_view name);

}  // namespace sunbudget
