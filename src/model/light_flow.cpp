#include "light_flow.hpp"

#include <algorithm>
#include <limits>

#include "flags.hpp"
#include "planes.hpp"
#include "sunbudget/base/parallel.hpp"
#include "sunbudget/physics/cloudy_sky.hpp"
#include "sunbudget/physics/inclined_light.hpp"
#include "sunbudget/tables/quality.hpp"

namespace sunbudget {

LightFlow::LightFlow(const Run& run, const Needs& needs, const SharedLight& shared, int thread,
                     Ground& ground, Beside& beside, const FlowNotes& notes)
    : run_(run),
      needs_(needs),
      field_(shared.field()),
      ground_(ground),
      beside_(beside),
      notes_(notes),
      open_(shared.field(), thread),
      clouds_(run) {
    if (!run.terrain) return;
    if (field_ == nullptr) own_locator_.emplace(run.grid);
    locator_ = own_locator_ ? &*own_locator_ : &field_->locator(thread);
    shader_.emplace(*shared.terrain(), field_, *locator_, thread);
}

void LightFlow::watch(Probe& probe) {
    if (shader_) shader_->watch(probe);
}

void LightFlow::begin() {
    if (shader_) {
        shader_->heights(ground_.window, ground_.heights_m);
        for (int r = 0; r < ground_.window.height; ++r)
            flag_nan(ground_.heights_m.row(r), ground_.flags.row(r), quality::no_elevation, 0);
    }
    open_.begin(ground_);
}

void LightFlow::some_bands(std::size_t first, std::size_t count) {
    bands_.resize(std::max(bands_.size(), count));
    clouds_.read(ground_.window, first, count);
    if (run_.terrain && (count > 0 || first == 0))
        terrain_bands(first, count);
    else if (!run_.terrain)
        flat_bands(first, count);
}

/// Light is missing where the height is, or where the projection has no place on Earth.
void LightFlow::flag_missing() {
    const auto& light = run_.terrain ? open_.plane(Part::beam_up) : bands_[0].direct;
    for (int r = 0; r < light.height(); ++r)
        flag_nan(light.row(r), ground_.flags.row(r), quality::outside_projection,
                 quality::no_elevation | quality::no_sky);
}

std::span<float> LightFlow::row(Plane<float>& plane, const Window& window, int r) const {
    return over(plane, ground_.window, window, r);
}

void LightFlow::see_albedo() {
    if ((needs_.reflected && run_.terrain) || ground_lights_sky()) ground_.see_albedo(beside_);
}

/// Light to and fro between ground and sky over one block of the lattice, added to a plane of sky light; for
/// changes of albedo to a copy of it.
void LightFlow::add_from_ground(std::size_t block, std::size_t band, Plane<float>& diffuse) {
    if (!ground_lights_sky()) return;
    open_.fill_thrown_back(block, band);
    const auto& where = open_.block(block);
    for (auto& change : beside_.albedos) {
        if (!change.touched) continue;
        fit(change.open_diffuse, ground_.window);
        for (int r = 0; r < where.height; ++r)
            std::ranges::copy(row(diffuse, where, r), row(change.open_diffuse, where, r).begin());
        open_.add_thrown_back(block, change.albedo_seen, change.open_diffuse);
    }
    open_.add_thrown_back(block, ground_.albedo_seen, diffuse);
}

void LightFlow::flat_bands(std::size_t first, std::size_t count) {
    if (first == 0) see_albedo();
    for (std::size_t held = 0; held < count; ++held) {
        fit(bands_[held].direct, ground_.window);
        fit(bands_[held].diffuse, ground_.window);
        for (std::size_t block = 0; block < open_.blocks(); ++block)
            flat_block(block, first + held, held);
        if (!clouds_.empty()) dim_flat(first + held, held);
    }
}

void LightFlow::flat_block(std::size_t block, std::size_t band, std::size_t held) {
    open_.fill(block, band, Part::beam_up, bands_[held].direct);
    open_.fill(block, band, Part::diffuse, bands_[held].diffuse);
    add_from_ground(block, band, bands_[held].diffuse);
    if (!ground_lights_sky()) return;
    const auto& where = open_.block(block);
    for (auto& change : beside_.albedos)
        for (int r = 0; change.touched && r < where.height; ++r)
            std::ranges::copy(row(change.open_diffuse, where, r),
                              row(change.diffuse[held], where, r).begin());
}

/// Level open ground's light under the band's clouds.
void LightFlow::dim_flat(std::size_t band, std::size_t held) {
    const double overcast = run_.light.overcast[band];
    const auto copy_of = [](std::span<const float> values) {
        return std::vector<float>(values.begin(), values.end());
    };
    for (int r = 0; r < ground_.window.height; ++r) {
        const auto index = clouds_.of(held).row(r);
        const auto beam = bands_[held].direct.row(r), sky = bands_[held].diffuse.row(r);
        const auto open_beam = copy_of(beam), open_sky = copy_of(sky);
        for (auto& change : beside_.albedos) {
            if (!change.touched || !ground_lights_sky()) continue;
            const auto own = change.diffuse[held].row(r);
            const auto open_own = copy_of(own);
            auto unused = open_beam;
            dim_row({index, open_beam, open_own, {}, unused, own, {}}, overcast);
        }
        dim_row({index, open_beam, open_sky, {}, beam, sky, {}}, overcast);
    }
}

void LightFlow::terrain_bands(std::size_t first, std::size_t count) {
    for (std::size_t i = 0; i < count; ++i)
        for (auto* plane :
             {&bands_[i].direct, &bands_[i].diffuse, &bands_[i].reflected, &bands_[i].hours}) {
            fit(*plane, ground_.window);
            plane->fill(std::numeric_limits<float>::quiet_NaN());
        }
    if (first == 0) {
        ground_.forget_planes();
        see_albedo();
    }
    for (std::size_t block = 0; block < ground_.blocks.size(); ++block) {
        throw_if_stopped();
        terrain_block(block, first, count);
    }
}

void LightFlow::terrain_block(std::size_t block, std::size_t first, std::size_t count) {
    const auto parts = shade(ground_.blocks[block], first, count);
    for (std::size_t held = 0; held < count; ++held) {
        open_.fill_all(block, first + held);
        add_from_ground(block, first + held, open_.plane(Part::diffuse));
        notes_.open(open_, ground_.blocks[block], ground_.window, first + held);
        for (const auto& part : parts) {
            if (!part.located) continue;
            compose(part, held);
            if (!clouds_.empty()) dim(part, held, run_.light.overcast[first + held]);
            notes_.shaded(part, held, needs_.suns);
        }
    }
}

/// The shadows of a block's parts; the first bands bring slopes and sky view.
std::vector<ShadedBlock> LightFlow::shade(const Window& block, std::size_t first,
                                          std::size_t count) {
    std::vector<ShadedBlock> parts;
    for (const auto& window : steady_parts(block, *locator_)) {
        auto& part = parts.emplace_back();
        shader_->shade(window, first, needs_.suns ? count : 0, needs_.sky_view && first == 0, part);
        if (part.located && first == 0) ground_.keep(part);
    }
    return parts;
}

LightFlow::Around LightFlow::around(std::size_t held) {
    return {open_.plane(Part::diffuse), ground_.albedo_seen, bands_[held].reflected,
            &bands_[held].diffuse};
}
LightFlow::Around LightFlow::around(std::size_t held, ChangedAlbedo& change) {
    const bool own_sky = ground_lights_sky();
    return {own_sky ? change.open_diffuse : open_.plane(Part::diffuse), change.albedo_seen,
            change.reflected[held], own_sky ? &change.diffuse[held] : nullptr};
}

/// Open light and shadows brought together: the band's light on the part's inclined surface.
void LightFlow::compose(const ShadedBlock& part, std::size_t held) {
    std::vector<float> circumsolar(static_cast<std::size_t>(part.block.width));
    for (int r = 0; r < part.block.height; ++r) {
        if (needs_.suns) compose_sun(part, held, r, circumsolar);
        if (!needs_.sky_view) continue;
        compose_around(part, r, circumsolar, around(held));
        for (auto& change : beside_.albedos)
            if (change.touched) compose_around(part, r, circumsolar, around(held, change));
    }
}

/// Beam, sky light from around the sun, and hours in the sun.
void LightFlow::compose_sun(const ShadedBlock& part, std::size_t held, int r,
                            std::span<float> circumsolar) {
    const auto& where = part.block;
    const auto& whole = part.whole[held];
    const auto sunlit = [&](const Plane<float>& shaded, const std::array<float, 3>& sum, Part east,
                            Part north, Part up) {
        return SunlightRow{shaded.row(r),
                           part.hours[held].row(r),
                           sum[0],
                           sum[1],
                           sum[2],
                           whole.hours,
                           open_.row(east, where, r),
                           open_.row(north, where, r),
                           open_.row(up, where, r)};
    };
    const NormalRow normal{part.east.row(r), part.north.row(r), part.up.row(r)};
    sunlight(sunlit(part.beam[held], whole.beam, Part::beam_east, Part::beam_north, Part::beam_up),
             normal, row(bands_[held].direct, where, r));
    sunlight(sunlit(part.around[held], whole.around, Part::circumsolar_east,
                    Part::circumsolar_north, Part::circumsolar_up),
             normal, circumsolar);
    time_in_sun(part.hours[held].row(r), whole.hours, open_.row(Part::sunlit_h_a_day, where, r),
                row(bands_[held].hours, where, r));
}

/// Light from sky and ground.
void LightFlow::compose_around(const ShadedBlock& part, int r, std::span<const float> circumsolar,
                               const Around& around) {
    const auto& where = part.block;
    const auto view = row(ground_.sky_view, where, r),
               open_diffuse = row(around.open_diffuse, where, r);
    if (needs_.suns && around.diffuse != nullptr)
        skylight({view, open_diffuse, open_.row(Part::horizon, where, r), circumsolar,
                  open_.row(Part::circumsolar_up, where, r)},
                 part.up.row(r), row(*around.diffuse, where, r));
    if (needs_.reflected)
        light_from_ground(view, row(around.albedo_seen, where, r),
                          open_.row(Part::beam_up, where, r), open_diffuse,
                          row(around.reflected, where, r));
}

/// A part's light under the band's clouds: the changes' first, since the base's is dimmed in its place.
void LightFlow::dim(const ShadedBlock& part, std::size_t held, double overcast) {
    std::vector<float> beam, sky;
    for (int r = 0; r < part.block.height; ++r) {
        const auto direct = row(bands_[held].direct, part.block, r),
                   diffuse = row(bands_[held].diffuse, part.block, r);
        for (auto& change : beside_.albedos) {
            if (!change.touched) continue;
            const auto own = around(held, change);
            beam.assign(direct.begin(), direct.end());
            sky.assign(diffuse.begin(), diffuse.end());
            dim_row_of(part, held, r, own, beam,
                       own.diffuse != nullptr ? row(*own.diffuse, part.block, r) : sky, overcast);
        }
        dim_row_of(part, held, r, around(held), direct, diffuse, overcast);
    }
}

void LightFlow::dim_row_of(const ShadedBlock& part, std::size_t held, int r, const Around& around,
                           std::span<float> beam, std::span<float> sky, double overcast) {
    const auto& where = part.block;
    dim_row({over(clouds_.of(held), ground_.window, where, r), open_.row(Part::beam_up, where, r),
             row(around.open_diffuse, where, r), row(ground_.sky_view, where, r), beam, sky,
             row(around.reflected, where, r)},
            overcast);
}

}  // namespace sunbudget
