#include "sunbudget/model/probe.hpp"

#include <algorithm>

namespace sunbudget {

void Probe::note_horizon(HorizonPoint point) {
    const auto at =
        std::ranges::lower_bound(horizon_, point.azimuth_rad, {}, &HorizonPoint::azimuth_rad);
    if (at == horizon_.end() || at->azimuth_rad != point.azimuth_rad) horizon_.insert(at, point);
}

}  // namespace sunbudget
