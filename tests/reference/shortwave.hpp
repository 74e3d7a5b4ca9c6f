#pragma once

#include <cmath>
#include <vector>

/// The row kernels of shortwave.hpp in double precision, one value at a time.
namespace sunbudget::test {

inline double absorbed_reference(double albedo_direct, double direct, double albedo_diffuse,
                                 double diffuse) {
    return direct - albedo_direct * direct + (diffuse - albedo_diffuse * diffuse);
}

/// Nearest multiple of the quantum by division and floor; a half goes to the even multiple.
inline double quantised_reference(double value, double quantum) {
    const double below = std::floor(value / quantum);
    const double rest = value / quantum - below;
    const bool up = rest > 0.5 || (rest == 0.5 && std::fmod(below, 2.0) != 0);
    return (below + (up ? 1 : 0)) * quantum;
}

}  // namespace sunbudget::test
