#pragma once

#include <filesystem>
#include <span>
#include <string>
#include <vector>

#include "sunbudget/decide/zones.hpp"
#include "sunbudget/model/run.hpp"

namespace sunbudget {

/// What every change of a run does to every zone: a row for each zone and change. Several periods are brought
/// together: energies are added, means are weighted by the periods' lengths.
class ChangeTable {
  public:
    /// The arguments must outlive the table. `id` is the name of the first column.
    ChangeTable(const Run& run, const ZoneQuestion& question, const std::vector<Polygon>& zones,
                const std::vector<ZoneAnswer>& answers, std::string id);

    [[nodiscard]] std::span<const FeatureColumn> columns() const { return columns_; }
    [[nodiscard]] std::size_t rows() const { return zones_.size() * changes_.size(); }
    [[nodiscard]] FeatureRow row(std::size_t row) const;
    /// Throws Error(output).
    void write_csv(const std::filesystem::path& file) const;
    /// What each change saves where it is made, and what its neighbours take up: a sentence each.
    [[nodiscard]] std::vector<std::string> notes() const;

  private:
    enum class Half { all, summer, winter };
    /// The question's layers that belong to a layer of the base; `none` where there is none.
    struct Layers {
        std::size_t before, after, saved;
        std::vector<std::size_t> cases;  ///< as case_names_
    };
    struct ChangeRows {
        std::size_t change;          ///< counts the run's changes
        std::size_t treated;         ///< the layer of treated shares
        std::vector<Layers> layers;  ///< as names_
        std::vector<Layers> means;   ///< as mean_names_
    };
    static constexpr std::size_t none = static_cast<std::size_t>(-1);

    [[nodiscard]] std::size_t layer_named(const std::string& name) const;
    [[nodiscard]] double total(std::size_t zone, std::size_t layer, Half half) const;
    [[nodiscard]] double mean(std::size_t zone, std::size_t layer) const;
    [[nodiscard]] double mean_in_time(std::size_t zone, std::size_t layer) const;
    /// Whether any change has the case's saving of the layer.
    [[nodiscard]] bool has_case(std::size_t layer, std::size_t one) const;
    [[nodiscard]] double treated_m2(std::size_t zone, const ChangeRows& change) const;
    [[nodiscard]] bool is_energy() const;
    void put_layer(std::size_t zone, const ChangeRows& change, std::size_t layer,
                   std::vector<double>& numbers) const;

    const Run& run_;
    const ZoneQuestion& question_;
    const std::vector<Polygon>& zones_;
    const std::vector<ZoneAnswer>& answers_;
    std::vector<std::string> names_;       ///< layers of the base of which something is saved
    std::vector<std::string> mean_names_;  ///< likewise, of which nothing adds up: temperatures
    std::vector<std::string> case_names_;  ///< initial, low, high: those that any change has
    std::vector<ChangeRows> changes_;
    std::vector<Half> halves_;  ///< of the year, by period
    bool both_halves_ = false;
    std::vector<FeatureColumn> columns_;
};

}  // namespace sunbudget
