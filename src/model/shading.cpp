#include "sunbudget/model/shading.hpp"

#include <algorithm>
#include <cmath>
#include <numbers>

#include "block_frame.hpp"
#include "planes.hpp"
#include "sunbudget/model/probe.hpp"
#include "sunbudget/physics/gradient.hpp"
#include "sunbudget/physics/horizon.hpp"
#include "sunbudget/physics/sky_view.hpp"

namespace sunbudget {

struct BlockShader::State {
    SharedTerrain& shared;
    const LightField* light;
    const Locator& locator;
    int thread;
    ElevationReader elevation;
    std::optional<ElevationReader> slopes;

    HeightPatch patch;
    std::vector<LevelPatch> levels;
    Plane<float> per_column, per_row;  ///< pixel-space slopes of the planes
    Plane<float> rise, before, after, first;
    Probe* probe = nullptr;

    State(SharedTerrain& s, const LightField* l, const Locator& where, int t)
        : shared(s), light(l), locator(where), thread(t), elevation(s.terrain()) {
        if (const auto* other = std::get_if<std::vector<Source>>(&s.terrain().slope_from))
            slopes.emplace(*other);
    }

    void read_ground(const Window& block);
    void read_slopes(const Window& block);
    void normals(const BlockFrame& frame, ShadedBlock& out) const;
    void cast(const BlockFrame& frame, double azimuth_rad, const Window& block,
              Plane<float>& tangent);
    void cast_all_round(const BlockFrame& frame, const SunSectors* sectors, bool sky_view,
                        ShadedBlock& out);
    void cast_own(const BlockFrame& frame, const FewSuns& few, ShadedBlock& out);
};

BlockShader::BlockShader(SharedTerrain& shared, const LightField* light, const Locator& locator,
                         int thread)
    : state_(std::make_unique<State>(shared, light, locator, thread)) {}
BlockShader::~BlockShader() = default;

void BlockShader::State::read_ground(const Window& block) {
    const auto around = patch_window(block);
    Plane<float> heights_m;
    elevation.read(around, heights_m);
    patch = make_height_patch(around, std::move(heights_m));
    levels = shared.levels().patches(block, elevation);
}

void BlockShader::State::read_slopes(const Window& block) {
    per_column = Plane<float>(block.width, block.height);
    per_row = Plane<float>(block.width, block.height);
    if (std::holds_alternative<Terrain::Flat>(shared.terrain().slope_from)) return;
    Plane<float> heights_m;
    (slopes ? *slopes : elevation)
        .read({block.column - 1, block.row - 1, block.width + 2, block.height + 2}, heights_m);
    for (int r = 0; r < block.height; ++r)
        horn_gradient(heights_m.row(r), heights_m.row(r + 1), heights_m.row(r + 2),
                      per_column.row(r), per_row.row(r));
}

void BlockShader::State::normals(const BlockFrame& frame, ShadedBlock& out) const {
    for (auto* plane : {&out.east, &out.north, &out.up})
        *plane = Plane<float>(out.block.width, out.block.height);
    for (int r = 0; r < out.block.height; ++r) {
        const double share = out.block.height > 1 ? r / double(out.block.height - 1) : 0;
        surface_normals(per_column.row(r), per_row.row(r), inverse(frame.left(share)),
                        inverse(frame.right(share)), out.east.row(r), out.north.row(r),
                        out.up.row(r));
    }
}

/// Tangents of the block's horizons along one azimuth.
void BlockShader::State::cast(const BlockFrame& frame, double azimuth_rad, const Window& block,
                              Plane<float>& tangent) {
    const auto& sight = shared.terrain().sight;
    const auto direction = direction_towards(frame.middle, azimuth_rad);
    fit(rise, block);
    for (int r = 0; r < block.height; ++r)
        start_rise(per_column.row(r), per_row.row(r), direction, rise.row(r));
    if (!levels.empty())
        raise_by_far(far_rise(levels, direction, sight, block), patch, block, rise);
    raise_by_near(patch, direction, sight, block, rise);
    for (int r = 0; r < block.height; ++r) {
        const double share = block.height > 1 ? r / double(block.height - 1) : 0;
        const double left =
            1 / length_of_m(frame.left(share), direction.column_step, direction.row_step);
        const double right =
            1 / length_of_m(frame.right(share), direction.column_step, direction.row_step);
        const StepScale scale{static_cast<float>(left),
                              static_cast<float>((right - left) / std::max(1, block.width - 1))};
        tangents(patch.height_m.row(r + near_steps)
                     .subspan(near_steps, static_cast<std::size_t>(block.width)),
                 rise.row(r), scale, tangent.row(r));
    }
    if (probe != nullptr && probe->inside(block))
        probe->note_horizon({azimuth_rad, static_cast<double>(probe->of(tangent, block))});
}

void BlockShader::State::cast_all_round(const BlockFrame& frame, const SunSectors* sectors,
                                        bool sky_view, ShadedBlock& out) {
    const int directions = shared.terrain().directions;
    const auto& block = out.block;
    for (auto* plane : {&before, &after, &first}) fit(*plane, block);
    Plane<float> tangent(block.width, block.height);
    std::vector<BeamSums> sums(out.beam.size());
    const auto normal_row = [&](int r) {
        return NormalRow{out.east.row(r), out.north.row(r), out.up.row(r)};
    };
    const auto add_sector = [&](int direction, const Plane<float>& from, const Plane<float>& to) {
        if (sectors == nullptr || sectors->after(direction).empty) return;
        for (int r = 0; r < block.height; ++r) {
            for (std::size_t i = 0; i < sums.size(); ++i)
                sums[i] = {out.beam[i].row(r), out.hours[i].row(r), out.around[i].row(r)};
            sectors->after(direction).add_to({from.row(r), to.row(r)}, normal_row(r), sums);
        }
    };
    for (int d = 0; d < directions; ++d) {
        // A direction that neither a sun nor the sky view asks for is not looked along.
        const bool sunny =
            sectors != nullptr &&
            (!sectors->after(d).empty || !sectors->after((d + directions - 1) % directions).empty);
        const double azimuth_rad = 2 * std::numbers::pi * d / directions;
        if (sunny || sky_view) cast(frame, azimuth_rad, block, tangent);
        auto& sine = d == 0 ? first : after;
        for (int r = 0; r < block.height; ++r) {
            if (sky_view)
                add_sky_view(tangent.row(r), normal_row(r), azimuth_rad, out.sky_view.row(r));
            if (sunny) horizon_sines(tangent.row(r), sine.row(r));
        }
        if (d > 0) add_sector(d - 1, d == 1 ? first : before, after);
        if (d > 0) std::swap(before, after);
    }
    add_sector(directions - 1, directions == 1 ? first : before, first);
    if (sky_view)
        for (int r = 0; r < block.height; ++r) finish_sky_view(out.sky_view.row(r), directions);
}

void BlockShader::State::cast_own(const BlockFrame& frame, const FewSuns& few, ShadedBlock& out) {
    Plane<float> sine(out.block.width, out.block.height);
    for (const auto& sun : few.suns) {
        cast(frame, sun.placed.sun.azimuth_rad, out.block, sine);
        for (int r = 0; r < out.block.height; ++r) {
            horizon_sines(sine.row(r), sine.row(r));
            const HorizonPair horizon{sine.row(r), sine.row(r)};
            const NormalRow normal{out.east.row(r), out.north.row(r), out.up.row(r)};
            add_suns({&sun.placed, 1}, horizon, normal,
                     {out.beam[sun.band].row(r), out.hours[sun.band].row(r),
                      out.around[sun.band].row(r)});
        }
    }
}

void BlockShader::shade(const Window& block, std::size_t first_band, std::size_t bands,
                        bool sky_view, ShadedBlock& out) {
    auto& s = *state_;
    out.block = block;
    out.first_band = first_band;
    const auto frame = frame_of(block, s.locator);
    out.located = frame.has_value();
    if (!frame) return;
    s.read_ground(block);
    s.read_slopes(block);
    s.normals(*frame, out);
    out.sky_view = sky_view ? Plane<float>(block.width, block.height) : Plane<float>();
    for (auto* planes : {&out.beam, &out.around, &out.hours}) {
        planes->clear();
        for (std::size_t i = 0; i < bands; ++i) planes->emplace_back(block.width, block.height);
    }
    std::shared_ptr<const SunSectors> sectors;
    out.whole.clear();
    if (bands > 0) {
        const double height_m = s.shared.middle_height_m();
        if (s.light->point().most_suns(first_band, bands) <=
            static_cast<std::size_t>(s.shared.terrain().directions)) {
            const auto few = few_suns(s.light->point(), frame->place, height_m, first_band, bands);
            s.cast_own(*frame, few, out);
            out.whole = few.whole;
        } else {
            sectors = s.shared.sectors(block, first_band, bands, *s.light, s.thread);
            out.whole = sectors->whole();
        }
    }
    if (sectors || sky_view) s.cast_all_round(*frame, sectors.get(), sky_view, out);
}

void BlockShader::heights(const Window& window, Plane<float>& heights_m) {
    state_->elevation.read(window, heights_m);
}

void BlockShader::watch(Probe& probe) {
    state_->probe = &probe;
}

std::uint64_t BlockShader::infinities() const {
    return state_->elevation.infinities() + (state_->slopes ? state_->slopes->infinities() : 0);
}

}  // namespace sunbudget
