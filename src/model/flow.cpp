#include "sunbudget/model/flow.hpp"

#include <algorithm>
#include <cmath>
#include <functional>
#include <numbers>
#include <optional>

#include "beside.hpp"
#include "heat_flow.hpp"
#include "sunbudget/base/parallel.hpp"
#include "sunbudget/model/neighbourhood.hpp"
#include "sunbudget/model/probe.hpp"
#include "sunbudget/model/shading.hpp"
#include "sunbudget/model/surface.hpp"
#include "sunbudget/physics/cloudy_sky.hpp"
#include "sunbudget/physics/gradient.hpp"
#include "sunbudget/physics/inclined_light.hpp"
#include "sunbudget/physics/shortwave.hpp"
#include "sunbudget/raster/pyramid.hpp"
#include "sunbudget/tables/quality.hpp"

namespace sunbudget {

namespace {

/// Bands whose planes are held at once: more would cost memory, fewer would cost horizons.
constexpr std::size_t bands_at_once = 12;

std::optional<double> constant_height(const Run& run) {
    return run.terrain ? std::nullopt : std::optional<double>(run.constant_height_m);
}

/// Windows of the lattice's blocks inside a window that starts on the lattice.
std::vector<Window> blocks_of(const Window& window) {
    std::vector<Window> blocks;
    for (int row = 0; row < window.height; row += block_px)
        for (int column = 0; column < window.width; column += block_px)
            blocks.push_back({window.column + column, window.row + row,
                              std::min(block_px, window.width - column),
                              std::min(block_px, window.height - row)});
    return blocks;
}

/// A plane of the size wanted, the old memory kept where it fits.
template <typename T>
void resize(Plane<T>& plane, const Window& window) {
    if (plane.width() != window.width || plane.height() != window.height)
        plane = Plane<T>(window.width, window.height);
}

/// The part of a plane's row that lies over a window inside the plane's frame.
std::span<float> over(Plane<float>& plane, const Window& frame, const Window& window, int row) {
    return plane.row(static_cast<int>(window.row - frame.row) + row)
        .subspan(static_cast<std::size_t>(window.column - frame.column),
                 static_cast<std::size_t>(window.width));
}

bool wants(const Run& run, std::initializer_list<LayerId> ids) {
    return std::any_of(run.layers.begin(), run.layers.end(), [&](const OutputLayer& layer) {
        return std::find(ids.begin(), ids.end(), layer.layer->id) != ids.end();
    });
}

/// What a run asks of its light, its terrain and its air.
struct Needs {
    bool albedo_uncertainty;
    bool net_light;  ///< for what becomes of it: net radiation, a balanced temperature
    bool light, suns, sky_view, reflected;
    bool heat, scope, level;
    explicit Needs(const Run& run)
        : albedo_uncertainty(any(run, &Layer::needs_albedo_uncertainty)),
          net_light(wants(run, {LayerId::net_radiation}) ||
                    (run.heat.surface == SurfaceFrom::balance &&
                     any(run, &Layer::needs_surface_temperature))),
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
          scope(wants(run, {LayerId::sri}) || (run.heat.surface == SurfaceFrom::balance &&
                                               any(run, &Layer::needs_surface_temperature))),
          level(run.terrain && wants(run, {LayerId::sri})) {}

  private:
    static bool any(const Run& run, bool Layer::*need) {
        return std::any_of(run.layers.begin(), run.layers.end(),
                           [&](const OutputLayer& layer) { return layer.layer->*need; });
    }
};

/// What the light layers of a band are made from.
struct LitBand {
    const BandPlanes& light;
    const Plane<float>& diffuse;
    const Plane<float>& reflected;
    const Plane<float>& albedo;
    const Plane<float>& albedo_uncertainty;  ///< looked at for its layer alone
    float light_uncertainty;                 ///< relative
};

/// A row of a layer in W m-2 (hours for each 24). `rest` is scratch.
void light_row(LayerId id, const LitBand& lit, bool terrain, int r, std::vector<float>& rest,
               std::span<float> out) {
    const auto beam = lit.light.direct.row(r), sky = lit.diffuse.row(r);
    std::span<const float> around = sky;
    if (terrain && (id == LayerId::insolation || id == LayerId::net_shortwave ||
                    id == LayerId::net_shortwave_uncertainty)) {
        rest.resize(sky.size());
        std::transform(sky.begin(), sky.end(), lit.reflected.row(r).begin(), rest.begin(),
                       std::plus<>());
        around = rest;
    }
    const auto copy = [&](const Plane<float>& plane) {
        std::copy(plane.row(r).begin(), plane.row(r).end(), out.begin());
    };
    switch (id) {
        case LayerId::direct:
            copy(lit.light.direct);
            break;
        case LayerId::diffuse:
            copy(lit.diffuse);
            break;
        case LayerId::reflected:
            copy(lit.reflected);
            break;
        case LayerId::sunlit_hours:
            copy(lit.light.hours);
            break;
        case LayerId::insolation:
            std::transform(beam.begin(), beam.end(), around.begin(), out.begin(), std::plus<>());
            break;
        case LayerId::net_shortwave:
            absorbed_shortwave(lit.albedo.row(r), beam, lit.albedo.row(r), around, out);
            break;
        case LayerId::net_shortwave_uncertainty:
            std::transform(beam.begin(), beam.end(), around.begin(), out.begin(), std::plus<>());
            absorbed_uncertainty(lit.albedo.row(r), lit.albedo_uncertainty.row(r), out,
                                 lit.light_uncertainty, out);
            break;
        default:
            break;
    }
}

/// A row of a layer of heat as it is stored, before rounding. `factor` is that from W m-2.
void heat_row(LayerId id, const HeatPlanes& heat, const Plane<float>& net_light, float factor,
              int r, std::span<float> out) {
    const auto from = [&](const Plane<float>& plane, float times, float offset) {
        std::transform(plane.row(r).begin(), plane.row(r).end(), out.begin(),
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
            std::transform(net_light.row(r).begin(), net_light.row(r).end(),
                           heat.net.row(r).begin(), out.begin(), [&](float light, float heat_left) {
                               return (light + heat_left) * factor;
                           });
            break;
        default:
            break;
    }
}

/// Adds a flag where there is no value, unless another flag says why already. Without branches.
void flag_nan(std::span<const float> values, std::span<std::uint16_t> flags, std::uint16_t flag,
              std::uint16_t unless) {
    for (std::size_t i = 0; i < values.size(); ++i) {
        const bool missing = (values[i] != values[i]) & ((flags[i] & unless) == 0);
        flags[i] = static_cast<std::uint16_t>(flags[i] | (missing ? flag : 0));
    }
}

}  // namespace

SharedLight::SharedLight(const Run& run, int threads, const std::filesystem::path& scratch_folder) {
    if (run.times && Needs(run).light)
        field_ = std::make_unique<LightField>(*run.times, run.sky, run.grid, threads,
                                              constant_height(run), run.terrain.has_value(),
                                              run.sky_raster ? &*run.sky_raster : nullptr);
    if (run.terrain)
        terrain_ = std::make_unique<SharedTerrain>(*run.terrain, run.grid, scratch_folder);
    for (std::size_t i = 0; i < run.changes.size(); ++i)
        if (run.changes[i].height)
            raised_.push_back(std::make_unique<RaisedRun>(run, i, threads, scratch_folder));
    if (run.heat.longwave && !run.heat.longwave->by_pixel())
        longwave_ = std::make_unique<LongwaveField>(*run.times, *run.heat.longwave, run.grid,
                                                    threads, constant_height(run));
}
SharedLight::~SharedLight() = default;

struct Flow::State {
    const Run& run;
    const SharedLight& shared;
    int thread;
    Needs needs;
    SurfaceReader surface;
    std::optional<Locator> own_locator;  ///< where no light field has one
    std::optional<BlockShader> shader;
    std::optional<HeatFlow> heat;

    Window window;
    Plane<float> albedo, albedo_uncertainty, heights_m, stored, net_light;
    Plane<std::uint16_t> flags;
    Plane<float> sky_view, slope_deg, aspect_deg, albedo_seen;
    std::vector<LightField::Block> light_blocks;
    std::vector<BandPlanes> bands;
    std::vector<Reader> cloud_readers;
    std::vector<Plane<float>> clear_index;  ///< by band of those held, where clouds are a raster's
    std::array<Plane<float>, OpenLight::values> open;
    std::map<std::uint16_t, std::uint64_t> flag_counts;
    Probe* probe = nullptr;
    Beside beside;                               ///< changes of albedo
    std::vector<std::unique_ptr<State>> raised;  ///< changes of height, as shared.raised()

    State(const Run& r, const SharedLight& s, int t)
        : run(r), shared(s), thread(t), needs(r), surface(r), beside(r) {
        for (const auto& one : shared.raised())
            raised.push_back(std::make_unique<State>(one->run, one->light(), t));
        for (const auto& raster : run.light.rasters) cloud_readers.emplace_back(raster);
        if (needs.heat) heat.emplace(run, shared.longwave(), thread);
        if (!run.terrain) return;
        if (shared.field() == nullptr) own_locator.emplace(run.grid);
        shader.emplace(*shared.terrain(), shared.field(), locator(), thread);
    }
    [[nodiscard]] const Locator& locator() const {
        return own_locator ? *own_locator : shared.field()->locator(thread);
    }

    void read_heights();
    void read_clouds(std::size_t first, std::size_t count);
    [[nodiscard]] double index_of(double value, std::size_t band) const;
    void prepare_light();
    void flag_missing_light(const Plane<float>& light);
    void count_flags();
    void flat_bands(std::size_t first, std::size_t count);
    void terrain_bands(std::size_t first, std::size_t count);
    void shade_block(const Window& block, std::size_t first, std::size_t count);
    void keep_ground(const ShadedBlock& part);
    void fill_open(std::size_t block, std::size_t band);
    [[nodiscard]] bool ground_lights_sky() const;
    void add_from_ground(std::size_t block, std::size_t band, Plane<float>& diffuse);
    void add_thrown_back(std::size_t block, Plane<float>& seen, Plane<float>& diffuse);
    void compose(const ShadedBlock& part, std::size_t band);
    void dim(const ShadedBlock& part, std::size_t band, double overcast);
    void see_albedo();
    void put_surface_layers(Sink& sink);
    [[nodiscard]] bool outside_scope(const Plane<float>& dry, int r, std::size_t i) const;
    void flag_outside_scope();
    void sri_row(const Plane<float>& own_albedo, const Plane<float>& emissivity,
                 const Plane<float>& dry, int r, std::span<float> out) const;
    [[nodiscard]] LitBand lit(std::size_t held) const;
    [[nodiscard]] LitBand lit(std::size_t held, const ChangedAlbedo& change) const;
    void sum_net_light(std::size_t band, const LitBand& ground, Plane<float>& kept) const;
    void put_heat_layers(std::size_t band, std::size_t held, Sink& sink);
    template <class Value>
    void note(const Plane<Value>& plane, const Window& frame, std::optional<std::size_t> band,
              const char* name, const char* unit, const char* text) const;
    void note_surface() const;
    void note_open(const Window& block, std::size_t band) const;
    void note_shaded(const ShadedBlock& part, std::size_t band) const;
    void note_band(std::size_t band, const BandPlanes& planes) const;
    void put_light_layers(std::size_t band, std::size_t held, Sink& sink);
    void begin(const Window& where);
    void some_bands(std::size_t first, std::size_t count, Sink& sink);
    void put_plane(std::size_t n, std::size_t band,
                   const std::function<void(int, std::span<float>)>& row, Sink& sink);
};

void Flow::State::read_heights() {
    if (!run.terrain) return;
    shader->heights(window, heights_m);
    for (int r = 0; r < window.height; ++r)
        flag_nan(heights_m.row(r), flags.row(r), quality::no_elevation, 0);
}

/// What the rasters say of each band held, as a clear-sky index. A share of the sky that is none has no value.
void Flow::State::read_clouds(std::size_t first, std::size_t count) {
    if (cloud_readers.empty()) return;
    clear_index.resize(count);
    for (std::size_t i = 0; i < count; ++i) {
        resize(clear_index[i], window);
        cloud_readers[std::min(first + i, cloud_readers.size() - 1)].read(window, clear_index[i]);
        for (int r = 0; r < window.height; ++r)
            for (auto& value : clear_index[i].row(r))
                value = static_cast<float>(index_of(static_cast<double>(value), first + i));
    }
}

double Flow::State::index_of(double value, std::size_t band) const {
    constexpr double none = std::numeric_limits<double>::quiet_NaN();
    // Beside bright clouds a moment may have half as much again as the clear sky, no more.
    constexpr double highest_index = 1.5;
    if (!run.light.rasters_are_cloud) return value >= 0 && value <= highest_index ? value : none;
    if (!(value >= 0 && value <= 1)) return none;
    return run.times->instant ? kasten_czeplak1980_index(value)
                              : 1 - (1 - run.light.overcast[band]) * value;
}

void Flow::State::prepare_light() {
    light_blocks.clear();
    if (shared.field() == nullptr) return;
    for (const auto& block : blocks_of(window)) {
        light_blocks.push_back(shared.field()->prepare(block, window, heights_m, thread));
        light_blocks.back().each_sky_row([&](int r, std::span<const float> values) {
            const auto row =
                flags.row(static_cast<int>(block.row - window.row) + r)
                    .subspan(static_cast<std::size_t>(block.column - window.column), values.size());
            flag_nan(values, row, quality::no_sky, 0);
        });
    }
}

/// Whether sky light waits for the albedo of the ground.
bool Flow::State::ground_lights_sky() const {
    return shared.field() != nullptr && shared.field()->has(LightField::Part::thrown_back);
}

/// Light to and fro between ground and sky over one block of the lattice, added to a plane of sky light; for
/// changes of albedo to a copy of it.
void Flow::State::add_from_ground(std::size_t block, std::size_t band, Plane<float>& diffuse) {
    using Part = LightField::Part;
    if (!ground_lights_sky()) return;
    std::array planes{Part::thrown_back, Part::thrown_back_twice};
    for (const auto part : planes) {
        auto& plane = open[static_cast<std::size_t>(part)];
        resize(plane, window);
        shared.field()->fill(light_blocks[block], band, part, heights_m, plane);
    }
    const auto& where = light_blocks[block].window();
    for (auto& change : beside.albedos) {
        if (!change.touched) continue;
        resize(change.open_diffuse, window);
        for (int r = 0; r < where.height; ++r)
            std::ranges::copy(over(diffuse, window, where, r),
                              over(change.open_diffuse, window, where, r).begin());
        add_thrown_back(block, change.albedo_seen, change.open_diffuse);
    }
    add_thrown_back(block, albedo_seen, diffuse);
}

void Flow::State::add_thrown_back(std::size_t block, Plane<float>& seen, Plane<float>& diffuse) {
    using Part = LightField::Part;
    const auto& where = light_blocks[block].window();
    const auto row_of = [&](Part part, int r) {
        return over(open[static_cast<std::size_t>(part)], window, where, r);
    };
    for (int r = 0; r < where.height; ++r)
        add_ground_and_sky(over(seen, window, where, r), row_of(Part::thrown_back, r),
                           row_of(Part::thrown_back_twice, r), over(diffuse, window, where, r));
}

/// Light is missing where the height is, or where the projection has no place on Earth.
void Flow::State::flag_missing_light(const Plane<float>& light) {
    for (int r = 0; r < light.height(); ++r)
        flag_nan(light.row(r), flags.row(r), quality::outside_projection,
                 quality::no_elevation | quality::no_sky);
}

/// Flags come in runs, often of whole rows: the map is asked once a run, not once a pixel.
void Flow::State::count_flags() {
    for (int r = 0; r < flags.height(); ++r) {
        const auto row = flags.row(r);
        if (std::count(row.begin(), row.end(), row.front()) ==
            static_cast<std::ptrdiff_t>(row.size())) {
            flag_counts[row.front()] += row.size();
            continue;
        }
        for (auto first = row.begin(); first != row.end();) {
            const auto last =
                std::find_if(first, row.end(), [&](auto flag) { return flag != *first; });
            flag_counts[*first] += static_cast<std::uint64_t>(last - first);
            first = last;
        }
    }
}

void Flow::State::flat_bands(std::size_t first, std::size_t count) {
    if (first == 0) see_albedo();
    for (std::size_t i = 0; i < count; ++i) {
        resize(bands[i].direct, window);
        resize(bands[i].diffuse, window);
        for (std::size_t b = 0; b < light_blocks.size(); ++b) {
            shared.field()->fill(light_blocks[b], first + i, LightField::Part::beam_up, heights_m,
                                 bands[i].direct);
            shared.field()->fill(light_blocks[b], first + i, LightField::Part::diffuse, heights_m,
                                 bands[i].diffuse);
            add_from_ground(b, first + i, bands[i].diffuse);
            if (!ground_lights_sky()) continue;
            for (auto& change : beside.albedos)
                for (int r = 0; change.touched && r < light_blocks[b].window().height; ++r)
                    std::ranges::copy(
                        over(change.open_diffuse, window, light_blocks[b].window(), r),
                        over(change.diffuse[i], window, light_blocks[b].window(), r).begin());
        }
        for (int r = 0; r < window.height && !clear_index.empty(); ++r) {
            const auto beam = bands[i].direct.row(r), sky = bands[i].diffuse.row(r);
            const std::vector<float> open_beam(beam.begin(), beam.end()),
                open_sky(sky.begin(), sky.end());
            for (auto& change : beside.albedos) {
                if (!change.touched || !ground_lights_sky()) continue;
                const auto own = change.diffuse[i].row(r);
                const std::vector<float> open_own(own.begin(), own.end());
                std::vector<float> unused(beam.begin(), beam.end());
                dim_row({clear_index[i].row(r), open_beam, open_own, {}, unused, own, {}},
                        run.light.overcast[first + i]);
            }
            dim_row({clear_index[i].row(r), open_beam, open_sky, {}, beam, sky, {}},
                    run.light.overcast[first + i]);
        }
    }
}

void Flow::State::terrain_bands(std::size_t first, std::size_t count) {
    for (std::size_t i = 0; i < count; ++i)
        for (auto* plane :
             {&bands[i].direct, &bands[i].diffuse, &bands[i].reflected, &bands[i].hours}) {
            resize(*plane, window);
            plane->fill(std::numeric_limits<float>::quiet_NaN());
        }
    if (first == 0) {
        for (auto* plane : {&sky_view, &slope_deg, &aspect_deg}) {
            resize(*plane, window);
            plane->fill(std::numeric_limits<float>::quiet_NaN());
        }
        see_albedo();
    }
    const auto blocks = blocks_of(window);
    for (std::size_t b = 0; b < blocks.size(); ++b) {
        throw_if_stopped();
        std::vector<ShadedBlock> parts;
        for (const auto& part : steady_parts(blocks[b], locator())) {
            parts.emplace_back();
            shader->shade(part, first, needs.suns ? count : 0, needs.sky_view && first == 0,
                          parts.back());
            if (parts.back().located && first == 0) keep_ground(parts.back());
        }
        for (std::size_t band = 0; band < count && shared.field() != nullptr; ++band) {
            fill_open(b, first + band);
            note_open(blocks[b], first + band);
            for (const auto& part : parts)
                if (part.located) {
                    compose(part, band);
                    if (!clear_index.empty()) dim(part, band, run.light.overcast[first + band]);
                    note_shaded(part, band);
                }
        }
    }
}

/// Slope, aspect and sky view of a part, for their layers and for every band.
void Flow::State::keep_ground(const ShadedBlock& part) {
    for (int r = 0; r < part.block.height; ++r) {
        const auto slope = over(slope_deg, window, part.block, r),
                   aspect = over(aspect_deg, window, part.block, r);
        slope_and_aspect(part.east.row(r), part.north.row(r), part.up.row(r), slope, aspect);
        for (auto& value : slope) value *= static_cast<float>(180 / std::numbers::pi);
        for (auto& value : aspect) {
            value *= static_cast<float>(180 / std::numbers::pi);
            // North is 0, also for what the stored step would round up to 360.
            if (value > 360 - 1.0F / 128) value = 0;
        }
        if (!part.sky_view.empty()) {
            const auto from = part.sky_view.row(r);
            std::copy(from.begin(), from.end(), over(sky_view, window, part.block, r).begin());
        }
    }
}

/// Open ground's light of one band over one block of the lattice.
void Flow::State::fill_open(std::size_t block, std::size_t band) {
    for (std::size_t part = 0; part <= static_cast<std::size_t>(LightField::Part::sunlit_h_a_day);
         ++part) {
        resize(open[part], window);
        shared.field()->fill(light_blocks[block], band, static_cast<LightField::Part>(part),
                             heights_m, open[part]);
    }
    add_from_ground(block, band, open[static_cast<std::size_t>(LightField::Part::diffuse)]);
}

/// Open light and shadows brought together: the band's light on the part's inclined surface.
void Flow::State::compose(const ShadedBlock& part, std::size_t band) {
    using Part = LightField::Part;
    std::vector<float> circumsolar(static_cast<std::size_t>(part.block.width));
    auto& out = bands[band];
    const auto open_row = [&](Part p, int r) {
        return over(open[static_cast<std::size_t>(p)], window, part.block, r);
    };
    const auto sunlit = [&](const Plane<float>& shaded, const std::array<float, 3>& whole,
                            Part east, Part north, Part up, int r) {
        return SunlightRow{
            shaded.row(r),  part.hours[band].row(r), whole[0],          whole[1],
            whole[2],       part.whole[band].hours,  open_row(east, r), open_row(north, r),
            open_row(up, r)};
    };
    for (int r = 0; r < part.block.height; ++r) {
        const NormalRow normal{part.east.row(r), part.north.row(r), part.up.row(r)};
        if (needs.suns) {
            sunlight(sunlit(part.beam[band], part.whole[band].beam, Part::beam_east,
                            Part::beam_north, Part::beam_up, r),
                     normal, over(out.direct, window, part.block, r));
            sunlight(sunlit(part.around[band], part.whole[band].around, Part::circumsolar_east,
                            Part::circumsolar_north, Part::circumsolar_up, r),
                     normal, circumsolar);
            time_in_sun(part.hours[band].row(r), part.whole[band].hours,
                        open_row(Part::sunlit_h_a_day, r), over(out.hours, window, part.block, r));
        }
        if (!needs.sky_view) continue;
        const auto view = over(sky_view, window, part.block, r);
        if (needs.suns)
            skylight({view, open_row(Part::diffuse, r), open_row(Part::horizon, r), circumsolar,
                      open_row(Part::circumsolar_up, r)},
                     part.up.row(r), over(out.diffuse, window, part.block, r));
        if (needs.reflected)
            light_from_ground(view, over(albedo_seen, window, part.block, r),
                              open_row(Part::beam_up, r), open_row(Part::diffuse, r),
                              over(out.reflected, window, part.block, r));
        for (auto& change : beside.albedos) {
            if (!change.touched) continue;
            const auto diffuse = ground_lights_sky()
                                     ? over(change.open_diffuse, window, part.block, r)
                                     : open_row(Part::diffuse, r);
            if (needs.suns && ground_lights_sky())
                skylight({view, diffuse, open_row(Part::horizon, r), circumsolar,
                          open_row(Part::circumsolar_up, r)},
                         part.up.row(r), over(change.diffuse[band], window, part.block, r));
            if (needs.reflected)
                light_from_ground(view, over(change.albedo_seen, window, part.block, r),
                                  open_row(Part::beam_up, r), diffuse,
                                  over(change.reflected[band], window, part.block, r));
        }
    }
}

/// A part's light under the band's clouds.
void Flow::State::dim(const ShadedBlock& part, std::size_t band, double overcast) {
    auto& out = bands[band];
    const auto open_row = [&](LightField::Part p, int r) {
        return over(open[static_cast<std::size_t>(p)], window, part.block, r);
    };
    std::vector<float> beam, sky;
    for (int r = 0; r < part.block.height; ++r) {
        for (auto& change : beside.albedos) {
            if (!change.touched) continue;
            const auto before = over(out.direct, window, part.block, r),
                       even = over(out.diffuse, window, part.block, r);
            beam.assign(before.begin(), before.end());
            sky.assign(even.begin(), even.end());
            const bool own_sky = ground_lights_sky();
            dim_row({over(clear_index[band], window, part.block, r),
                     open_row(LightField::Part::beam_up, r),
                     own_sky ? over(change.open_diffuse, window, part.block, r)
                             : open_row(LightField::Part::diffuse, r),
                     over(sky_view, window, part.block, r), beam,
                     own_sky ? over(change.diffuse[band], window, part.block, r) : sky,
                     over(change.reflected[band], window, part.block, r)},
                    overcast);
        }
        dim_row(
            {over(clear_index[band], window, part.block, r), open_row(LightField::Part::beam_up, r),
             open_row(LightField::Part::diffuse, r), over(sky_view, window, part.block, r),
             over(out.direct, window, part.block, r), over(out.diffuse, window, part.block, r),
             over(out.reflected, window, part.block, r)},
            overcast);
    }
}

/// The mean albedo around each pixel, block by block so that its bits hang on the lattice alone.
void Flow::State::see_albedo() {
    if (!(needs.reflected && run.terrain) && !ground_lights_sky()) return;
    resize(albedo_seen, window);
    if (!run.has_surface()) {
        albedo_seen.fill(static_cast<float>(albedo_where_unknown));
        beside.see(static_cast<float>(albedo_where_unknown));
        return;
    }
    Plane<float> around;
    Plane<std::uint16_t> unused;
    for (const auto& block : blocks_of(window)) {
        surface.read(patch_window(block), around, unused);
        const auto mean = mean_around(around, near_steps);
        for (int r = 0; r < block.height; ++r)
            std::copy(mean.row(r).begin(), mean.row(r).end(),
                      over(albedo_seen, window, block, r).begin());
        beside.see(block, window, around, mean);
    }
}

/// Tells the probe its pixel's value of a plane over `frame`; planes that were not asked for say nothing.
template <class Value>
void Flow::State::note(const Plane<Value>& plane, const Window& frame,
                       std::optional<std::size_t> band, const char* name, const char* unit,
                       const char* text) const {
    if (probe == nullptr || plane.empty() || !probe->inside(frame)) return;
    probe->note({band, name, unit, text, static_cast<double>(probe->of(plane, frame))});
}

/// Once the flags are whole.
void Flow::State::note_surface() const {
    note(flags, window, {}, "quality", "1", "flags: where the albedo came from and what was seen");
    if (run.has_surface()) note(albedo, window, {}, "albedo", "1", "albedo before rounding");
    note(albedo_uncertainty, window, {}, "albedo_uncertainty", "1", "its standard uncertainty");
    if (!run.terrain) return;
    note(heights_m, window, {}, "height", "m", "height of the ground");
    note(slope_deg, window, {}, "slope", "degree", "steepness");
    note(aspect_deg, window, {}, "aspect", "degree", "direction faced, clockwise from true north");
    if (needs.sky_view)
        note(sky_view, window, {}, "sky_view", "1",
             "share of an even sky's light past the terrain");
    note(albedo_seen, window, {}, "albedo_seen", "1", "mean albedo of the ground around");
}

void Flow::State::note_open(const Window& block, std::size_t band) const {
    if (probe == nullptr || !probe->inside(block)) return;
    constexpr std::array<std::array<const char*, 3>, 9> parts{{
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
        note(open[i], window, band, parts[i][0], parts[i][1], parts[i][2]);
}

void Flow::State::note_shaded(const ShadedBlock& part, std::size_t band) const {
    if (probe == nullptr || !probe->inside(part.block)) return;
    const auto all = part.first_band + band;
    if (all == 0) {
        note(part.east, part.block, {}, "normal_east", "1", "the surface's unit normal, east");
        note(part.north, part.block, {}, "normal_north", "1", "the same, north");
        note(part.up, part.block, {}, "normal_up", "1", "the same, up: cosine of the slope");
    }
    if (!needs.suns) return;
    note(part.beam[band], part.block, all, "shaded_beam", "W/m2",
         "beam past the terrain, at the reference place and height");
    note(part.around[band], part.block, all, "shaded_circumsolar", "W/m2",
         "sky light around the sun past the terrain, there");
    note(part.hours[band], part.block, all, "shaded_sunlit", "h", "hours in the sun, there");
    const auto& whole = part.whole[band];
    probe->note({all, "reference_beam_up", "W/m2",
                 "beam on level open ground at the reference place",
                 static_cast<double>(whole.beam[2])});
    probe->note({all, "reference_sunlit", "h", "hours with the sun up at the reference place",
                 static_cast<double>(whole.hours)});
}

void Flow::State::note_band(std::size_t band, const BandPlanes& planes) const {
    if (!clear_index.empty())
        note(clear_index[band % bands_at_once], window, band, "clear_sky_index", "1",
             "what clouds leave of the clear sky's light");
    note(planes.direct, window, band, "direct", "W/m2",
         "sunlight straight from the sun, on the surface");
    note(planes.diffuse, window, band, "diffuse", "W/m2", "sky light on the surface");
    if (!run.terrain) return;
    note(planes.reflected, window, band, "reflected", "W/m2", "light from the ground in view");
    note(planes.hours, window, band, "sunlit", "h", "hours in the sun, for each 24 h");
}

void Flow::State::put_plane(std::size_t n, std::size_t band,
                            const std::function<void(int, std::span<float>)>& row, Sink& sink) {
    resize(stored, window);
    for (int r = 0; r < window.height; ++r) {
        row(r, stored.row(r));
        round_row(stored.row(r), run.layers[n].file.quantum);
    }
    sink.put(n, band, window, stored);
    beside.keep(n, band, stored);
}

void Flow::State::put_surface_layers(Sink& sink) {
    note_surface();
    const auto copied = [](const Plane<float>& plane) {
        return [&plane](int r, std::span<float> out) {
            std::copy(plane.row(r).begin(), plane.row(r).end(), out.begin());
        };
    };
    for (std::size_t n = 0; n < run.layers.size(); ++n) {
        if (run.layers[n].changed) continue;
        switch (run.layers[n].layer->id) {
            case LayerId::albedo:
                put_plane(n, 0, copied(albedo), sink);
                beside.put(
                    n, 0, stored,
                    [](const auto& change, int r, std::span<float> out) {
                        std::copy(change.albedo.row(r).begin(), change.albedo.row(r).end(),
                                  out.begin());
                    },
                    sink);
                break;
            case LayerId::albedo_uncertainty:
                put_plane(n, 0, copied(albedo_uncertainty), sink);
                break;
            case LayerId::slope:
                put_plane(n, 0, copied(slope_deg), sink);
                break;
            case LayerId::aspect:
                put_plane(n, 0, copied(aspect_deg), sink);
                break;
            case LayerId::sky_view:
                put_plane(n, 0, copied(sky_view), sink);
                break;
            case LayerId::quality:
                sink.put(n, 0, window, flags);
                break;
            case LayerId::emissivity:
                put_plane(n, 0, copied(heat->emissivity()), sink);
                beside.put(
                    n, 0, stored,
                    [](const auto& change, int r, std::span<float> out) {
                        std::copy(change.emissivity.row(r).begin(), change.emissivity.row(r).end(),
                                  out.begin());
                    },
                    sink);
                break;
            case LayerId::sri:
                put_plane(
                    n, 0,
                    [&](int r, std::span<float> out) {
                        sri_row(albedo, heat->emissivity(), heat->dry(), r, out);
                    },
                    sink);
                beside.put(
                    n, 0, stored,
                    [&](const auto& change, int r, std::span<float> out) {
                        sri_row(change.albedo, change.emissivity, change.dry, r, out);
                    },
                    sink);
                break;
            default:
                break;
        }
    }
    beside.put_treated(sink);
}

/// Pixels whose temperature no balance of a dry surface gives; for the index also steep ones.
bool Flow::State::outside_scope(const Plane<float>& dry, int r, std::size_t i) const {
    constexpr float steepest_deg = 9.5F;  // ASTM E1980: low-sloped surfaces
    return !(dry.row(r)[i] >= 1) || (needs.level && !(slope_deg.row(r)[i] < steepest_deg));
}

void Flow::State::flag_outside_scope() {
    if (!needs.scope) return;
    for (int r = 0; r < window.height; ++r) {
        const auto flag = flags.row(r);
        for (std::size_t i = 0; i < flag.size(); ++i)
            flag[i] = static_cast<std::uint16_t>(
                flag[i] | (outside_scope(heat->dry(), r, i) ? quality::outside_scope : 0));
    }
}

void Flow::State::sri_row(const Plane<float>& own_albedo, const Plane<float>& emissivity,
                          const Plane<float>& dry, int r, std::span<float> out) const {
    solar_reflectance_index(own_albedo.row(r), emissivity.row(r), run.heat.wind, out);
    for (std::size_t i = 0; i < out.size(); ++i)
        if (outside_scope(dry, r, i)) out[i] = std::numeric_limits<float>::quiet_NaN();
}

/// A band of those held, over the ground as it is and after a change of it.
LitBand Flow::State::lit(std::size_t held) const {
    const auto& light = bands[held];
    return {light,  light.diffuse,      light.reflected,
            albedo, albedo_uncertainty, static_cast<float>(run.light_uncertainty)};
}
LitBand Flow::State::lit(std::size_t held, const ChangedAlbedo& change) const {
    const auto& light = bands[held];
    return {light,
            ground_lights_sky() ? change.diffuse[held] : light.diffuse,
            run.terrain ? change.reflected[held] : light.reflected,
            change.albedo,
            albedo_uncertainty,
            static_cast<float>(run.light_uncertainty)};
}

/// The sunlight a band's surface keeps, for what becomes of it.
void Flow::State::sum_net_light(std::size_t band, const LitBand& ground, Plane<float>& kept) const {
    resize(kept, window);
    if (!run.light.thin.empty() && run.light.thin[band])
        return kept.fill(std::numeric_limits<float>::quiet_NaN());
    std::vector<float> rest;
    for (int r = 0; r < window.height; ++r)
        light_row(LayerId::net_shortwave, ground, run.terrain.has_value(), r, rest, kept.row(r));
}

void Flow::State::put_heat_layers(std::size_t band, std::size_t held, Sink& sink) {
    if (!needs.heat || !run.times) return;
    const Plane<float> no_plane;
    if (needs.net_light) sum_net_light(band, lit(held), net_light);
    const auto& found = heat->band(band, run.terrain ? sky_view : no_plane, net_light);
    if (band == 0)
        note(heat->emissivity(), window, {}, "emissivity", "1", "emissivity before rounding");
    note(heat->air_k(), window, band, "air_temperature", "K", "of the air at the pixel's height");
    if (run.heat.longwave && run.heat.longwave->daily)
        note(found.net, window, band, "net_longwave", "W/m2",
             "of whole days, level open ground, before rounding");
    else
        note(heat->sky(), window, band, "longwave_sky", "W/m2",
             "heat radiation of the whole sky on level open ground");
    note(net_light, window, band, "net_light", "W/m2", "sunlight that is kept");
    note(found.down, window, band, "longwave_down", "W/m2",
         "heat radiation from the sky and the ground in view");
    note(found.surface_k, window, band, "surface_temperature", "K", "of the ground");
    note(found.up, window, band, "longwave_up", "W/m2", "heat radiation sent up and reflected");
    for (auto& change : beside.albedos) {
        if (!change.touched || !change.heats) continue;
        if (needs.net_light) sum_net_light(band, lit(held, change), change.net_light);
        if (run.heat.longwave)
            heat->beside(change.emissivity, change.dry, change.net_light, change.heat);
    }
    for (std::size_t n = 0; n < run.layers.size(); ++n) {
        const auto& [layer, file, factors, changed] = run.layers[n];
        if (changed || !layer->is_heat() || !layer->needs_time()) continue;
        const auto factor = static_cast<float>(factors[std::min(band, factors.size() - 1)]);
        const auto id = layer->id;
        put_plane(
            n, band,
            [&](int r, std::span<float> out) { heat_row(id, found, net_light, factor, r, out); },
            sink);
        beside.put(
            n, band, stored,
            [&](const ChangedAlbedo& change, int r, std::span<float> out) {
                heat_row(id, change.heat, change.net_light, factor, r, out);
            },
            sink);
    }
}

void Flow::State::put_light_layers(std::size_t band, std::size_t held, Sink& sink) {
    std::vector<float> rest;
    note_band(band, bands[held]);
    for (std::size_t n = 0; n < run.layers.size(); ++n) {
        const auto& layer = run.layers[n];
        if (!layer.layer->needs_sun || layer.layer->needs_air || layer.changed) continue;
        const auto factor = static_cast<float>(layer.factors[band]);
        const bool thin = !run.light.thin.empty() && run.light.thin[band] &&
                          layer.layer->id != LayerId::sunlit_hours;
        const auto row_of = [&](const LitBand& lit, int r, std::span<float> out) {
            light_row(layer.layer->id, lit, run.terrain.has_value(), r, rest, out);
            for (auto& value : out)
                value = thin ? std::numeric_limits<float>::quiet_NaN() : value * factor;
        };
        put_plane(
            n, band, [&](int r, std::span<float> out) { row_of(lit(held), r, out); }, sink);
        beside.put(
            n, band, stored,
            [&](const ChangedAlbedo& change, int r, std::span<float> out) {
                row_of(lit(held, change), r, out);
            },
            sink);
    }
}

/// Surface, heights and open light of a window.
void Flow::State::begin(const Window& where) {
    window = where;
    surface.read(window, albedo, flags);
    if (needs.albedo_uncertainty) surface.uncertainty(window, albedo, flags, albedo_uncertainty);
    read_heights();
    prepare_light();
    if (heat) heat->read(window, blocks_of(window), heights_m, flags);
    beside.begin(window, albedo, heat ? &*heat : nullptr);
    for (auto& one : raised) one->begin(where);
}

/// From shadows to finished planes; the first bands bring the surface's own layers.
void Flow::State::some_bands(std::size_t first, std::size_t count, Sink& sink) {
    const std::size_t sunlit = shared.field() != nullptr ? count : 0;
    bands.resize(std::max(bands.size(), sunlit));
    read_clouds(first, sunlit);
    beside.some_bands(first, count, sunlit, ground_lights_sky());
    if (run.terrain && (sunlit > 0 || first == 0))
        terrain_bands(first, sunlit);
    else if (!run.terrain)
        flat_bands(first, sunlit);
    if (first == 0) {
        if (sunlit > 0)
            flag_missing_light(run.terrain
                                   ? open[static_cast<std::size_t>(LightField::Part::beam_up)]
                                   : bands[0].direct);
        flag_outside_scope();
        count_flags();
        put_surface_layers(sink);
    }
    for (std::size_t i = 0; i < count; ++i) {
        if (sunlit > 0) put_light_layers(first + i, i, sink);
        put_heat_layers(first + i, i, sink);
    }
    for (std::size_t i = 0; i < raised.size(); ++i) {
        SavedSink after(beside, *shared.raised()[i], sink);
        raised[i]->some_bands(first, count, after);
    }
}

Flow::Flow(const Run& run, const SharedLight& light, int thread)
    : state_(std::make_unique<State>(run, light, thread)) {}
Flow::~Flow() = default;
Flow::Flow(Flow&&) noexcept = default;

void Flow::compute(const Window& window, Sink& sink) {
    auto& s = *state_;
    s.begin(window);
    const std::size_t all = s.run.times ? s.run.times->bands() : 0;
    std::size_t first = 0;
    do {
        s.some_bands(first, std::min(bands_at_once, all - first), sink);
        first += bands_at_once;
    } while (first < all);
}

void Flow::watch(Probe& probe) {
    state_->probe = &probe;
    if (state_->shader) state_->shader->watch(probe);
}

const std::map<std::uint16_t, std::uint64_t>& Flow::flags() const {
    return state_->flag_counts;
}

std::uint64_t Flow::infinities() const {
    return state_->surface.infinities() + (state_->shader ? state_->shader->infinities() : 0) +
           (state_->heat ? state_->heat->infinities() : 0);
}

}  // namespace sunbudget
