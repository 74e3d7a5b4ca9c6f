#include "sunbudget/engine/execute.hpp"

#include <fmt/format.h>

#include <algorithm>
#include <atomic>
#include <filesystem>
#include <mutex>
#include <optional>
#include <set>

#include "sunbudget/base/error.hpp"
#include "sunbudget/base/parallel.hpp"
#include "sunbudget/engine/order.hpp"
#include "sunbudget/model/flow.hpp"
#include "sunbudget/raster/finish.hpp"
#include "sunbudget/raster/pyramid.hpp"
#include "sunbudget/raster/spool.hpp"

namespace sunbudget {

namespace {

/// A layer while its tiles are being made.
struct LayerWork {
    const OutputLayer* layer;
    Spool spool;
    Pyramid pyramid;
    std::vector<std::vector<BlockStatistics>> blocks;  ///< by band, block row by block row

    LayerWork(const OutputLayer& l, const std::filesystem::path& spool_file,
              std::size_t block_count, std::size_t overview_bytes)
        : layer(&l),
          spool(Spool::create(spool_file, layout_of(l.file))),
          pyramid(l.file, spool, overview_bytes),
          blocks(l.file.bands.size(), std::vector<BlockStatistics>(block_count)) {}
};

/// Cuts finished planes into tiles, and counts.
class TileSink : public Sink {
  public:
    TileSink(std::vector<std::unique_ptr<LayerWork>>& layers, int tile, int block_columns)
        : layers_(layers), tile_(tile), block_columns_(block_columns) {}

    void put(std::size_t layer, std::size_t band, const Window& window,
             const Plane<float>& plane) override {
        auto& work = *layers_[layer];
        add_statistics(work.blocks[band], window, plane);
        put_tiles(work, band, window, plane);
    }

    void put(std::size_t layer, std::size_t band, const Window& window,
             const Plane<std::uint16_t>& plane) override {
        put_tiles(*layers_[layer], band, window, plane);
    }

  private:
    void add_statistics(std::vector<BlockStatistics>& blocks, const Window& window,
                        const Plane<float>& plane) const {
        for (int r = 0; r < window.height; ++r) {
            const auto row = plane.row(r);
            const long block_row = (window.row + r) / block_px;
            for (int column = 0; column < window.width; column += block_px) {
                const auto width =
                    static_cast<std::size_t>(std::min(block_px, window.width - column));
                const long block = block_row * block_columns_ + (window.column + column) / block_px;
                add_row(blocks[static_cast<std::size_t>(block)],
                        row.subspan(static_cast<std::size_t>(column), width));
            }
        }
    }

    template <typename T>
    void put_tiles(LayerWork& work, std::size_t band, const Window& window, const Plane<T>& plane) {
        const int b = static_cast<int>(band);
        if (window.width <= tile_ && window.height <= tile_) {
            work.pyramid.put(b, static_cast<int>(window.column / tile_),
                             static_cast<int>(window.row / tile_), plane);
            return;
        }
        for (int row = 0; row < window.height; row += tile_)
            for (int column = 0; column < window.width; column += tile_) {
                Plane<T> part(std::min(tile_, window.width - column),
                              std::min(tile_, window.height - row));
                for (int r = 0; r < part.height(); ++r)
                    std::copy_n(plane.row(row + r).data() + column, part.width(),
                                part.row(r).data());
                work.pyramid.put(b, static_cast<int>((window.column + column) / tile_),
                                 static_cast<int>((window.row + row) / tile_), part);
            }
    }

    std::vector<std::unique_ptr<LayerWork>>& layers_;
    int tile_;
    int block_columns_;
};

int unit_px(const Run& run) {
    return std::max(run.tile, block_px);
}

std::uint64_t band_planes(const Run& run) {
    std::uint64_t planes = 0;
    for (const auto& layer : run.layers) planes += layer.file.bands.size();
    return planes;
}

/// Windows go through the grid in bands of this many rows of them: striped inputs are decoded once a
/// band.
constexpr int band_units = 4;

/// What overview tiles of all layers may take while they wait for their children. Those beyond are made from the
/// spool, which is cheap beside a layer's making; without a limit they grow with the grid's width and its bands.
std::uint64_t most_waiting_bytes(std::uint64_t memory_bytes) {
    return memory_bytes / 32;
}

std::size_t overview_bytes(const Run& run, std::uint64_t memory_bytes) {
    return static_cast<std::size_t>(most_waiting_bytes(memory_bytes) /
                                    std::max<std::size_t>(1, run.layers.size()));
}

/// What reading the inputs takes: all of them decoded, and planes for one pixel of a window.
struct InputSizes {
    std::uint64_t decoded_bytes = 0;
    std::uint64_t bytes_per_pixel = 0;
};

InputSizes input_sizes(const Run& run) {
    InputSizes sizes;
    const auto add = [&](const Source& source) {
        sizes.decoded_bytes += decoded_bytes(source);
        sizes.bytes_per_pixel += sizeof(float);
    };
    if (const auto* cover = std::get_if<CoverSurface>(&run.surface)) add(cover->codes);
    if (const auto* given = std::get_if<GivenSurface>(&run.surface))
        if (const auto* raster = std::get_if<Source>(&given->albedo)) add(*raster);
    if (const auto* image = std::get_if<ReflectanceSurface>(&run.surface)) {
        for (const auto& one : image->bands) add(one.reflectance);
        for (const auto& one : image->quality) add(one.codes);
        if (image->fill) add(image->fill->codes);
    }
    if (run.terrain) {
        for (const auto& heights : run.terrain->elevation) add(heights);
        if (const auto* other = std::get_if<std::vector<Source>>(&run.terrain->slope_from))
            for (const auto& heights : *other) add(heights);
    }
    if (run.heat.surface_k) add(*run.heat.surface_k);
    if (run.heat.emissivity)
        if (const auto* raster = std::get_if<Source>(&*run.heat.emissivity)) add(*raster);
    if (run.heat.longwave) {
        if (run.heat.longwave->temperature_k) add(*run.heat.longwave->temperature_k);
        if (run.heat.longwave->humidity) add(*run.heat.longwave->humidity);
        for (const auto& raster : run.heat.longwave->clouds) add(raster);
        for (const auto& raster : run.heat.longwave->down_w_m2) add(raster);
    }
    return sizes;
}

/// Every overview tile of every layer, decoded: what waits is never more.
std::uint64_t all_overview_bytes(const Run& run) {
    std::uint64_t bytes = 0;
    for (const auto& layer : run.layers) {
        const auto layout = layout_of(layer.file);
        bytes += (layout.tile_count() - layout.tile_count(0)) * layout.tile_bytes();
    }
    return bytes;
}

/// What they come to: a row of tiles at every level above a band's own, and a few inside it.
std::uint64_t waiting_bytes(const Run& run, std::uint64_t memory_bytes) {
    const auto tile = static_cast<std::uint64_t>(run.tile);
    const auto across = static_cast<std::uint64_t>(run.grid.width) / band_units + 3 * tile;
    return std::min(most_waiting_bytes(memory_bytes),
                    band_planes(run) * across * tile * sizeof(float));
}

/// Bytes a thread holds for each pixel of its window: surface, heights, a tile raw and encoded; what heat radiation
/// goes through; with terrain the light of several bands and its parts.
std::uint64_t bytes_per_pixel(const Run& run) {
    constexpr std::uint64_t plain = 40, terrain = 60, a_band = 24, bands_held = 12, heat = 52;
    const auto flat = plain + (run.heat.longwave ? heat : 0);
    if (!run.terrain) return flat;
    const std::uint64_t bands = run.times ? run.times->bands() : 0;
    return flat + terrain + a_band * std::min(bands, bands_held);
}

/// What changes add to it: planes of albedo and of reflected light, of heat where they have layers of it, or a whole
/// flow of their own.
std::uint64_t change_bytes_per_pixel(const Run& run) {
    constexpr std::uint64_t a_plane = sizeof(float), bands_held = 12, heat_planes = 6;
    const auto held = std::min<std::uint64_t>(run.times ? run.times->bands() : 0, bands_held);
    std::uint64_t bytes = 0, kept = 0;
    for (const auto& layer : run.layers)
        kept += layer.changed && layer.changed->saved && run.changes[layer.changed->change].height
                    ? held
                    : 0;
    for (const auto& change : run.changes)
        bytes += change.height ? bytes_per_pixel(run) : (2 + (run.terrain ? held : 0)) * a_plane;
    std::set<std::size_t> heating;
    for (const auto& layer : run.layers)
        if (layer.changed && layer.layer->is_heat() && !run.changes[layer.changed->change].height)
            heating.insert(layer.changed->change);
    bytes += heating.size() * heat_planes * a_plane;
    return bytes + kept * a_plane;
}

void check_space(const Run& run, const std::filesystem::path& folder) {
    // The least any run writes: a run that cannot hold even this is refused before it starts.
    const double pixels = static_cast<double>(run.grid.width) * run.grid.height;
    const double least = pixels * static_cast<double>(band_planes(run)) * 0.01;
    std::error_code failure;
    const auto space = std::filesystem::space(folder, failure);
    if (!failure && static_cast<double>(space.available) < least)
        throw Error(Cause::output,
                    fmt::format("only {} bytes are free, at least {:.0f} are needed",
                                space.available, least),
                    folder.string(), "free some space, or name another folder with --out");
}

}  // namespace

std::uint64_t raster_cache_bytes(std::uint64_t memory_bytes) {
    return std::clamp<std::uint64_t>(memory_bytes / 12, 32u << 20, 512u << 20);
}

std::uint64_t decoded_bytes(const Source& source) {
    const auto& grid = source.info().grid;
    const double bytes_per_pixel =
        static_cast<double>(source.info().decoded_bytes) / grid.width / grid.height;
    const double pixels = static_cast<double>(source.target().width) * source.target().height *
                          source.coverage() * source.columns_per_pixel() * source.rows_per_pixel();
    return std::min(source.info().decoded_bytes,
                    static_cast<std::uint64_t>(pixels * bytes_per_pixel));
}

std::uint64_t memory_needed(const Run& run, const EngineOptions& options) {
    // Program and libraries with their tables, before the first pixel (measured).
    constexpr std::uint64_t process_bytes = 54u << 20;
    const auto side = [&](int pixels) {
        return static_cast<std::uint64_t>(std::min(unit_px(run), pixels));
    };
    const auto window = side(run.grid.width) * side(run.grid.height);
    const auto windows =
        (static_cast<std::uint64_t>(run.grid.width) * static_cast<std::uint64_t>(run.grid.height) -
         1) /
            window +
        1;
    const auto busy = std::min(static_cast<std::uint64_t>(options.threads), windows);
    // With terrain: sun tables, and coarse heights around the windows out to the reach (measured).
    constexpr std::uint64_t terrain_bytes = 40u << 20;
    const auto input = input_sizes(run);
    const auto terrains = static_cast<std::uint64_t>(std::ranges::count_if(
                              run.changes, [](const Change& c) { return c.height.has_value(); })) +
                          (run.terrain ? 1 : 0);
    return process_bytes + terrains * terrain_bytes +
           std::min(raster_cache_bytes(options.memory_bytes), input.decoded_bytes) +
           std::min(waiting_bytes(run, options.memory_bytes), all_overview_bytes(run)) +
           busy * window *
               (bytes_per_pixel(run) + change_bytes_per_pixel(run) + input.bytes_per_pixel);
}

Execution execute(const Run& run, const EngineOptions& options, const OutputSet& outputs) {
    check_space(run, outputs.folder());
    const int block_columns = (run.grid.width + block_px - 1) / block_px;
    const int block_rows = (run.grid.height + block_px - 1) / block_px;
    const auto block_count =
        static_cast<std::size_t>(block_columns) * static_cast<std::size_t>(block_rows);
    std::vector<std::unique_ptr<LayerWork>> layers;
    for (const auto& layer : run.layers)
        layers.push_back(
            std::make_unique<LayerWork>(layer, outputs.staged(layer.file.name + ".spool"),
                                        block_count, overview_bytes(run, options.memory_bytes)));

    const SharedLight light(run, options.threads, outputs.staged("").parent_path());
    std::vector<std::optional<Flow>> flows(static_cast<std::size_t>(options.threads));
    std::vector<TileSink> sinks(flows.size(), TileSink(layers, run.tile, block_columns));
    const auto units = units_in_order(run.grid.width, run.grid.height, unit_px(run), band_units);
    std::atomic<std::uint64_t> pixels_done{0};
    const double pixels = static_cast<double>(run.grid.width) * run.grid.height;
    const auto report = [&](const std::string& step, double done, double total,
                            const std::string& unit) {
        if (options.progress) options.progress({step, done, total, unit});
    };
    parallel_for(units.size(), options.threads, [&](std::size_t i, int thread) {
        const auto t = static_cast<std::size_t>(thread);
        const auto& window = units[i];
        try {
            if (!flows[t]) flows[t].emplace(run, light, thread);
            flows[t]->compute(window, sinks[t]);
        } catch (const Error& error) {
            throw error.at(fmt::format("columns {} to {}, rows {} to {}", window.column,
                                       window.column + window.width - 1, window.row,
                                       window.row + window.height - 1));
        }
        const auto done = pixels_done +=
            static_cast<std::uint64_t>(window.width) * static_cast<std::uint64_t>(window.height);
        report("computing", static_cast<double>(done) / 1e6, pixels / 1e6, "Mpixel");
    });
    throw_if_stopped();

    Execution result;
    for (const auto& flow : flows) {
        if (!flow) continue;
        for (const auto& [flag, count] : flow->flags()) result.flags[flag] += count;
        result.infinities += flow->infinities();
    }
    for (std::size_t n = 0; n < layers.size(); ++n) {
        auto& work = *layers[n];
        report("finishing", static_cast<double>(n), static_cast<double>(layers.size()), "file");
        LayerResult finished{work.layer->file.name + ".tif", {}, 0};
        if (work.layer->file.sample == Sample::float32)
            for (const auto& blocks : work.blocks)
                finished.bands.push_back(
                    combined(blocks, static_cast<std::uint64_t>(run.grid.width) *
                                         static_cast<std::uint64_t>(run.grid.height)));
        const auto file = outputs.staged(finished.file_name);
        finish_layer(work.layer->file, work.spool, finished.bands, file);
        work.spool.remove();
        finished.bytes = std::filesystem::file_size(file);
        result.layers.push_back(std::move(finished));
        throw_if_stopped();
    }
    return result;
}

}  // namespace sunbudget
