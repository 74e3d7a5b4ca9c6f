#pragma once

#include <array>
#include <cstddef>
#include <memory>
#include <optional>
#include <string_view>

#include "sunbudget/base/time.hpp"
#include "sunbudget/model/air_pressure.hpp"
#include "sunbudget/model/light_shares.hpp"
#include "sunbudget/physics/clear_sky.hpp"
#include "sunbudget/physics/transposition.hpp"

namespace sunbudget {

/// How the sky's light is spread over the sky.
enum class DiffuseModel { liu_jordan1963, hay_davies1980, perez1990 };

/// In the order of their rows among the methods, family "clear_sky".
enum class ClearModel { esra2000, bird_hulstrom1981, ineichen_perez2002, asce2005, fao56 };

/// The numbers that clear-sky models ask for; which of them a model has, its row among the methods says.
enum class SkyParameter {
    turbidity,
    ozone,
    water,
    aerosol380,
    aerosol500,
    ground_albedo,
    vapour_pressure,
    turbidity_coefficient,
};
inline constexpr std::size_t sky_parameter_count = 8;

/// January first.
using MonthlyNumbers = std::array<double, 12>;

/// The sky of a run: how its light comes about, and with what numbers.
struct Sky {
    ClearModel model;
    /// NaN where the model has none, and for a ground albedo that the run's own takes the place of.
    std::array<MonthlyNumbers, sky_parameter_count> parameters;
    DiffuseModel diffuse = DiffuseModel::hay_davies1980;
    std::shared_ptr<const LightShares> measured;  ///< of the clear sky's light; nothing: all of it
    std::shared_ptr<const AirPressure> pressure;  ///< nothing: the standard's
    std::optional<std::array<LightShare, 12>>
        mean_cloud;  ///< by month, a mixture of clear and overcast skies

    /// The model with the defaults of its row.
    explicit Sky(ClearModel model = ClearModel::esra2000);

    [[nodiscard]] MonthlyNumbers& operator[](SkyParameter parameter) {
        return parameters[static_cast<std::size_t>(parameter)];
    }
    /// What the standard's pressure is to be multiplied with.
    [[nodiscard]] double pressure_factor(UtcSeconds utc, int month) const {
        return pressure ? pressure->factor(utc, month) : 1;
    }
    [[nodiscard]] double of(SkyParameter parameter, int month) const {
        return parameters[static_cast<std::size_t>(parameter)][static_cast<std::size_t>(month - 1)];
    }
};

/// Whether light to and fro between ground and sky waits for the albedo around each pixel: the model has
/// that term and no number was given for it.
[[nodiscard]] bool waits_for_ground(const Sky& sky);

/// As plans and rows write them.
[[nodiscard]] std::string_view name_of(ClearModel model);
[[nodiscard]] std::string_view name_of(SkyParameter parameter);
/// Whether the model's row has the parameter.
[[nodiscard]] bool has(ClearModel model, SkyParameter parameter);
/// Whether the parameter may vary from pixel to pixel: light bends gently with it.
[[nodiscard]] bool may_be_raster(SkyParameter parameter);
/// Throws Error(usage) with a suggestion for a name that is none.
[[nodiscard]] ClearModel clear_model_named(std::string_view name);
[[nodiscard]] DiffuseModel diffuse_model_named(std::string_view name);

/// When and where the sky is looked at.
struct SkyInstant {
    UtcSeconds utc = 0;
    int month = 1;                            ///< by the clock of the run's zone
    double extraterrestrial_normal_w_m2 = 0;  ///< at the sun's distance, solar constant 1361 W m-2
    double elevation_rad = 0;                 ///< true, of the sun's centre, above 0
    double height_m = 0;
    double pressure_ratio = 1;  ///< of the standard atmosphere, to sea level
    double duration_s = 0;      ///< of the time around utc that it stands for
};

/// Light of one moment at one place, in the parts that terrain treats differently.
struct SkyMoment {
    double beam_normal_w_m2 = 0;
    double diffuse_w_m2 = 0;  ///< on the horizontal, all of it but what waits for the ground
    SkyParts parts;
    /// Where waits_for_ground(): global over black ground times the sky's albedo, and times its square.
    double thrown_back_w_m2 = 0;
    double thrown_back_twice_w_m2 = 0;
};

/// The only place where a sky becomes light: everything else asks here.
[[nodiscard]] SkyMoment sky_moment(const Sky& sky, const SkyInstant& at);

}  // namespace sunbudget
