#pragma once

#include <array>
#include <cstddef>
#include <string_view>

#include "sunbudget/base/time.hpp"
#include "sunbudget/physics/clear_sky.hpp"
#include "sunbudget/physics/transposition.hpp"

namespace sunbudget {

/// How the sky's light is spread over the sky.
enum class DiffuseModel { liu_jordan1963, hay_davies1980, perez1990 };

/// In the order of their rows among the methods, family "clear_sky".
enum class ClearModel { esra2000 };

/// The numbers that clear-sky models ask for; which of them a model has, its row among the methods says.
enum class SkyParameter { turbidity };
inline constexpr std::size_t sky_parameter_count = 1;

/// January first.
using MonthlyNumbers = std::array<double, 12>;

/// The sky of a run: how its light comes about, and with what numbers.
struct Sky {
    ClearModel model;
    std::array<MonthlyNumbers, sky_parameter_count> parameters;  ///< NaN where the model has none
    DiffuseModel diffuse = DiffuseModel::hay_davies1980;

    /// The model with the defaults of its row.
    explicit Sky(ClearModel model = ClearModel::esra2000);

    [[nodiscard]] MonthlyNumbers& operator[](SkyParameter parameter) {
        return parameters[static_cast<std::size_t>(parameter)];
    }
    [[nodiscard]] double of(SkyParameter parameter, int month) const {
        return parameters[static_cast<std::size_t>(parameter)][static_cast<std::size_t>(month - 1)];
    }
};

/// As plans and rows write them.
[[nodiscard]] std::string_view name_of(ClearModel model);
[[nodiscard]] std::string_view name_of(SkyParameter parameter);

/// When and where the sky is looked at.
struct SkyInstant {
    UtcSeconds utc = 0;
    int month = 1;                            ///< by the clock of the run's zone
    double extraterrestrial_normal_w_m2 = 0;  ///< at the sun's distance, solar constant 1361 W m-2
    double elevation_rad = 0;                 ///< true, of the sun's centre, above 0
    double height_m = 0;
    double pressure_ratio = 1;  ///< to sea level
};

/// Light of one moment at one place, in the parts that terrain treats differently.
struct SkyMoment {
    double beam_normal_w_m2 = 0;
    double diffuse_w_m2 = 0;  ///< on the horizontal, all of it
    SkyParts parts;
};

/// The only place where a sky becomes light: everything else asks here.
[[nodiscard]] SkyMoment sky_moment(const Sky& sky, const SkyInstant& at);

}  // namespace sunbudget
