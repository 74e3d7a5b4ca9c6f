#include "needs.hpp"

#include <algorithm>
#include <initializer_list>

namespace sunbudget {

namespace {

bool wants(const Run& run, std::initializer_list<LayerId> ids) {
    return std::any_of(run.layers.begin(), run.layers.end(), [&](const OutputLayer& layer) {
        return std::find(ids.begin(), ids.end(), layer.layer->id) != ids.end();
    });
}

bool any(const Run& run, bool Layer::*need) {
    return std::any_of(run.layers.begin(), run.layers.end(),
                       [&](const OutputLayer& layer) { return layer.layer->*need; });
}

bool balances_temperature(const Run& run) {
    return run.heat.surface == SurfaceFrom::balance && any(run, &Layer::needs_surface_temperature);
}

}  // namespace

Needs::Needs(const Run& run)
    : albedo_uncertainty(any(run, &Layer::needs_albedo_uncertainty)),
      net_light(wants(run, {LayerId::net_radiation}) || balances_temperature(run)),
      light(net_light || any(run, &Layer::needs_sun)),
      suns(net_light || wants(run, {LayerId::insolation, LayerId::direct, LayerId::diffuse,
                                    LayerId::net_shortwave, LayerId::net_shortwave_uncertainty,
                                    LayerId::sunlit_hours})),
      sky_view(net_light || (run.heat.longwave && !run.heat.longwave->daily) ||
               wants(run, {LayerId::insolation, LayerId::diffuse, LayerId::reflected,
                           LayerId::net_shortwave, LayerId::net_shortwave_uncertainty,
                           LayerId::sky_view})),
      reflected(net_light ||
                wants(run, {LayerId::insolation, LayerId::reflected, LayerId::net_shortwave,
                            LayerId::net_shortwave_uncertainty})),
      heat(std::any_of(run.layers.begin(), run.layers.end(),
                       [](const OutputLayer& layer) { return layer.layer->is_heat(); })),
      scope(wants(run, {LayerId::sri}) || balances_temperature(run)),
      level(run.terrain && wants(run, {LayerId::sri})) {}

}  // namespace sunbudget
