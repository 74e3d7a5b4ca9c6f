#include "layer_rows.hpp"

#include <algorithm>
#include <functional>
#include <limits>

#include "sunbudget/physics/shortwave.hpp"
#include "sunbudget/physics/surface_balance.hpp"

namespace sunbudget {

namespace {

void add_rows(std::span<const float> a, std::span<const float> b, std::span<float> sum) {
    std::transform(a.begin(), a.end(), b.begin(), sum.begin(), std::plus<>());
}

bool counts_reflected(LayerId id) {
    return id == LayerId::insolation || id == LayerId::net_shortwave ||
           id == LayerId::net_shortwave_uncertainty;
}

}  // namespace

void light_row(LayerId id, const LitBand& lit, bool terrain, int r, std::vector<float>& rest,
               std::span<float> out) {
    const auto beam = lit.light.direct.row(r), sky = lit.diffuse.row(r);
    std::span<const float> around = sky;
    if (terrain && counts_reflected(id)) {
        rest.resize(sky.size());
        add_rows(sky, lit.reflected.row(r), rest);
        around = rest;
    }
    switch (id) {
        case LayerId::direct:
            std::ranges::copy(beam, out.begin());
            break;
        case LayerId::diffuse:
            std::ranges::copy(sky, out.begin());
            break;
        case LayerId::reflected:
            std::ranges::copy(lit.reflected.row(r), out.begin());
            break;
        case LayerId::sunlit_hours:
            std::ranges::copy(lit.light.hours.row(r), out.begin());
            break;
        case LayerId::insolation:
            add_rows(beam, around, out);
            break;
        case LayerId::net_shortwave:
            absorbed_shortwave(lit.albedo.row(r), beam, lit.albedo.row(r), around, out);
            break;
        case LayerId::net_shortwave_uncertainty:
            add_rows(beam, around, out);
            absorbed_uncertainty(lit.albedo.row(r), lit.albedo_uncertainty.row(r), out,
                                 lit.light_uncertainty, out);
            break;
        default:
            break;
    }
}

void heat_row(LayerId id, const HeatPlanes& heat, const Plane<float>& net_light, float factor,
              int r, std::span<float> out) {
    const auto from = [&](const Plane<float>& plane, float times, float offset) {
        std::ranges::transform(plane.row(r), out.begin(),
                               [&](float value) { return value * times + offset; });
    };
    switch (id) {
        case LayerId::longwave_down:
            from(heat.down, factor, 0);
            break;
        case LayerId::longwave_up:
            from(heat.up, factor, 0);
            break;
        case LayerId::net_longwave:
            from(heat.net, factor, 0);
            break;
        case LayerId::surface_temperature:
            from(heat.surface_k, 1, -273.15F);
            break;
        case LayerId::net_radiation:
            std::ranges::transform(
                net_light.row(r), heat.net.row(r), out.begin(),
                [&](float light, float heat_left) { return (light + heat_left) * factor; });
            break;
        default:
            break;
    }
}

bool DryScope::outside(const Plane<float>& dry, int r, std::size_t i) const {
    constexpr float steepest_deg = 9.5F;  // ASTM E1980: low-sloped surfaces
    return !(dry.row(r)[i] >= 1) ||
           (slope_deg != nullptr && !(slope_deg->row(r)[i] < steepest_deg));
}

void DryScope::sri_row(const Plane<float>& albedo, const Plane<float>& emissivity,
                       const Plane<float>& dry, Wind wind, int r, std::span<float> out) const {
    solar_reflectance_index(albedo.row(r), emissivity.row(r), wind, out);
    for (std::size_t i = 0; i < out.size(); ++i)
        if (outside(dry, r, i)) out[i] = std::numeric_limits<float>::quiet_NaN();
}

}  // namespace sunbudget
