#include "sunbudget/model/flow.hpp"

#include <algorithm>

#include "flow_state.hpp"
#include "sunbudget/tables/quality.hpp"

namespace sunbudget {

namespace {

/// Bands whose planes are held at once: more would cost memory, fewer would cost horizons.
constexpr std::size_t bands_at_once = 12;

std::optional<double> constant_height(const Run& run) {
    return run.terrain ? std::nullopt : std::optional<double>(run.constant_height_m);
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

Flow::State::State(const Run& r, const SharedLight& s, int thread)
    : run(r),
      shared(s),
      needs(r),
      beside(r),
      ground(r),
      light(r, needs, s, thread, ground, beside, notes) {
    for (const auto& one : shared.raised())
        raised.push_back(std::make_unique<State>(one->run, one->light(), thread));
    if (needs.heat) heat.emplace(run, shared.longwave(), thread);
}

/// Surface, heights and open light of a window.
void Flow::State::begin(const Window& window) {
    ground.read(window, needs.albedo_uncertainty);
    light.begin();
    if (heat) heat->read(window, ground.blocks, ground.heights_m, ground.flags);
    beside.begin(window, ground.albedo, heat ? &*heat : nullptr);
    for (auto& one : raised) one->begin(window);
}

/// From shadows to finished planes; the first bands bring the surface's own layers.
void Flow::State::some_bands(std::size_t first, std::size_t count, Sink& sink) {
    const std::size_t sunlit = shared.field() != nullptr ? count : 0;
    beside.some_bands(first, count, sunlit, light.ground_lights_sky());
    light.some_bands(first, sunlit);
    if (first == 0) {
        finish_flags(sunlit);
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

void Flow::State::finish_flags(std::size_t sunlit) {
    if (sunlit > 0) light.flag_missing();
    for (int r = 0; needs.scope && r < ground.window.height; ++r)
        flag_where(ground.flags.row(r), quality::outside_scope,
                   [&](std::size_t i) { return scope().outside(heat->dry(), r, i); });
    flag_counts.add(ground.flags);
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
    state_->notes.watch(probe);
    state_->light.watch(probe);
}

const std::map<std::uint16_t, std::uint64_t>& Flow::flags() const {
    return state_->flag_counts.counts();
}

std::uint64_t Flow::infinities() const {
    const auto& s = *state_;
    return s.ground.infinities() + s.light.infinities() + (s.heat ? s.heat->infinities() : 0);
}

}  // namespace sunbudget
