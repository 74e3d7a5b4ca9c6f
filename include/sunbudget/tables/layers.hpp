#pragma once

#include <optional>
#include <span>
#include <string>
#include <string_view>
#include <vector>

namespace sunbudget {

/// What a plan's `outputs.unit` chooses for radiation: the mean over a period (and an instant's
/// value), or its sum.
enum class OutputUnit { w_m2, mj_m2, kwh_m2 };

/// "W/m2", "MJ/m2", "kWh/m2".
[[nodiscard]] std::string_view name_of(OutputUnit unit) noexcept;
[[nodiscard]] std::optional<OutputUnit> output_unit_named(std::string_view name) noexcept;
[[nodiscard]] std::vector<std::string> output_unit_names();
/// J/m2 in one of the unit: 1e6, 3.6e6; 1 for W/m2, which is no energy.
[[nodiscard]] double joules_of(OutputUnit unit) noexcept;

enum class LayerId {
    albedo,
    albedo_uncertainty,
    insolation,
    direct,
    diffuse,
    reflected,
    net_shortwave,
    net_shortwave_uncertainty,
    sunlit_hours,
    sky_view,
    slope,
    aspect,
    quality,
    treated,
    longwave_down,
    longwave_up,
    net_longwave,
    net_radiation,
    emissivity,
    surface_temperature,
    sri,
};
enum class Quantity { ratio, radiation, hours, angle, flags, temperature, index };
enum class SampleType { float32, uint16 };
[[nodiscard]] std::string_view name_of(SampleType type) noexcept;

/// One output layer; a file each.
struct Layer {
    LayerId id{};
    std::string name;
    Quantity quantity{};
    SampleType sample{};
    std::string text;
    std::string standard_name;      ///< of the CF conventions; empty where none fits
    std::string standard_name_sum;  ///< the same for sums over a period
    bool needs_sun = false;
    bool needs_albedo = false;
    bool needs_terrain = false;
    bool of_changes = false;  ///< comes with a change; no plan asks for it by name
    bool needs_air = false;   ///< temperature and humidity
    bool needs_surface_temperature = false;
    bool needs_emissivity = false;
    bool needs_albedo_uncertainty = false;

    /// Made from air, emissivity or the ground's temperature.
    [[nodiscard]] bool is_heat() const {
        return needs_air || needs_surface_temperature || needs_emissivity;
    }
    /// One band a period; otherwise one band.
    [[nodiscard]] bool needs_time() const {
        return needs_sun || needs_air || needs_surface_temperature;
    }
};

/// In the order of LayerId.
[[nodiscard]] std::span<const Layer> layers();
[[nodiscard]] const Layer& layer(LayerId id) noexcept;
[[nodiscard]] const Layer* layer_named(std::string_view name) noexcept;
/// What a plan may ask for.
[[nodiscard]] std::vector<std::string> layer_names();

/// "1" for ratios, flags and indices, "h", "degree", "degC", else the chosen unit.
[[nodiscard]] std::string_view unit_of(const Layer& layer, OutputUnit unit) noexcept;
/// Empty where CF has no name.
[[nodiscard]] const std::string& standard_name_of(const Layer& layer, OutputUnit unit) noexcept;

/// The step stored values are rounded to, a power of two: albedo 2^-13, fluxes 1/16 W m-2, energies
/// the largest power of two not above 1/16 W m-2 times the period; 1 for flags; temperatures 1/64 K.
///
/// in      period_s  > 0 for energies (asserted); otherwise not looked at
[[nodiscard]] double quantum_of(const Layer& layer, OutputUnit unit, double period_s) noexcept;

}  // namespace sunbudget
