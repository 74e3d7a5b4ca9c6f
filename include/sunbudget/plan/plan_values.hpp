#pragma once

#include <array>
#include <filesystem>
#include <string>
#include <variant>

#include "sunbudget/base/time.hpp"
#include "sunbudget/plan/place.hpp"

namespace sunbudget {

/// A file as the plan names it, and where that is: relative names are relative to the plan's
/// folder.
struct PlanPath {
    std::string given;
    std::filesystem::path file;
    friend bool operator==(const PlanPath& a, const PlanPath& b) { return a.file == b.file; }
};

/// One band of a raster file: PATH, PATH:N or PATH:NAME.
struct PlanRaster {
    PlanPath path;
    std::string band;  ///< a number from 1 or a name; empty: the file's only or first band
    friend bool operator==(const PlanRaster&, const PlanRaster&) = default;
};

/// A value for each month, January first; one number in the plan fills all twelve.
using Monthly = std::array<double, 12>;

struct PlanLength {
    double m = 0;
    friend bool operator==(const PlanLength&, const PlanLength&) = default;
};

/// A raster of a quantity: stored value * scale + offset, in the unit named.
struct PlanFieldRaster {
    PlanRaster raster;
    std::string unit;  ///< as the plan names it; empty for pure numbers
    double scale = 1;
    double offset = 0;
    friend bool operator==(const PlanFieldRaster&, const PlanFieldRaster&) = default;
};

/// Numbers in K, hPa or pure ones, or a raster. Apart by type, since each is written with its own unit.
struct PlanTemperatures {
    std::variant<Monthly, PlanFieldRaster> value;  ///< K
    friend bool operator==(const PlanTemperatures&, const PlanTemperatures&) = default;
};
struct PlanPressures {
    std::variant<Monthly, PlanFieldRaster> value;  ///< hPa
    friend bool operator==(const PlanPressures&, const PlanPressures&) = default;
};
struct PlanShares {
    std::variant<Monthly, PlanFieldRaster> value;
    friend bool operator==(const PlanShares&, const PlanShares&) = default;
};
struct PlanLapse {
    Monthly k_km{};
    friend bool operator==(const PlanLapse&, const PlanLapse&) = default;
};

/// A difference of temperatures.
struct PlanDifference {
    double k = 0;
    friend bool operator==(const PlanDifference&, const PlanDifference&) = default;
};

struct PlanZone {
    Zone zone;
    friend bool operator==(const PlanZone& a, const PlanZone& b) {
        return a.zone.name() == b.zone.name();
    }
};

}  // namespace sunbudget
