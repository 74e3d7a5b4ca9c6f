#include "sunbudget/decide/zone_table.hpp"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <limits>
#include <numeric>
#include <set>

#include "csv_file.hpp"
#include "sunbudget/base/error.hpp"
#include "sunbudget/base/text.hpp"
#include "sunbudget/tables/layers.hpp"

namespace sunbudget {

namespace fs = std::filesystem;

namespace {

constexpr double nan_value = std::numeric_limits<double>::quiet_NaN();

/// Ranks from 1 for the largest; equal values in the zones' order.
std::vector<std::size_t> ranks_of(std::span<const double> values) {
    std::vector<std::size_t> order;
    for (std::size_t i = 0; i < values.size(); ++i)
        if (!std::isnan(values[i])) order.push_back(i);
    std::stable_sort(order.begin(), order.end(),
                     [&](std::size_t a, std::size_t b) { return values[a] > values[b]; });
    std::vector<std::size_t> ranks(values.size(), 0);
    for (std::size_t i = 0; i < order.size(); ++i) ranks[order[i]] = i + 1;
    return ranks;
}

/// What a layer's band adds up to over its area.
struct Total {
    double factor = 0;
    const char* unit = "";
};

Total total_of(const std::string& unit) {
    if (unit == name_of(OutputUnit::w_m2)) return {1, "W"};
    if (unit == name_of(OutputUnit::mj_m2)) return {1e-3, "GJ"};
    if (unit == name_of(OutputUnit::kwh_m2)) return {3.6e-3, "GJ"};
    return {};
}

Source open_band(const fs::path& file, int band, const Grid& grid) {
    SourceSpec spec;
    spec.name = {file, band, {}};
    return Source::open(spec, grid);
}

std::vector<Source> open_bands(const RasterInfo& info, const Grid& grid) {
    if (info.grid != grid)
        throw Error(Cause::input, "the raster lies on another grid than the first",
                    info.name.path.native(), "give rasters of one run");
    std::vector<Source> bands;
    for (int band = 1; band <= info.bands; ++band)
        bands.push_back(open_band(info.name.path, band, grid));
    return bands;
}

/// Where a layer's uncertainty lies: a file of that name beside it.
fs::path uncertainty_file(const fs::path& file, const std::vector<fs::path>& files) {
    const auto wanted = file.stem().string() + "_uncertainty";
    for (const auto& other : files)
        if (other.stem() == wanted) return other;
    return {};
}

bool is_uncertainty(const fs::path& file) {
    return file.stem().string().ends_with("_uncertainty");
}

ZoneLayer layer_from(const RasterInfo& info, const ZoneRasters& rasters, const Grid& grid) {
    ZoneLayer layer;
    const auto& file = info.name.path;
    layer.name = file.stem().string();
    const auto total = total_of(info.unit);
    layer.to_total = total.factor;
    layer.total_unit = total.unit;
    layer.per_surface_area = total.factor > 0;
    layer.bands = open_bands(info, grid);
    if (const auto other = uncertainty_file(file, rasters.files); !other.empty())
        layer.uncertainty = open_bands(inspect(RasterName{other, 1, {}}), grid);
    return layer;
}

}  // namespace

ZoneQuestion question_about(const ZoneRasters& rasters) {
    ZoneQuestion question;
    question.above = rasters.above;
    question.class_names = rasters.class_names;
    for (const auto& file : rasters.files) {
        if (is_uncertainty(file)) continue;
        const auto info = inspect(RasterName{file, 1, {}});
        if (question.layers.empty()) question.grid = info.grid;
        question.layers.push_back(layer_from(info, rasters, question.grid));
        if (info.bands == 1) continue;
        if (question.periods.empty()) question.periods = info.band_names;
        if (question.periods.size() != static_cast<std::size_t>(info.bands))
            throw Error(Cause::input, "the raster has other periods than those before it",
                        file.native(), "give rasters of one run");
    }
    if (!rasters.slope.empty()) question.slope_deg = open_band(rasters.slope, 1, question.grid);
    if (!rasters.cover.path.empty()) {
        SourceSpec spec;
        spec.name = rasters.cover;
        spec.kind = DataKind::code;
        question.classes = Source::open(spec, question.grid);
    }
    return question;
}

ZoneTable::ZoneTable(const ZoneQuestion& question, const std::vector<Polygon>& zones,
                     const std::vector<ZoneAnswer>& answers, std::string id)
    : question_(question),
      zones_(zones),
      answers_(answers),
      periods_(std::max<std::size_t>(1, question.periods.size())) {
    columns_.push_back({std::move(id), true});
    if (!question.periods.empty()) columns_.push_back({"period", true});
    for (const auto* name : {"map_area_m2", "surface_area_m2", "nodata_share", "one_class_share"})
        columns_.push_back({name});
    for (std::size_t n = 0; n < question.layers.size(); ++n) {
        const auto& layer = question.layers[n];
        for (const auto* name :
             {"mean", "sum", "min", "max", "std", "p10", "p50", "p90", "uncertainty"})
            columns_.push_back({layer.name + "_" + name});
        if (question.above) columns_.push_back({layer.name + "_above_share"});
        ranks_.emplace_back();
        if (layer.to_total == 0) continue;
        columns_.push_back({layer.name + "_rank_mean"});
        columns_.push_back({layer.name + "_rank_sum"});
        for (std::size_t period = 0; period < periods_; ++period) rank(n, period);
    }
    std::set<std::int32_t> codes;
    for (const auto& answer : answers)
        for (const auto& [code, share] : answer.class_shares) codes.insert(code);
    codes_.assign(codes.begin(), codes.end());
    for (const auto code : codes_) columns_.push_back({fmt::format("class_{}_share", code)});
}

const ZoneFigures& ZoneTable::figures(std::size_t zone, std::size_t layer,
                                      std::size_t period) const {
    const auto& bands = answers_[zone].figures[layer];
    return bands[bands.size() == 1 ? 0 : period];
}

double ZoneTable::total(std::size_t zone, std::size_t layer, std::size_t period) const {
    const auto& found = figures(zone, layer, period);
    return found.mean * found.weight * question_.layers[layer].to_total;
}

void ZoneTable::rank(std::size_t layer, std::size_t period) {
    std::vector<double> means, sums;
    for (std::size_t zone = 0; zone < zones_.size(); ++zone) {
        const bool known = figures(zone, layer, period).weight > 0;
        means.push_back(known ? figures(zone, layer, period).mean : nan_value);
        sums.push_back(known ? total(zone, layer, period) : nan_value);
    }
    ranks_[layer].push_back({ranks_of(means), ranks_of(sums)});
}

FeatureRow ZoneTable::row(std::size_t row) const {
    const std::size_t zone = row / periods_, period = row % periods_;
    const auto& answer = answers_[zone];
    FeatureRow cells{zones_[zone].fid, {zones_[zone].id}, {}};
    if (!question_.periods.empty()) cells.texts.push_back(question_.periods[period]);
    const bool classes = !answer.class_shares.empty();
    auto& numbers = cells.numbers;
    numbers = {answer.map_area_m2, answer.surface_area_m2, answer.nodata_share,
               classes ? answer.commonest_class().share : nan_value};
    for (std::size_t n = 0; n < question_.layers.size(); ++n) {
        const auto& found = figures(zone, n, period);
        const bool known = found.weight > 0, adds_up = question_.layers[n].to_total > 0;
        const auto put = [&](double value, bool there = true) {
            numbers.push_back(known && there ? value : nan_value);
        };
        put(found.mean);
        put(known ? total(zone, n, period) : 0, adds_up);
        for (const double value :
             {found.min, found.max, found.std, found.p10, found.p50, found.p90})
            put(value);
        const auto& uncertainty = answer.uncertainty[n];
        put(uncertainty[uncertainty.size() == 1 ? 0 : period]);
        if (question_.above) put(found.above_share);
        if (!adds_up) continue;
        put(static_cast<double>(ranks_[n][period].by_mean[zone]));
        put(static_cast<double>(ranks_[n][period].by_sum[zone]));
    }
    for (const auto code : codes_) {
        const auto share = answer.class_shares.find(code);
        numbers.push_back(!classes                             ? nan_value
                          : share == answer.class_shares.end() ? 0
                                                               : share->second);
    }
    return cells;
}

void ZoneTable::write_csv(const fs::path& file) const {
    write_csv_file(file, columns_, rows(), [&](std::size_t r) { return row(r); });
}

std::vector<std::string> zone_notes(const ZoneQuestion& question,
                                    const std::vector<ZoneAnswer>& answers) {
    std::vector<std::string> notes;
    std::size_t beyond = 0;
    std::map<std::int32_t, std::size_t> of_one_class;
    for (const auto& answer : answers) {
        if (answer.nodata_share >= 1) ++beyond;
        if (const auto most = answer.commonest_class(); most.share > 0.99)
            ++of_one_class[most.code];
    }
    if (beyond > 0)
        notes.push_back(
            fmt::format("{} of {} zones hold no value: beyond the grid, or nodata throughout",
                        beyond, answers.size()));
    for (const auto& [code, count] : of_one_class) {
        if (count < 2) continue;
        const auto name = question.class_names.find(code);
        notes.push_back(fmt::format(
            "{} zones lie in class {}{} alone: they have one albedo between them, because the map "
            "has one class there. "
            "What they differ by is light and slope, not their surfaces",
            count, code, name == question.class_names.end() ? "" : " (" + name->second + ")"));
    }
    return notes;
}

}  // namespace sunbudget
