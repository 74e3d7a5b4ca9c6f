#include "sunbudget/model/sky.hpp"

#include <numbers>

#include "sunbudget/physics/air_mass.hpp"

namespace sunbudget {

SkyMoment sky_moment(const Sky& sky, double extraterrestrial_normal_w_m2, double elevation_rad, int month,
                     double pressure) {
    const auto light = esra2000(extraterrestrial_normal_w_m2, elevation_rad, sky.turbidity_of(month), pressure);
    SkyMoment moment{light.beam_normal_w_m2, light.diffuse_horizontal_w_m2, {}};
    const SkyLight open{light.beam_normal_w_m2, light.diffuse_horizontal_w_m2, extraterrestrial_normal_w_m2,
                        std::numbers::pi / 2 - elevation_rad};
    switch (sky.diffuse) {
        case DiffuseModel::liu_jordan1963: moment.parts = sky_liu_jordan1963(open); break;
        case DiffuseModel::hay_davies1980: moment.parts = sky_hay_davies1980(open); break;
        case DiffuseModel::perez1990:
            moment.parts = sky_perez1990(open, relative_air_mass_kasten1966(elevation_rad));
            break;
    }
    return moment;
}

}  // namespace sunbudget
