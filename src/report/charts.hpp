#pragma once

#include <span>
#include <string>
#include <vector>

#include "picture.hpp"
#include "sunbudget/base/plane.hpp"

namespace sunbudget {

/// How often values occur, as SVG: bars in the colours of the map beside it.
[[nodiscard]] std::string histogram_svg(const Plane<float>& values, const ColourScale& scale,
                                        const std::string& unit);

struct CurvePoint {
    std::string name;  ///< of the period
    double mean = 0;   ///< NaN where there is none
};
/// The means of periods as SVG; at least two.
[[nodiscard]] std::string curve_svg(std::span<const CurvePoint> points, const std::string& unit);

/// A number for people: four digits, no exponent where it can be helped.
[[nodiscard]] std::string for_people(double value);

}  // namespace sunbudget
