#pragma once

#include <algorithm>

#include "sunbudget/physics/beam_table.hpp"

namespace sunbudget::reference {

/// Share of a step's rise above a horizon, the sun rising evenly in the sine of its elevation.
inline double lit_share(const SunStep& sun, double horizon_sine) {
    if (sun.sine_high <= sun.sine_low) return sun.sine_high > horizon_sine ? 1 : 0;
    return std::clamp((sun.sine_high - horizon_sine) / (sun.sine_high - sun.sine_low), 0.0, 1.0);
}

struct Lit {
    double beam = 0;
    double hours = 0;
};

/// One sun on a plane behind a horizon, in double precision.
inline Lit lit_by(const SunStep& sun, double horizon_sine, double east, double north, double up) {
    const double share = lit_share(sun, horizon_sine);
    const double facing = east * sun.beam[0] + north * sun.beam[1] + up * sun.beam[2];
    return {share * std::max(0.0, facing), share * sun.hours};
}

}  // namespace sunbudget::reference
