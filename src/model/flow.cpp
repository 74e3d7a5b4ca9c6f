#include "sunbudget/model/flow.hpp"

#include <algorithm>
#include <cmath>
#include <optional>

#include "sunbudget/model/surface.hpp"
#include "sunbudget/physics/shortwave.hpp"
#include "sunbudget/raster/pyramid.hpp"
#include "sunbudget/tables/quality.hpp"

namespace sunbudget {

namespace {

std::optional<double> constant_height(const Run& run) {
    const auto* height = std::get_if<double>(&run.elevation_m);
    return height == nullptr ? std::nullopt : std::optional<double>(*height);
}

/// Windows of the lattice's blocks inside a window that starts on the lattice.
std::vector<Window> blocks_of(const Window& window) {
    std::vector<Window> blocks;
    for (int row = 0; row < window.height; row += block_px)
        for (int column = 0; column < window.width; column += block_px)
            blocks.push_back({window.column + column, window.row + row, std::min(block_px, window.width - column),
                              std::min(block_px, window.height - row)});
    return blocks;
}

/// A plane of the size wanted, the old memory kept where it fits.
template <typename T>
void resize(Plane<T>& plane, const Window& window) {
    if (plane.width() != window.width || plane.height() != window.height)
        plane = Plane<T>(window.width, window.height);
}

}  // namespace

SharedLight::SharedLight(const Run& run, int threads) {
    if (run.times)
        field_ = std::make_unique<LightField>(*run.times, run.sky, run.grid, threads, constant_height(run));
}
SharedLight::~SharedLight() = default;

struct Flow::State {
    const Run& run;
    LightField* light;
    int thread;
    SurfaceReader surface;
    std::optional<Reader> elevation_reader;

    Plane<float> albedo, heights_m, direct, diffuse, stored;
    Plane<std::uint16_t> flags;
    std::map<std::uint16_t, std::uint64_t> flag_counts;

    State(const Run& r, LightField* l, int t) : run(r), light(l), thread(t), surface(r) {
        if (const auto* raster = std::get_if<Source>(&run.elevation_m)) elevation_reader.emplace(*raster);
    }

    void read_heights(const Window& window);
    void flag_missing_light();
    void count_flags();
    void put_surface_layers(const Window& window, Sink& sink);
    void put_light_layers(std::size_t band, const Window& window, Sink& sink);
    void store_row(const OutputLayer& layer, int row);
};

void Flow::State::read_heights(const Window& window) {
    if (!elevation_reader) return;
    elevation_reader->read(window, heights_m);
    for (int r = 0; r < window.height; ++r)
        for (std::size_t i = 0; i < heights_m.row(r).size(); ++i)
            if (std::isnan(heights_m.row(r)[i])) flags.row(r)[i] |= quality::no_elevation;
}

/// Light is missing where the height is, or where the projection has no place on Earth.
void Flow::State::flag_missing_light() {
    for (int r = 0; r < direct.height(); ++r)
        for (std::size_t i = 0; i < direct.row(r).size(); ++i)
            if (std::isnan(direct.row(r)[i]) && (flags.row(r)[i] & quality::no_elevation) == 0)
                flags.row(r)[i] |= quality::outside_projection;
}

/// Flags come in runs: the map is asked once a run, not once a pixel.
void Flow::State::count_flags() {
    for (int r = 0; r < flags.height(); ++r) {
        const auto row = flags.row(r);
        for (auto first = row.begin(); first != row.end();) {
            const auto last = std::find_if(first, row.end(), [&](auto flag) { return flag != *first; });
            flag_counts[*first] += static_cast<std::uint64_t>(last - first);
            first = last;
        }
    }
}

void Flow::State::put_surface_layers(const Window& window, Sink& sink) {
    count_flags();
    for (std::size_t n = 0; n < run.layers.size(); ++n) {
        const auto& layer = run.layers[n];
        if (layer.layer->id == LayerId::albedo) {
            resize(stored, window);
            for (int r = 0; r < window.height; ++r) {
                std::copy(albedo.row(r).begin(), albedo.row(r).end(), stored.row(r).begin());
                round_row(stored.row(r), layer.file.quantum);
            }
            sink.put(n, 0, window, stored);
        } else if (layer.layer->id == LayerId::quality) {
            sink.put(n, 0, window, flags);
        }
    }
}

void Flow::State::store_row(const OutputLayer& layer, int r) {
    const auto beam = direct.row(r), sky = diffuse.row(r);
    const auto out = stored.row(r);
    switch (layer.layer->id) {
        case LayerId::direct: std::copy(beam.begin(), beam.end(), out.begin()); break;
        case LayerId::diffuse: std::copy(sky.begin(), sky.end(), out.begin()); break;
        case LayerId::insolation: std::transform(beam.begin(), beam.end(), sky.begin(), out.begin(), std::plus<>()); break;
        case LayerId::net_shortwave: absorbed_shortwave(albedo.row(r), beam, albedo.row(r), sky, out); break;
        default: break;
    }
}

void Flow::State::put_light_layers(std::size_t band, const Window& window, Sink& sink) {
    for (std::size_t n = 0; n < run.layers.size(); ++n) {
        const auto& layer = run.layers[n];
        if (!layer.layer->needs_sun) continue;
        resize(stored, window);
        const auto factor = static_cast<float>(layer.factors[band]);
        for (int r = 0; r < window.height; ++r) {
            store_row(layer, r);
            for (auto& value : stored.row(r)) value *= factor;
            round_row(stored.row(r), layer.file.quantum);
        }
        sink.put(n, band, window, stored);
    }
}

Flow::Flow(const Run& run, const SharedLight& light, int thread)
    : state_(std::make_unique<State>(run, light.field(), thread)) {}
Flow::~Flow() = default;
Flow::Flow(Flow&&) noexcept = default;

void Flow::compute(const Window& window, Sink& sink) {
    auto& s = *state_;
    s.surface.read(window, s.albedo, s.flags);
    s.read_heights(window);
    if (s.light == nullptr) {
        s.put_surface_layers(window, sink);
        return;
    }
    std::vector<LightField::Block> blocks;
    for (const auto& block : blocks_of(window))
        blocks.push_back(s.light->prepare(block, window, s.heights_m, s.thread));
    resize(s.direct, window);
    resize(s.diffuse, window);
    for (std::size_t band = 0; band < s.run.times->bands(); ++band) {
        for (const auto& block : blocks) {
            LightField::fill_direct(block, band, s.heights_m, s.direct);
            LightField::fill_diffuse(block, band, s.heights_m, s.diffuse);
        }
        if (band == 0) {
            s.flag_missing_light();
            s.put_surface_layers(window, sink);
        }
        s.put_light_layers(band, window, sink);
    }
}

const std::map<std::uint16_t, std::uint64_t>& Flow::flags() const { return state_->flag_counts; }

std::uint64_t Flow::infinities() const {
    return state_->surface.infinities() + (state_->elevation_reader ? state_->elevation_reader->infinities() : 0);
}

}  // namespace sunbudget
