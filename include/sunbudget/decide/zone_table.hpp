#pragma once

#include <filesystem>
#include <span>
#include <string>
#include <vector>

#include "sunbudget/decide/zones.hpp"

namespace sunbudget {

/// The answers as a table: a row for each zone and, where a layer has several bands, each period.
class ZoneTable {
  public:
    /// The arguments must outlive the table. `id` is the name of the first column.
    ZoneTable(const ZoneQuestion& question, const std::vector<Polygon>& zones,
              const std::vector<ZoneAnswer>& answers, std::string id);

    [[nodiscard]] std::span<const FeatureColumn> columns() const { return columns_; }
    [[nodiscard]] std::size_t rows() const { return zones_.size() * periods_; }
    [[nodiscard]] FeatureRow row(std::size_t row) const;

    /// Throws Error(output).
    void write_csv(const std::filesystem::path& file) const;

  private:
    struct Ranks {
        std::vector<std::size_t> by_mean,
            by_sum;  ///< by zone, from 1; 0 where the zone has no value
    };
    [[nodiscard]] const ZoneFigures& figures(std::size_t zone, std::size_t layer,
                                             std::size_t period) const;
    [[nodiscard]] double total(std::size_t zone, std::size_t layer, std::size_t period) const;
    void rank(std::size_t layer, std::size_t period);

    const ZoneQuestion& question_;
    const std::vector<Polygon>& zones_;
    const std::vector<ZoneAnswer>& answers_;
    std::size_t periods_ = 1;
    std::vector<std::int32_t> codes_;
    std::vector<FeatureColumn> columns_;
    std::vector<std::vector<Ranks>> ranks_;  ///< by layer (with totals) and period
};

/// Plain sentences a reader of the table needs: zones that differ only because the map has one class, zones beyond
/// the grid.
[[nodiscard]] std::vector<std::string> zone_notes(const ZoneQuestion& question,
                                                  const std::vector<ZoneAnswer>& answers);

/// The question about finished rasters: `files` by layer name, all on one grid.
struct ZoneRasters {
    std::vector<std::filesystem::path> files;
    std::filesystem::path slope;  ///< may be empty
    RasterName cover;             ///< may be empty
    std::map<std::int32_t, std::string> class_names{};
    std::optional<double> above;
};
/// Throws Error(input) when a raster cannot be read or lies on another grid than the first.
[[nodiscard]] ZoneQuestion question_about(const ZoneRasters& rasters);

}  // namespace sunbudget
