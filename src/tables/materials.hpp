#pragma once

#include <array>

namespace sunbudget {

/// A common surface as the table `sri` prints it.
struct Material {
    const char* name;
    double albedo;
    double emissivity;
    const char* source;
};

inline constexpr auto roof_list =
    "list of cool roofing materials of the Lawrence Berkeley National Laboratory, as reprinted in "
    "LEED-NC 2.2 (from memory)";
inline constexpr auto oke_middle =
    "near the middle of the ranges in Oke 1987, Boundary Layer Climates, Tables 1.1 and 8.2 (from "
    "memory)";
inline constexpr auto standard = "reference surface of ASTM E1980-11";

inline constexpr std::array materials{
    Material{"black reference", 0.05, 0.90, standard},
    Material{"white reference", 0.80, 0.90, standard},
    Material{"asphalt", 0.12, 0.95, oke_middle},
    Material{"concrete", 0.25, 0.85, oke_middle},
    Material{"brick", 0.30, 0.91, oke_middle},
    Material{"corrugated iron", 0.13, 0.20, oke_middle},
    Material{"grey EPDM", 0.23, 0.87, roof_list},
    Material{"grey asphalt shingle", 0.22, 0.91, roof_list},
    Material{"unpainted cement tile", 0.25, 0.90, roof_list},
    Material{"white granular bitumen", 0.26, 0.92, roof_list},
    Material{"red clay tile", 0.33, 0.90, roof_list},
    Material{"light gravel on built-up roof", 0.34, 0.90, roof_list},
    Material{"aluminium coating", 0.61, 0.25, roof_list},
    Material{"white-coated gravel", 0.65, 0.90, roof_list},
    Material{"white coating on metal", 0.67, 0.85, roof_list},
    Material{"white EPDM", 0.69, 0.87, roof_list},
    Material{"white cement tile", 0.73, 0.90, roof_list},
    Material{"white coating, 1 coat", 0.80, 0.91, roof_list},
    Material{"white PVC", 0.83, 0.92, roof_list},
    Material{"white coating, 2 coats", 0.85, 0.91, roof_list},
};

}  // namespace sunbudget
