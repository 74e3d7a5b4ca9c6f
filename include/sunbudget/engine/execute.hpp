#pragma once

#include <cstdint>
#include <functional>
#include <map>
#include <string>
#include <vector>

#include "sunbudget/engine/output_set.hpp"
#include "sunbudget/model/run.hpp"
#include "sunbudget/raster/statistics.hpp"

namespace sunbudget {

/// How far a step is: for people.
struct Progress {
    std::string step;
    double done = 0;
    double total = 0;
    std::string unit;
};

struct EngineOptions {
    int threads = 1;
    std::uint64_t memory_bytes = std::uint64_t{1} << 30;
    std::function<void(const Progress&)> progress;  ///< may be empty; called from any thread
};

/// One finished file, still in the staging folder.
struct LayerResult {
    std::string file_name;
    std::vector<BandStatistics> bands;  ///< empty for flags
    std::uint64_t bytes = 0;
};

struct Execution {
    std::vector<LayerResult> layers;               ///< as run.layers
    std::map<std::uint16_t, std::uint64_t> flags;  ///< pixels by the value of `quality`
    std::uint64_t infinities = 0;                  ///< infinite numbers met in the inputs
    std::uint64_t zones = 0;
    std::vector<std::string> zone_notes{};  ///< what a reader of the zone table should know
};

/// GDAL's share of the memory budget.
[[nodiscard]] std::uint64_t raster_cache_bytes(std::uint64_t memory_bytes);

/// What a raster takes once it is decoded, as far as the grid covers it.
[[nodiscard]] std::uint64_t decoded_bytes(const Source& source);

/// Memory the run will hold at its peak, all threads: planes, overviews in the making, GDAL's cache.
[[nodiscard]] std::uint64_t memory_needed(const Run& run, const EngineOptions& options);

/// Computes every layer of the run into files staged in `outputs`, to be published by the caller.
///
/// errors  Error(input) of a read that failed, with the layer of the lattice it happened in;
///         Error(output); Error(temporary) after a stop signal
[[nodiscard]] Execution execute(const Run& run, const EngineOptions& options,
                                const OutputSet& outputs);

/// Figures of the run's zones from its finished layers, staged as zones.csv and zones.gpkg, and of its changes as changes.csv; the names of those
/// files, none where the run has no zones. The notes go into `execution`.
[[nodiscard]] std::vector<std::string> write_zones(const Run& run, const EngineOptions& options,
                                                   const OutputSet& outputs, Execution& execution);

}  // namespace sunbudget
