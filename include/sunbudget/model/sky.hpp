#pragma once

#include <array>

#include "sunbudget/physics/clear_sky.hpp"
#include "sunbudget/physics/transposition.hpp"

namespace sunbudget {

/// How the sky's light is spread over the sky.
enum class DiffuseModel { liu_jordan1963, hay_davies1980, perez1990 };

/// The sky of a run.
struct Sky {
    std::array<double, 12> turbidity{3, 3, 3, 3, 3, 3, 3, 3, 3, 3, 3, 3};  ///< Linke, by month
    DiffuseModel diffuse = DiffuseModel::hay_davies1980;

    [[nodiscard]] double turbidity_of(int month) const { return turbidity[static_cast<std::size_t>(month - 1)]; }
};

/// Light of one moment at one place, in the parts that terrain treats differently.
struct SkyMoment {
    double beam_normal_w_m2 = 0;
    double diffuse_w_m2 = 0;  ///< on the horizontal, all of it
    SkyParts parts;
};

/// in      extraterrestrial normal irradiance, the sun's true elevation (above 0), month of the year,
///         pressure ratio of the place
[[nodiscard]] SkyMoment sky_moment(const Sky& sky, double extraterrestrial_normal_w_m2, double elevation_rad,
                                   int month, double pressure);

}  // namespace sunbudget
