#pragma once

#include <filesystem>
#include <optional>
#include <string>
#include <vector>

#include "sunbudget/model/run.hpp"

namespace sunbudget {

/// Zones as a reader gets to see them: the foremost of zones.csv, a few of its columns.
struct ZoneView {
    struct Row {
        std::size_t zone = 0;  ///< in the order of the polygon file
        std::vector<std::string> cells;
    };
    std::vector<std::string> columns;  ///< names as in zones.csv, the id first
    std::vector<Row> rows;             ///< by rank
    std::size_t zones = 0;             ///< in all
    std::string ranked_by;             ///< a layer; empty: the file's order
    std::string period;                ///< of the figures; empty: the run has one
};

/// What zones.csv holds for one period (none given: the first), its `most` foremost rows.
/// Throws Error(input) when the file cannot be read.
[[nodiscard]] ZoneView zone_view(const std::filesystem::path& csv, const std::string& period,
                                 std::size_t most);

/// What changes.csv holds: the zones where a change saves most, and those where it saves least or costs. Zones that
/// it does not touch are left out. `changes` is the number of its rows for each zone.
/// Throws Error(input) when the file cannot be read.
[[nodiscard]] ZoneView change_view(const std::filesystem::path& csv, std::size_t changes,
                                   std::size_t most);

/// SVG paths of the zones of a view, in pixels of a picture that shows the whole grid.
[[nodiscard]] std::string zone_paths(const Run& run, const ZoneView& view, int width, int height);

}  // namespace sunbudget
