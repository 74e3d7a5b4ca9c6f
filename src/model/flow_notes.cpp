#include "flow_notes.hpp"

#include <array>

namespace sunbudget {

void FlowNotes::ground(const Run& run, const Needs& needs, const Ground& ground) const {
    const auto say = [&](const auto& plane, const char* name, const char* unit, const char* text) {
        note(plane, ground.window, {}, {name, unit, text});
    };
    say(ground.flags, "quality", "1", "flags: where the albedo came from and what was seen");
    if (run.has_surface()) say(ground.albedo, "albedo", "1", "albedo before rounding");
    say(ground.albedo_uncertainty, "albedo_uncertainty", "1", "its standard uncertainty");
    if (!run.terrain) return;
    say(ground.heights_m, "height", "m", "height of the ground");
    say(ground.slope_deg, "slope", "degree", "steepness");
    say(ground.aspect_deg, "aspect", "degree", "direction faced, clockwise from true north");
    if (needs.sky_view)
        say(ground.sky_view, "sky_view", "1", "share of an even sky's light past the terrain");
    say(ground.albedo_seen, "albedo_seen", "1", "mean albedo of the ground around");
}

void FlowNotes::open(const OpenPlanes& open, const Window& block, const Window& window,
                     std::size_t band) const {
    if (!listens(block)) return;
    constexpr std::array<Words, 9> parts{{
        {"open_beam_east", "W/m2", "open ground: sum of the beam's vector, east"},
        {"open_beam_north", "W/m2", "the same, north"},
        {"open_beam_up", "W/m2", "the same, up: the beam on level open ground"},
        {"open_circumsolar_east", "W/m2", "sky light around the sun, as a vector, east"},
        {"open_circumsolar_north", "W/m2", "the same, north"},
        {"open_circumsolar_up", "W/m2", "the same, up"},
        {"open_diffuse", "W/m2",
         "all sky light on level open ground, what ground and sky send to and fro included"},
        {"open_horizon", "W/m2", "sky light from the rim of the sky"},
        {"open_sunlit", "h", "hours with the sun up, for each 24 h"},
    }};
    for (std::size_t i = 0; i < parts.size(); ++i)
        note(open.plane(static_cast<OpenPlanes::Part>(i)), window, band, parts[i]);
}

void FlowNotes::shaded(const ShadedBlock& part, std::size_t band, bool suns) const {
    if (!listens(part.block)) return;
    const auto all = part.first_band + band;
    if (all == 0) {
        note(part.east, part.block, {}, {"normal_east", "1", "the surface's unit normal, east"});
        note(part.north, part.block, {}, {"normal_north", "1", "the same, north"});
        note(part.up, part.block, {}, {"normal_up", "1", "the same, up: cosine of the slope"});
    }
    if (!suns) return;
    note(part.beam[band], part.block, all,
         {"shaded_beam", "W/m2", "beam past the terrain, at the reference place and height"});
    note(part.around[band], part.block, all,
         {"shaded_circumsolar", "W/m2", "sky light around the sun past the terrain, there"});
    note(part.hours[band], part.block, all, {"shaded_sunlit", "h", "hours in the sun, there"});
    const auto& whole = part.whole[band];
    note(static_cast<double>(whole.beam[2]), all,
         {"reference_beam_up", "W/m2", "beam on level open ground at the reference place"});
    note(static_cast<double>(whole.hours), all,
         {"reference_sunlit", "h", "hours with the sun up at the reference place"});
}

void FlowNotes::light(const Run& run, const Window& window, std::size_t band,
                      const BandPlanes& planes, const Plane<float>* index) const {
    const auto say = [&](const auto& plane, const char* name, const char* unit, const char* text) {
        note(plane, window, band, {name, unit, text});
    };
    if (index != nullptr)
        say(*index, "clear_sky_index", "1", "what clouds leave of the clear sky's light");
    say(planes.direct, "direct", "W/m2", "sunlight straight from the sun, on the surface");
    say(planes.diffuse, "diffuse", "W/m2", "sky light on the surface");
    if (!run.terrain) return;
    say(planes.reflected, "reflected", "W/m2", "light from the ground in view");
    say(planes.hours, "sunlit", "h", "hours in the sun, for each 24 h");
}

void FlowNotes::heat(const Run& run, const Window& window, std::size_t band, const HeatFlow& flow,
                     const HeatPlanes& found, const Plane<float>& net_light) const {
    const auto say = [&](const auto& plane, const char* name, const char* unit, const char* text) {
        note(plane, window, band, {name, unit, text});
    };
    if (band == 0)
        note(flow.emissivity(), window, {}, {"emissivity", "1", "emissivity before rounding"});
    say(flow.air_k(), "air_temperature", "K", "of the air at the pixel's height");
    if (run.heat.longwave && run.heat.longwave->daily)
        say(found.net, "net_longwave", "W/m2", "of whole days, level open ground, before rounding");
    else
        say(flow.sky(), "longwave_sky", "W/m2",
            "heat radiation of the whole sky on level open ground");
    say(net_light, "net_light", "W/m2", "sunlight that is kept");
    say(found.down, "longwave_down", "W/m2", "heat radiation from the sky and the ground in view");
    say(found.surface_k, "surface_temperature", "K", "of the ground");
    say(found.up, "longwave_up", "W/m2", "heat radiation sent up and reflected");
}

}  // namespace sunbudget
