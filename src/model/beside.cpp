#include "beside.hpp"

#include <algorithm>
#include <functional>

#include "planes.hpp"
#include "sunbudget/model/neighbourhood.hpp"
#include "sunbudget/physics/height_patch.hpp"
#include "sunbudget/raster/pyramid.hpp"

namespace sunbudget {

namespace {

/// The layers of `change` that belong to layer `base` of the run as it is.
ChangeOutputs outputs_of(const Run& run, std::size_t change, std::size_t base) {
    ChangeOutputs found;
    for (std::size_t n = 0; n < run.layers.size(); ++n) {
        const auto& changed = run.layers[n].changed;
        if (changed && changed->change == change && changed->base == base &&
            run.layers[n].layer->id != LayerId::treated)
            (changed->saved ? found.saved : found.after) = n;
    }
    return found;
}

Run carried_out(const Run& base, std::size_t change) {
    Run run = base;
    run.carried_out = std::make_shared<const Change>(base.changes[change]);
    run.terrain->raised = run.carried_out;
    run.changes.clear();
    run.layers.clear();
    return run;
}

}  // namespace

void subtract(const Plane<float>& before, const Plane<float>& after, Plane<float>& out) {
    fit(out, before.width(), before.height());
    for (int r = 0; r < out.height(); ++r)
        std::ranges::transform(before.row(r), after.row(r), out.row(r).begin(), std::minus<>());
}

Beside::Beside(const Run& run)
    : run_(run), outputs_(run.layers.size()), keeps_(run.layers.size()), kept_(run.layers.size()) {
    for (std::size_t i = 0; i < run.changes.size(); ++i) {
        readers_.emplace_back(run.changes[i]);
        if (!run.changes[i].height) albedos.emplace_back().change = i;
    }
    for (std::size_t n = 0; n < run.layers.size(); ++n) {
        for (auto& change : albedos) {
            const auto& [after, saved] =
                outputs_[n].emplace_back(outputs_of(run, change.change, n));
            change.heats = change.heats || ((after || saved) && run.layers[n].layer->is_heat());
        }
        const auto& changed = run.layers[n].changed;
        if (changed && changed->saved && run.changes[changed->change].height)
            keeps_[changed->base] = true;
    }
}

void Beside::begin(const Window& window, const Plane<float>& albedo, const HeatFlow* heat) {
    window_ = window;
    for (auto& change : albedos) {
        auto& reader = readers_[change.change];
        const Window in_sight{window.column - near_steps, window.row - near_steps,
                              window.width + 2 * near_steps, window.height + 2 * near_steps};
        change.touched = reader.touches(in_sight);
        if (!change.touched) continue;
        copy_plane(albedo, change.albedo);
        reader.albedo(window, change.albedo);
        if (!change.heats || heat == nullptr) continue;
        copy_plane(heat->emissivity(), change.emissivity);
        if (!change.emissivity.empty()) reader.emissivity(window, change.emissivity);
        copy_plane(heat->dry(), change.dry);
        reader.dry(window, change.dry);
    }
}

void Beside::some_bands(std::size_t first, std::size_t count, std::size_t lit,
                        bool ground_lights_sky) {
    first_band_ = first;
    const auto prepare = [&](std::vector<Plane<float>>& planes) {
        planes.resize(std::max(planes.size(), lit));
        for (std::size_t i = 0; i < lit; ++i) {
            fit(planes[i], window_);
            planes[i].fill(std::numeric_limits<float>::quiet_NaN());
        }
    };
    for (auto& change : albedos) {
        if (!change.touched) continue;
        if (run_.terrain) prepare(change.reflected);
        if (ground_lights_sky) prepare(change.diffuse);
    }
    for (std::size_t n = 0; n < kept_.size(); ++n)
        if (keeps_[n]) kept_[n].resize(std::max(kept_[n].size(), count));
}

void Beside::see(const Window& block, const Window& window, const Plane<float>& around,
                 const Plane<float>& mean) {
    for (auto& change : albedos) {
        if (!change.touched) continue;
        fit(change.albedo_seen, window);
        const auto patch = patch_window(block);
        const bool here = readers_[change.change].touches(patch);
        Plane<float> own_mean;
        if (here) {
            copy_plane(around, scratch_);
            readers_[change.change].albedo(patch, scratch_);
            own_mean = mean_around(scratch_, near_steps);
        }
        for (int r = 0; r < block.height; ++r)
            std::ranges::copy((here ? own_mean : mean).row(r),
                              over(change.albedo_seen, window, block, r).begin());
    }
}

void Beside::see(float albedo) {
    for (auto& change : albedos) {
        fit(change.albedo_seen, window_);
        change.albedo_seen.fill(albedo);
    }
}

void Beside::put(std::size_t n, std::size_t band, const Plane<float>& before, const Row& row,
                 Sink& sink) {
    for (std::size_t i = 0; i < albedos.size(); ++i) {
        const auto& [after, saved] = outputs_[n][i];
        if (!after && !saved) continue;
        if (albedos[i].touched) {
            fit(scratch_, window_);
            for (int r = 0; r < window_.height; ++r) {
                row(albedos[i], r, scratch_.row(r));
                round_row(scratch_.row(r), run_.layers[n].file.quantum);
            }
        }
        const auto& plane = albedos[i].touched ? scratch_ : before;
        if (after) sink.put(*after, band, window_, plane);
        if (!saved) continue;
        subtract(before, plane, difference_);
        sink.put(*saved, band, window_, difference_);
    }
}

void Beside::put_treated(Sink& sink) {
    for (std::size_t n = 0; n < run_.layers.size(); ++n) {
        if (run_.layers[n].layer->id != LayerId::treated || !run_.layers[n].changed) continue;
        readers_[run_.layers[n].changed->change].treated(window_, scratch_);
        for (int r = 0; r < window_.height; ++r)
            round_row(scratch_.row(r), run_.layers[n].file.quantum);
        sink.put(n, 0, window_, scratch_);
    }
}

void Beside::keep(std::size_t n, std::size_t band, const Plane<float>& stored) {
    if (keeps_[n]) copy_plane(stored, kept_[n][band - first_band_]);
}

RaisedRun::RaisedRun(const Run& base, std::size_t change, int threads,
                     const std::filesystem::path& scratch)
    : run(carried_out(base, change)),
      scratch_folder(scratch / ("raised-" + std::to_string(change))) {
    for (std::size_t n = 0; n < base.layers.size(); ++n) {
        const auto found = outputs_of(base, change, n);
        if (!found.after && !found.saved) continue;
        run.layers.push_back(base.layers[n]);
        outputs.push_back(found);
        bases.push_back(n);
    }
    std::filesystem::create_directory(scratch_folder);
    light_ = std::make_unique<SharedLight>(run, threads, scratch_folder);
}

RaisedRun::~RaisedRun() {
    light_.reset();  // its files lie in the folder
    std::error_code ignored;
    std::filesystem::remove(scratch_folder, ignored);
}

void SavedSink::put(std::size_t layer, std::size_t band, const Window& window,
                    const Plane<float>& plane) {
    const auto& [after, saved] = raised_.outputs[layer];
    if (after) sink_.put(*after, band, window, plane);
    if (!saved) return;
    Plane<float> difference;
    subtract(base_.kept(raised_.bases[layer], band), plane, difference);
    sink_.put(*saved, band, window, difference);
}

/// Flags are the base's.
void SavedSink::put(std::size_t, std::size_t, const Window&, const Plane<std::uint16_t>&) {}

}  // namespace sunbudget
