#pragma once

#include <optional>
#include <string>

namespace sunbudget {

/// Where a value of a plan stands.
struct Place {
    std::string file;  ///< as named by the user; "--set" or another flag for a value from there
    int line = 0;      ///< counted from 1; 0 when the value is not in a file
    std::string key;   ///< "surface.cover.raster", "outputs.layers[2]"; empty for the whole plan
    bool is_default = false;  ///< nobody wrote the value: it is the key's default

    /// "town.yaml:12: surface.cover.raster", "--set surface.cover.raster", "default of sky.model".
    [[nodiscard]] std::string text() const;
};

/// A value of a plan that knows its place. Two are equal when their values are.
template <class T>
struct Given {
    T value{};
    Place place;

    const T& operator*() const { return value; }
    const T* operator->() const { return &value; }
    friend bool operator==(const Given& a, const Given& b) { return a.value == b.value; }
};

/// A key that may be absent: `if (plan.sky.turbidity) use(**plan.sky.turbidity)`.
template <class T>
using Maybe = std::optional<Given<T>>;

}  // namespace sunbudget
