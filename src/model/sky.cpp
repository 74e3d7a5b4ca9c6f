#include "sunbudget/model/sky.hpp"

#include <algorithm>
#include <cmath>
#include <limits>
#include <numbers>

#include "sunbudget/base/error.hpp"
#include "sunbudget/physics/air_mass.hpp"
#include "sunbudget/physics/fao56.hpp"
#include "sunbudget/physics/sun.hpp"
#include "sunbudget/physics/sun_place.hpp"
#include "sunbudget/tables/methods.hpp"

namespace sunbudget {

namespace {

constexpr std::array<std::string_view, 5> model_names{"esra2000", "bird-hulstrom1981",
                                                      "ineichen-perez2002", "asce2005", "fao56"};
constexpr std::array<std::string_view, sky_parameter_count> parameter_names{
    "turbidity",  "ozone",         "water",           "aerosol380",
    "aerosol500", "ground_albedo", "vapour_pressure", "turbidity_coefficient"};

constexpr double sea_level_hpa = 1013.25;
constexpr double sea_level_kpa = 101.3;  // FAO-56 and ASCE 2005

/// Turbidity of the air whose share of sky light splits FAO-56's global.
constexpr double fao56_turbidity = 3;

/// Light over black ground, and what the sky would throw back of it.
struct OverBlackGround {
    ClearSky light;
    double sky_albedo = 0;
};

OverBlackGround bird_light(const Sky& sky, const SkyInstant& at) {
    const auto number = [&](SkyParameter parameter) { return sky.of(parameter, at.month); };
    const auto found =
        bird_hulstrom1981(at.extraterrestrial_normal_w_m2, at.elevation_rad,
                          {number(SkyParameter::ozone), number(SkyParameter::water),
                           number(SkyParameter::aerosol380), number(SkyParameter::aerosol500)},
                          at.pressure_ratio);
    return {{found.beam_normal_w_m2, found.diffuse_horizontal_w_m2}, found.sky_albedo};
}

ClearSky ineichen_light(const Sky& sky, const SkyInstant& at) {
    const double apparent_rad =
        at.elevation_rad + refraction(at.elevation_rad, sea_level_hpa * at.pressure_ratio);
    return ineichen_perez2002(at.extraterrestrial_normal_w_m2, at.elevation_rad,
                              relative_air_mass(apparent_rad) * at.pressure_ratio,
                              sky.of(SkyParameter::turbidity, at.month), at.height_m);
}

/// FAO-56 gives the global alone: beam and sky light share it as in ESRA's air of turbidity 3.
ClearSky fao56_light(const SkyInstant& at) {
    const double sine = std::sin(at.elevation_rad);
    const auto shares = esra2000(at.extraterrestrial_normal_w_m2, at.elevation_rad, fao56_turbidity,
                                 at.pressure_ratio);
    const double all = shares.beam_normal_w_m2 * sine + shares.diffuse_horizontal_w_m2;
    const double global = fao56_clear_share(at.height_m) * at.extraterrestrial_normal_w_m2 * sine;
    return {global * shares.beam_normal_w_m2 / all, global * shares.diffuse_horizontal_w_m2 / all};
}

OverBlackGround clear_light(const Sky& sky, const SkyInstant& at) {
    switch (sky.model) {
        case ClearModel::esra2000:
            break;
        case ClearModel::bird_hulstrom1981:
            return bird_light(sky, at);
        case ClearModel::ineichen_perez2002:
            return {ineichen_light(sky, at)};
        case ClearModel::asce2005:
            return {asce2005(at.extraterrestrial_normal_w_m2, at.elevation_rad,
                             sea_level_kpa * at.pressure_ratio,
                             sky.of(SkyParameter::vapour_pressure, at.month) / 10,
                             sky.of(SkyParameter::turbidity_coefficient, at.month))};
        case ClearModel::fao56:
            return {fao56_light(at)};
    }
    return {esra2000(at.extraterrestrial_normal_w_m2, at.elevation_rad,
                     sky.of(SkyParameter::turbidity, at.month), at.pressure_ratio)};
}

/// FAO-56 and ASCE 2005 stand on a solar constant of their own.
double outside_the_air(ClearModel model, double extraterrestrial_normal_w_m2) {
    const bool own = model == ClearModel::asce2005 || model == ClearModel::fao56;
    return own ? extraterrestrial_normal_w_m2 * (fao56_solar_constant_w_m2 / solar_constant_w_m2)
               : extraterrestrial_normal_w_m2;
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

/// Light to and fro between ground and sky: even over the sky, whatever spreads the rest of it.
void add_thrown_back(double ground_albedo, double elevation_rad, double sky_albedo,
                     SkyMoment& moment) {
    const double global = moment.beam_normal_w_m2 * std::sin(elevation_rad) + moment.diffuse_w_m2;
    if (std::isnan(ground_albedo)) {
        moment.thrown_back_w_m2 = global * sky_albedo;
        moment.thrown_back_twice_w_m2 = global * sky_albedo * sky_albedo;
        return;
    }
    const double more = global * ground_albedo * sky_albedo / (1 - ground_albedo * sky_albedo);
    moment.diffuse_w_m2 += more;
    moment.parts.isotropic_w_m2 += more;
}

SkyLight open_light(double beam_normal_w_m2, double diffuse_w_m2, const SkyInstant& at) {
    return {beam_normal_w_m2, diffuse_w_m2, at.extraterrestrial_normal_w_m2,
            std::numbers::pi / 2 - at.elevation_rad};
}

SkyMoment clear_moment(const Sky& sky, const SkyInstant& at) {
    const auto [light, sky_albedo] = clear_light(sky, at);
    SkyMoment moment;
    moment.beam_normal_w_m2 = light.beam_normal_w_m2;
    moment.diffuse_w_m2 = light.diffuse_horizontal_w_m2;
    moment.parts =
        parts_of(sky.diffuse, open_light(moment.beam_normal_w_m2, moment.diffuse_w_m2, at),
                 at.elevation_rad);
    if (sky.model == ClearModel::bird_hulstrom1981)
        add_thrown_back(sky.of(SkyParameter::ground_albedo, at.month), at.elevation_rad, sky_albedo,
                        moment);
    return moment;
}

/// A part of the time the clear sky, the rest an overcast that is bright alike all over.
SkyMoment mixed(const SkyMoment& clear, const LightShare& share, double clear_direct_w_m2) {
    SkyMoment moment;
    moment.beam_normal_w_m2 = share.beam * clear.beam_normal_w_m2;
    moment.diffuse_w_m2 = share.diffuse * clear.diffuse_w_m2 + share.scattered * clear_direct_w_m2;
    // No more of the clear sky's own light than there is sky light in all.
    const double whole = clear.diffuse_w_m2 > 0 ? moment.diffuse_w_m2 / clear.diffuse_w_m2 : 0;
    const double part = std::min(share.beam, whole);
    moment.parts.circumsolar_normal_w_m2 = part * clear.parts.circumsolar_normal_w_m2;
    moment.parts.horizon_w_m2 = part * clear.parts.horizon_w_m2;
    moment.parts.isotropic_w_m2 =
        part * clear.parts.isotropic_w_m2 + (moment.diffuse_w_m2 - part * clear.diffuse_w_m2);
    moment.thrown_back_w_m2 = share.beam * clear.thrown_back_w_m2;
    moment.thrown_back_twice_w_m2 = share.beam * clear.thrown_back_twice_w_m2;
    return moment;
}

}  // namespace

std::string_view name_of(ClearModel model) {
    return model_names[static_cast<std::size_t>(model)];
}
std::string_view name_of(SkyParameter parameter) {
    return parameter_names[static_cast<std::size_t>(parameter)];
}

bool has(ClearModel model, SkyParameter parameter) {
    return method("clear_sky", name_of(model)).parameter(name_of(parameter)) != nullptr;
}

bool may_be_raster(SkyParameter parameter) {
    return parameter == SkyParameter::turbidity || parameter == SkyParameter::vapour_pressure;
}

ClearModel clear_model_named(std::string_view name) {
    const auto found =
        std::find(model_names.begin(), model_names.end(), method("clear_sky", name).name);
    return static_cast<ClearModel>(found - model_names.begin());
}

DiffuseModel diffuse_model_named(std::string_view name) {
    constexpr std::array names{"liu-jordan1963", "hay-davies1980", "perez1990"};
    const auto found = std::find(names.begin(), names.end(), method("diffuse_sky", name).name);
    return static_cast<DiffuseModel>(found - names.begin());
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

bool waits_for_ground(const Sky& sky) {
    return sky.model == ClearModel::bird_hulstrom1981 &&
           std::isnan(sky.of(SkyParameter::ground_albedo, 1));
}

SkyMoment sky_moment(const Sky& sky, const SkyInstant& when) {
    SkyInstant at = when;
    at.extraterrestrial_normal_w_m2 = outside_the_air(sky.model, when.extraterrestrial_normal_w_m2);
    at.pressure_ratio *= sky.pressure_factor(at.utc, at.month);
    const auto clear = clear_moment(sky, at);
    if (!sky.measured && !sky.mean_cloud) return clear;
    const double direct_w_m2 = clear.beam_normal_w_m2 * std::max(0.0, std::sin(at.elevation_rad));
    if (!sky.measured)
        return mixed(clear, (*sky.mean_cloud)[static_cast<std::size_t>(at.month - 1)], direct_w_m2);
    // What was measured holds the light to and fro between ground and sky.
    const auto share = sky.measured->over(at.utc - at.duration_s / 2, at.utc + at.duration_s / 2);
    SkyMoment moment;
    moment.beam_normal_w_m2 = share.beam * clear.beam_normal_w_m2;
    moment.diffuse_w_m2 = share.diffuse * clear.diffuse_w_m2 + share.scattered * direct_w_m2;
    moment.parts =
        parts_of(sky.diffuse, open_light(moment.beam_normal_w_m2, moment.diffuse_w_m2, at),
                 at.elevation_rad);
    return moment;
}

}  // namespace sunbudget
