#pragma once

#include <span>
#include <vector>

#include "beside.hpp"
#include "heat_flow.hpp"

namespace sunbudget {

/// What the light layers of a band are made from.
struct LitBand {
    const BandPlanes& light;
    const Plane<float>& diffuse;
    const Plane<float>& reflected;
    const Plane<float>& albedo;
    const Plane<float>& albedo_uncertainty;  ///< looked at for its layer alone
    float light_uncertainty;                 ///< relative
};

/// A row of a layer of light, in W m-2 (hours for each 24). `rest` is scratch.
void light_row(LayerId id, const LitBand& lit, bool terrain, int r, std::vector<float>& rest,
               std::span<float> out);

/// A row of a layer of heat as it is stored, before rounding. `factor` is that from W m-2.
void heat_row(LayerId id, const HeatPlanes& heat, const Plane<float>& net_light, float factor,
              int r, std::span<float> out);

/// Where the balance of a dry surface holds: its temperature, and the index of ASTM E1980.
struct DryScope {
    const Plane<float>* slope_deg;  ///< nothing: at any slope

    [[nodiscard]] bool outside(const Plane<float>& dry, int r, std::size_t i) const;
    /// A row of the solar reflectance index, NaN outside.
    void sri_row(const Plane<float>& albedo, const Plane<float>& emissivity,
                 const Plane<float>& dry, Wind wind, int r, std::span<float> out) const;
};

}  // namespace sunbudget
