#include "sunbudget/tables/layers.hpp"

#include <array>
#include <cassert>
#include <cmath>
#include <utility>

namespace sunbudget {

namespace {

struct UnitRow {
    OutputUnit unit;
    std::string_view name;
    double joules;
};
constexpr std::array units{
    UnitRow{OutputUnit::w_m2, "W/m2", 1.0},
    UnitRow{OutputUnit::mj_m2, "MJ/m2", 1e6},
    UnitRow{OutputUnit::kwh_m2, "kWh/m2", 3.6e6},
};

constexpr double ratio_quantum = 1.0 / 8192;  // 2^-13: 0.00012, far below any albedo's uncertainty
constexpr double angle_quantum_deg =
    1.0 / 64;  // far below what a height model's own error does to a slope
constexpr double time_quantum_h = 1.0 / 64;  // a minute
constexpr double flux_quantum_w_m2 = 1.0 / 16;
constexpr double temperature_quantum_k =
    1.0 / 64;                               // a thermal band's own step is 0.003 K, its error 1 K
constexpr double index_quantum = 1.0 / 16;  // the index is quoted in whole numbers

const std::vector<Layer>& table() {
    static const std::vector<Layer> rows{
        {.id = LayerId::albedo,
         .name = "albedo",
         .quantity = Quantity::ratio,
         .sample = SampleType::float32,
         .text = "share of the sun's light the surface sends back, broadband",
         .standard_name = "surface_albedo",
         .standard_name_sum = {},
         .needs_sun = false,
         .needs_albedo = true},
        {.id = LayerId::albedo_uncertainty,
         .name = "albedo_uncertainty",
         .quantity = Quantity::ratio,
         .sample = SampleType::float32,
         .text = "standard uncertainty of the albedo: half the class's range over the root of 3, "
                 "an image's fit error, or as the plan says",
         .standard_name = "surface_albedo standard_error",
         .standard_name_sum = {},
         .needs_sun = false,
         .needs_albedo = true,
         .needs_albedo_uncertainty = true},
        {.id = LayerId::insolation,
         .name = "insolation",
         .quantity = Quantity::radiation,
         .sample = SampleType::float32,
         .text = "sunlight that reaches the surface: direct, diffuse and reflected",
         .standard_name = "surface_downwelling_shortwave_flux_in_air",
         .standard_name_sum = "integral_wrt_time_of_surface_downwelling_shortwave_flux_in_air",
         .needs_sun = true,
         .needs_albedo = false},
        {.id = LayerId::direct,
         .name = "direct",
         .quantity = Quantity::radiation,
         .sample = SampleType::float32,
         .text = "sunlight straight from the sun's disc, on the surface",
         .standard_name = "surface_direct_downwelling_shortwave_flux_in_air",
         .standard_name_sum =
             "integral_wrt_time_of_surface_direct_downwelling_shortwave_flux_in_air",
         .needs_sun = true,
         .needs_albedo = false},
        {.id = LayerId::diffuse,
         .name = "diffuse",
         .quantity = Quantity::radiation,
         .sample = SampleType::float32,
         .text = "sunlight scattered by the sky, on the surface",
         .standard_name = "surface_diffuse_downwelling_shortwave_flux_in_air",
         .standard_name_sum = {},
         .needs_sun = true,
         .needs_albedo = false},
        {.id = LayerId::reflected,
         .name = "reflected",
         .quantity = Quantity::radiation,
         .sample = SampleType::float32,
         .text = "sunlight that the ground in view sends to the surface",
         .standard_name = {},
         .standard_name_sum = {},
         .needs_sun = true,
         .needs_albedo = false,
         .needs_terrain = true},
        {.id = LayerId::net_shortwave,
         .name = "net_shortwave",
         .quantity = Quantity::radiation,
         .sample = SampleType::float32,
         .text = "sunlight the surface keeps: insolation less what the albedo sends back",
         .standard_name = "surface_net_downward_shortwave_flux",
         .standard_name_sum = "integral_wrt_time_of_surface_net_downward_shortwave_flux",
         .needs_sun = true,
         .needs_albedo = true},
        {.id = LayerId::net_shortwave_uncertainty,
         .name = "net_shortwave_uncertainty",
         .quantity = Quantity::radiation,
         .sample = SampleType::float32,
         .text = "standard uncertainty of net_shortwave: that of the albedo and, the same at all "
                 "times, that of the light",
         .standard_name = "surface_net_downward_shortwave_flux standard_error",
         .standard_name_sum =
             "integral_wrt_time_of_surface_net_downward_shortwave_flux standard_error",
         .needs_sun = true,
         .needs_albedo = true,
         .needs_albedo_uncertainty = true},
        {.id = LayerId::sunlit_hours,
         .name = "sunlit_hours",
         .quantity = Quantity::hours,
         .sample = SampleType::float32,
         .text =
             "hours of the period in which the sun's disc shines on the surface, under a clear sky",
         .standard_name = {},
         .standard_name_sum = {},
         .needs_sun = true,
         .needs_albedo = false,
         .needs_terrain = true},
        {.id = LayerId::sky_view,
         .name = "sky_view",
         .quantity = Quantity::ratio,
         .sample = SampleType::float32,
         .text = "share of an even sky's light that reaches the surface past the terrain",
         .standard_name = {},
         .standard_name_sum = {},
         .needs_sun = false,
         .needs_albedo = false,
         .needs_terrain = true},
        {.id = LayerId::slope,
         .name = "slope",
         .quantity = Quantity::angle,
         .sample = SampleType::float32,
         .text = "steepness of the surface",
         .standard_name = {},
         .standard_name_sum = {},
         .needs_sun = false,
         .needs_albedo = false,
         .needs_terrain = true},
        {.id = LayerId::aspect,
         .name = "aspect",
         .quantity = Quantity::angle,
         .sample = SampleType::float32,
         .text = "direction the surface faces, downslope, clockwise from true north; none on level "
                 "ground",
         .standard_name = {},
         .standard_name_sum = {},
         .needs_sun = false,
         .needs_albedo = false,
         .needs_terrain = true},
        {.id = LayerId::quality,
         .name = "quality",
         .quantity = Quantity::flags,
         .sample = SampleType::uint16,
         .text = "where the albedo came from and what was seen on the way; see the table quality",
         .standard_name = "quality_flag",
         .standard_name_sum = {},
         .needs_sun = false,
         .needs_albedo = false},
        {.id = LayerId::treated,
         .name = "treated",
         .quantity = Quantity::ratio,
         .sample = SampleType::float32,
         .text = "share of the ground that a change treats",
         .standard_name = {},
         .standard_name_sum = {},
         .of_changes = true},
        {.id = LayerId::longwave_down,
         .name = "longwave_down",
         .quantity = Quantity::radiation,
         .sample = SampleType::float32,
         .text = "heat radiation that reaches the surface from the sky and the ground in view",
         .standard_name = "surface_downwelling_longwave_flux_in_air",
         .standard_name_sum = "integral_wrt_time_of_surface_downwelling_longwave_flux_in_air",
         .needs_air = true},
        {.id = LayerId::longwave_up,
         .name = "longwave_up",
         .quantity = Quantity::radiation,
         .sample = SampleType::float32,
         .text = "heat radiation that leaves the surface: its own, and what it reflects",
         .standard_name = "surface_upwelling_longwave_flux_in_air",
         .standard_name_sum = {},
         .needs_air = true,
         .needs_surface_temperature = true,
         .needs_emissivity = true},
        {.id = LayerId::net_longwave,
         .name = "net_longwave",
         .quantity = Quantity::radiation,
         .sample = SampleType::float32,
         .text =
             "heat radiation the surface keeps: what comes down less what goes up, mostly negative",
         .standard_name = "surface_net_downward_longwave_flux",
         .standard_name_sum = "integral_wrt_time_of_surface_net_downward_longwave_flux",
         .needs_air = true,
         .needs_surface_temperature = true,
         .needs_emissivity = true},
        {.id = LayerId::net_radiation,
         .name = "net_radiation",
         .quantity = Quantity::radiation,
         .sample = SampleType::float32,
         .text = "all radiation the surface keeps: net shortwave and net longwave",
         .standard_name = "surface_net_downward_radiative_flux",
         .standard_name_sum = {},
         .needs_sun = true,
         .needs_albedo = true,
         .needs_air = true,
         .needs_surface_temperature = true,
         .needs_emissivity = true},
        {.id = LayerId::emissivity,
         .name = "emissivity",
         .quantity = Quantity::ratio,
         .sample = SampleType::float32,
         .text = "share of a black body's heat radiation that the surface sends out",
         .standard_name = "surface_longwave_emissivity",
         .standard_name_sum = {},
         .needs_emissivity = true},
        {.id = LayerId::surface_temperature,
         .name = "surface_temperature",
         .quantity = Quantity::temperature,
         .sample = SampleType::float32,
         .text = "temperature of the surface; from a balance it is steady, of dry built and bare "
                 "ground alone",
         .standard_name = "surface_temperature",
         .standard_name_sum = {},
         .needs_surface_temperature = true},
        {.id = LayerId::sri,
         .name = "sri",
         .quantity = Quantity::index,
         .sample = SampleType::float32,
         .text = "solar reflectance index: how cool a dry built or bare surface stays in the sun, "
                 "0 black and 100 white; "
                 "none on slopes of 9.5 degrees and more",
         .standard_name = {},
         .standard_name_sum = {},
         .needs_albedo = true,
         .needs_emissivity = true},
    };
    return rows;
}

/// The largest power of two not above a positive number.
double power_of_two_below(double value) noexcept {
    int exponent = 0;
    std::frexp(value, &exponent);  // value = m 2^exponent, 1/2 <= m < 1
    return std::ldexp(1.0, exponent - 1);
}

}  // namespace

std::string_view name_of(OutputUnit unit) noexcept {
    for (const auto& row : units)
        if (row.unit == unit) return row.name;
    return {};
}

std::optional<OutputUnit> output_unit_named(std::string_view name) noexcept {
    for (const auto& row : units)
        if (row.name == name) return row.unit;
    return std::nullopt;
}

std::vector<std::string> output_unit_names() {
    std::vector<std::string> names;
    for (const auto& row : units) names.emplace_back(row.name);
    return names;
}

double joules_of(OutputUnit unit) noexcept {
    for (const auto& row : units)
        if (row.unit == unit) return row.joules;
    return 1.0;
}

std::string_view name_of(SampleType type) noexcept {
    return type == SampleType::float32 ? "Float32" : "UInt16";
}

std::span<const Layer> layers() {
    return table();
}

const Layer& layer(LayerId id) noexcept {
    const auto& row = table()[static_cast<std::size_t>(id)];
    assert(row.id == id);
    return row;
}

const Layer* layer_named(std::string_view name) noexcept {
    for (const auto& row : table())
        if (row.name == name) return &row;
    return nullptr;
}

std::vector<std::string> layer_names() {
    std::vector<std::string> names;
    for (const auto& row : table())
        if (!row.of_changes) names.push_back(row.name);
    return names;
}

std::string_view unit_of(const Layer& layer, OutputUnit unit) noexcept {
    switch (layer.quantity) {
        case Quantity::radiation:
            return name_of(unit);
        case Quantity::hours:
            return "h";
        case Quantity::angle:
            return "degree";
        case Quantity::temperature:
            return "degC";
        default:
            return "1";
    }
}

const std::string& standard_name_of(const Layer& layer, OutputUnit unit) noexcept {
    const bool sum = layer.quantity == Quantity::radiation && unit != OutputUnit::w_m2;
    return sum ? layer.standard_name_sum : layer.standard_name;
}

double quantum_of(const Layer& layer, OutputUnit unit, double period_s) noexcept {
    if (layer.quantity == Quantity::flags) return 1.0;
    if (layer.quantity == Quantity::ratio) return ratio_quantum;
    if (layer.quantity == Quantity::angle) return angle_quantum_deg;
    if (layer.quantity == Quantity::hours) return time_quantum_h;
    if (layer.quantity == Quantity::temperature) return temperature_quantum_k;
    if (layer.quantity == Quantity::index) return index_quantum;
    if (unit == OutputUnit::w_m2) return flux_quantum_w_m2;
    assert(period_s > 0);
    return power_of_two_below(flux_quantum_w_m2 * period_s / joules_of(unit));
}

}  // namespace sunbudget
