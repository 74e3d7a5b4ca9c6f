#include "sunbudget/model/sky.hpp"

#include <limits>
#include <numbers>

#include "sunbudget/physics/air_mass.hpp"
#include "sunbudget/tables/methods.hpp"

namespace sunbudget {

namespace {

constexpr std::array<std::string_view, 1> model_names{"esra2000"};
constexpr std::array<std::string_view, sky_parameter_count> parameter_names{"turbidity"};

ClearSky clear_light(const Sky& sky, const SkyInstant& at) {
    switch (sky.model) {
        case ClearModel::esra2000:
            break;
    }
    return esra2000(at.extraterrestrial_normal_w_m2, at.elevation_rad,
                    sky.of(SkyParameter::turbidity, at.month), at.pressure_ratio);
}

SkyParts parts_of(DiffuseModel model, const SkyLight& open, double elevation_rad) {
    switch (model) {
        case DiffuseModel::liu_jordan1963:
            return sky_liu_jordan1963(open);
        case DiffuseModel::hay_davies1980:
            return sky_hay_davies1980(open);
        case DiffuseModel::perez1990:
            break;
    }
    return sky_perez1990(open, relative_air_mass_kasten1966(elevation_rad));
}

}  // namespace

std::string_view name_of(ClearModel model) {
    return model_names[static_cast<std::size_t>(model)];
}
std::string_view name_of(SkyParameter parameter) {
    return parameter_names[static_cast<std::size_t>(parameter)];
}

Sky::Sky(ClearModel chosen) : model(chosen) {
    const auto& row = method("clear_sky", name_of(model));
    for (std::size_t i = 0; i < sky_parameter_count; ++i) {
        const auto* parameter = row.parameter(parameter_names[i]);
        const bool known = parameter != nullptr && parameter->default_value;
        parameters[i].fill(known ? *parameter->default_value
                                 : std::numeric_limits<double>::quiet_NaN());
    }
}

SkyMoment sky_moment(const Sky& sky, const SkyInstant& at) {
    const auto light = clear_light(sky, at);
    const SkyLight open{light.beam_normal_w_m2, light.diffuse_horizontal_w_m2,
                        at.extraterrestrial_normal_w_m2, std::numbers::pi / 2 - at.elevation_rad};
    return {light.beam_normal_w_m2, light.diffuse_horizontal_w_m2,
            parts_of(sky.diffuse, open, at.elevation_rad)};
}

}  // namespace sunbudget
