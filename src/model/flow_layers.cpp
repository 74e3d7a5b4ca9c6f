#include <algorithm>
#include <limits>

#include "flow_state.hpp"
#include "planes.hpp"
#include "sunbudget/raster/pyramid.hpp"

namespace sunbudget {

namespace {

auto copied(const Plane<float>& plane) {
    return [&plane](int r, std::span<float> out) { std::ranges::copy(plane.row(r), out.begin()); };
}
auto copied(Plane<float> ChangedAlbedo::*plane) {
    return [plane](const ChangedAlbedo& change, int r, std::span<float> out) {
        std::ranges::copy((change.*plane).row(r), out.begin());
    };
}

}  // namespace

void Flow::State::put(std::size_t n, std::size_t band, const Row& row, Sink& sink) {
    fit(stored_, ground.window);
    for (int r = 0; r < ground.window.height; ++r) {
        row(r, stored_.row(r));
        round_row(stored_.row(r), run.layers[n].file.quantum);
    }
    sink.put(n, band, ground.window, stored_);
    beside.keep(n, band, stored_);
}

void Flow::State::put(std::size_t n, std::size_t band, const Row& row, const Beside::Row& after,
                      Sink& sink) {
    put(n, band, row, sink);
    beside.put(n, band, stored_, after, sink);
}

void Flow::State::put_surface_layers(Sink& sink) {
    notes.ground(run, needs, ground);
    for (std::size_t n = 0; n < run.layers.size(); ++n)
        if (!run.layers[n].changed) put_surface_layer(n, sink);
    beside.put_treated(sink);
}

void Flow::State::put_surface_layer(std::size_t n, Sink& sink) {
    switch (run.layers[n].layer->id) {
        case LayerId::albedo:
            return put(n, 0, copied(ground.albedo), copied(&ChangedAlbedo::albedo), sink);
        case LayerId::albedo_uncertainty:
            return put(n, 0, copied(ground.albedo_uncertainty), sink);
        case LayerId::slope:
            return put(n, 0, copied(ground.slope_deg), sink);
        case LayerId::aspect:
            return put(n, 0, copied(ground.aspect_deg), sink);
        case LayerId::sky_view:
            return put(n, 0, copied(ground.sky_view), sink);
        case LayerId::quality:
            return sink.put(n, 0, ground.window, ground.flags);
        case LayerId::emissivity:
            return put(n, 0, copied(heat->emissivity()), copied(&ChangedAlbedo::emissivity), sink);
        case LayerId::sri:
            return put(
                n, 0,
                [&](int r, std::span<float> out) {
                    scope().sri_row(ground.albedo, heat->emissivity(), heat->dry(), run.heat.wind,
                                    r, out);
                },
                [&](const ChangedAlbedo& change, int r, std::span<float> out) {
                    scope().sri_row(change.albedo, change.emissivity, change.dry, run.heat.wind, r,
                                    out);
                },
                sink);
        default:
            return;
    }
}

bool Flow::State::is_thin(std::size_t band) const {
    return !run.light.thin.empty() && run.light.thin[band];
}

/// A band of those held, over the ground as it is and after a change of it.
LitBand Flow::State::lit(std::size_t held) const {
    const auto& band = light.band(held);
    return {band,
            band.diffuse,
            band.reflected,
            ground.albedo,
            ground.albedo_uncertainty,
            static_cast<float>(run.light_uncertainty)};
}
LitBand Flow::State::lit(std::size_t held, const ChangedAlbedo& change) const {
    const auto& band = light.band(held);
    return {band,
            light.ground_lights_sky() ? change.diffuse[held] : band.diffuse,
            run.terrain ? change.reflected[held] : band.reflected,
            change.albedo,
            ground.albedo_uncertainty,
            static_cast<float>(run.light_uncertainty)};
}

void Flow::State::put_light_layers(std::size_t band, std::size_t held, Sink& sink) {
    notes.light(run, ground.window, band, light.band(held), light.cloud_index(held));
    std::vector<float> rest;
    for (std::size_t n = 0; n < run.layers.size(); ++n) {
        const auto& layer = run.layers[n];
        if (!layer.layer->needs_sun || layer.layer->needs_air || layer.changed) continue;
        const auto factor = static_cast<float>(layer.factors[band]);
        const bool thin = is_thin(band) && layer.layer->id != LayerId::sunlit_hours;
        const auto row_of = [&](const LitBand& lit, int r, std::span<float> out) {
            light_row(layer.layer->id, lit, run.terrain.has_value(), r, rest, out);
            for (auto& value : out)
                value = thin ? std::numeric_limits<float>::quiet_NaN() : value * factor;
        };
        put(
            n, band, [&](int r, std::span<float> out) { row_of(lit(held), r, out); },
            [&](const ChangedAlbedo& change, int r, std::span<float> out) {
                row_of(lit(held, change), r, out);
            },
            sink);
    }
}

/// The sunlight a band's surface keeps, for what becomes of it.
void Flow::State::sum_net_light(std::size_t band, const LitBand& lit, Plane<float>& kept) const {
    fit(kept, ground.window);
    if (is_thin(band)) return kept.fill(std::numeric_limits<float>::quiet_NaN());
    std::vector<float> rest;
    for (int r = 0; r < ground.window.height; ++r)
        light_row(LayerId::net_shortwave, lit, run.terrain.has_value(), r, rest, kept.row(r));
}

void Flow::State::balance_changes(std::size_t band, std::size_t held) {
    for (auto& change : beside.albedos) {
        if (!change.touched || !change.heats) continue;
        if (needs.net_light) sum_net_light(band, lit(held, change), change.net_light);
        if (run.heat.longwave)
            heat->beside(change.emissivity, change.dry, change.net_light, change.heat);
    }
}

void Flow::State::put_heat_layers(std::size_t band, std::size_t held, Sink& sink) {
    if (!heat || !run.times) return;
    const Plane<float> no_plane;
    if (needs.net_light) sum_net_light(band, lit(held), net_light_);
    const auto& found = heat->band(band, run.terrain ? ground.sky_view : no_plane, net_light_);
    notes.heat(run, ground.window, band, *heat, found, net_light_);
    balance_changes(band, held);
    for (std::size_t n = 0; n < run.layers.size(); ++n) {
        const auto& [layer, file, factors, changed] = run.layers[n];
        if (changed || !layer->is_heat() || !layer->needs_time()) continue;
        const auto factor = static_cast<float>(factors[std::min(band, factors.size() - 1)]);
        const auto id = layer->id;
        put(
            n, band,
            [&](int r, std::span<float> out) { heat_row(id, found, net_light_, factor, r, out); },
            [&](const ChangedAlbedo& change, int r, std::span<float> out) {
                heat_row(id, change.heat, change.net_light, factor, r, out);
            },
            sink);
    }
}

}  // namespace sunbudget
