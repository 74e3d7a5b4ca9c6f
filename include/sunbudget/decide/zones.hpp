#pragma once

#include <cstdint>
#include <functional>
#include <map>
#include <optional>
#include <string>
#include <vector>

#include "sunbudget/decide/zone_figures.hpp"
#include "sunbudget/raster/polygons.hpp"
#include "sunbudget/raster/source.hpp"

namespace sunbudget {

/// A raster that zones are given figures of.
struct ZoneLayer {
    std::string name;
    bool per_surface_area = false;  ///< radiation: weighted with the inclined surface, and summed
    double to_total = 0;            ///< times mean and area: W, or GJ; 0: a sum has no meaning
    std::string total_unit{};
    std::vector<Source> bands;  ///< one, or one a period
    /// Standard uncertainty of each band, systematic over a zone; may be empty.
    std::vector<Source> uncertainty{};
};

/// What is asked about zones: rasters on one grid, and what helps to read them.
struct ZoneQuestion {
    Grid grid;
    std::vector<ZoneLayer> layers;
    std::vector<std::string>
        periods;  ///< names of the bands of layers that have several; empty: none has
    std::optional<Source> slope_deg;  ///< without it the ground counts as level
    std::optional<Source> classes;
    std::map<std::int32_t, std::string> class_names{};
    std::optional<double> above;
};

/// One zone's answers.
struct ZoneAnswer {
    double map_area_m2 = 0;      ///< of the part on the grid
    double surface_area_m2 = 0;  ///< the same along the slopes
    double nodata_share =
        0;  ///< of the zone, where the first layer has no value or the grid has ended
    std::map<std::int32_t, double> class_shares{};  ///< of the part that has a class
    std::vector<std::vector<ZoneFigures>> figures;  ///< by layer and band
    std::vector<std::vector<double>>
        uncertainty;  ///< by layer and band, of the mean; NaN where not known

    struct ClassShare {
        std::int32_t code = 0;
        double share = 0;  ///< 0 where the zone has no class
    };
    [[nodiscard]] ClassShare commonest_class() const;
};

struct ZoneOptions {
    int threads = 1;
    std::function<void(double done, double total)> progress{};  ///< in megapixels
};

/// Figures of every zone: each pixel counts with the exact share of it that lies inside the zone.
///
/// out     in the zones' order; the same bits whatever the threads
/// memory  some planes a thread, and the zones that the row of blocks at work touches
/// errors  Error(input) when a raster cannot be read
[[nodiscard]] std::vector<ZoneAnswer> zone_answers(const ZoneQuestion& question,
                                                   const std::vector<Polygon>& zones,
                                                   const ZoneOptions& options);

}  // namespace sunbudget
