#include "sunbudget/decide/change_table.hpp"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <limits>

#include "csv_file.hpp"
#include "sunbudget/raster/locator.hpp"

namespace sunbudget {

namespace {

constexpr double nan_value = std::numeric_limits<double>::quiet_NaN();

/// Whether most of a period's days lie from April to September.
bool in_northern_summer(const Period& period) {
    double summer = 0, all = 0;
    for (const auto& day : period.days) {
        all += day.weight;
        if (day.date.month >= 4 && day.date.month <= 9) summer += day.weight;
    }
    return summer > all / 2;
}

}  // namespace

ChangeTable::ChangeTable(const Run& run, const ZoneQuestion& question,
                         const std::vector<Polygon>& zones, const std::vector<ZoneAnswer>& answers,
                         std::string id)
    : run_(run), question_(question), zones_(zones), answers_(answers) {
    for (const auto& layer : run.layers) {
        const auto quantity = layer.layer->quantity;
        if (!layer.changed || !layer.changed->saved ||
            (quantity != Quantity::radiation && quantity != Quantity::temperature))
            continue;
        const auto& name = run.layers[layer.changed->base].file.name;
        auto& names = quantity == Quantity::radiation ? names_ : mean_names_;
        if (layer_named(name) != none && std::ranges::find(names, name) == names.end())
            names.push_back(name);
    }
    for (const auto& change : run.changes)
        if (!change.case_name.empty() &&
            std::ranges::find(case_names_, change.case_name) == case_names_.end())
            case_names_.push_back(change.case_name);
    for (std::size_t c = 0; c < run.changes.size(); ++c) {
        const auto& change = run.changes[c];
        if (!change.case_name.empty()) continue;
        ChangeRows rows{c, layer_named("treated__" + change.name), {}, {}};
        for (const auto& name : mean_names_) {
            const auto after = name + "__" + change.name;
            rows.means.push_back(
                {layer_named(name), layer_named(after), layer_named(after + "__saved"), {}});
        }
        for (const auto& name : names_) {
            const auto after = name + "__" + change.name;
            rows.layers.push_back(
                {layer_named(name), layer_named(after), layer_named(after + "__saved"), {}});
            for (const auto& one : case_names_)
                rows.layers.back().cases.push_back(layer_named(after + "__saved_" + one));
        }
        changes_.push_back(std::move(rows));
    }
    const auto middle = Locator(run.grid).at(run.grid.width / 2.0, run.grid.height / 2.0);
    const bool north = !middle || middle->latitude_rad >= 0;
    if (run.times)
        for (const auto& period : run.times->periods)
            halves_.push_back(in_northern_summer(period) == north ? Half::summer : Half::winter);
    both_halves_ = std::ranges::count(halves_, Half::summer) > 0 &&
                   std::ranges::count(halves_, Half::winter) > 0;

    columns_ = {{std::move(id), true}, {"change", true}, {"treated_m2"}, {"cost"}};
    for (const auto& name : names_) {
        for (const auto* what : {"before_sum", "after_sum", "saved_sum", "saved_mean"})
            columns_.push_back({name + "_" + what});
        const auto layer = static_cast<std::size_t>(&name - names_.data());
        for (std::size_t one = 0; one < case_names_.size(); ++one)
            if (has_case(layer, one))
                columns_.push_back({name + "_saved_" + case_names_[one] + "_sum"});
        if (both_halves_)
            for (const auto* what : {"saved_summer_sum", "saved_winter_sum"})
                columns_.push_back({name + "_" + what});
        columns_.push_back({name + "_saved_per_cost"});
        if (is_energy()) columns_.push_back({name + "_saved_per_cost_in_life"});
    }
    for (const auto& name : mean_names_)
        for (const auto* what : {"before_mean", "after_mean", "saved_mean"})
            columns_.push_back({name + "_" + what});
}

std::size_t ChangeTable::layer_named(const std::string& name) const {
    const auto found = std::ranges::find(question_.layers, name, &ZoneLayer::name);
    return found == question_.layers.end()
               ? none
               : static_cast<std::size_t>(found - question_.layers.begin());
}

bool ChangeTable::is_energy() const {
    return run_.unit != OutputUnit::w_m2;
}

/// Of all periods, or of those of one half of the year: GJ added up, or W as a mean over their time.
double ChangeTable::total(std::size_t zone, std::size_t layer, Half half) const {
    if (layer == none) return nan_value;
    double sum = 0, time_s = 0;
    const auto& bands = answers_[zone].figures[layer];
    for (std::size_t band = 0; band < bands.size(); ++band) {
        if (half != Half::all && halves_[band] != half) continue;
        if (!(bands[band].weight > 0)) return nan_value;
        const double length_s =
            is_energy() || halves_.empty() ? 1 : run_.times->periods[band].duration_s;
        sum += bands[band].mean * bands[band].weight * question_.layers[layer].to_total * length_s;
        time_s += length_s;
    }
    return is_energy() ? sum : sum / time_s;
}

/// Per square metre of the zone's surface: of all periods.
double ChangeTable::mean(std::size_t zone, std::size_t layer) const {
    if (layer == none) return nan_value;
    const double weight = answers_[zone].figures[layer].front().weight;
    return weight > 0 ? total(zone, layer, Half::all) / question_.layers[layer].to_total / weight
                      : nan_value;
}

bool ChangeTable::has_case(std::size_t layer, std::size_t one) const {
    return std::ranges::any_of(changes_, [&](const ChangeRows& change) {
        return change.layers[layer].cases[one] != none;
    });
}

/// Over the zone and the time of all periods.
double ChangeTable::mean_in_time(std::size_t zone, std::size_t layer) const {
    if (layer == none) return nan_value;
    double sum = 0, time_s = 0;
    const auto& bands = answers_[zone].figures[layer];
    for (std::size_t band = 0; band < bands.size(); ++band) {
        if (!(bands[band].weight > 0)) return nan_value;
        const double length_s = halves_.empty() ? 1 : run_.times->periods[band].duration_s;
        sum += bands[band].mean * length_s;
        time_s += length_s;
    }
    return sum / time_s;
}

double ChangeTable::treated_m2(std::size_t zone, const ChangeRows& change) const {
    if (change.treated == none) return nan_value;
    const auto& found = answers_[zone].figures[change.treated].front();
    return found.mean * found.weight;
}

void ChangeTable::put_layer(std::size_t zone, const ChangeRows& change, std::size_t layer,
                            std::vector<double>& numbers) const {
    const auto& of = change.layers[layer];
    const double saved = total(zone, of.saved, Half::all);
    numbers.insert(numbers.end(), {total(zone, of.before, Half::all),
                                   total(zone, of.after, Half::all), saved, mean(zone, of.saved)});
    for (std::size_t one = 0; one < of.cases.size(); ++one)
        if (has_case(layer, one)) numbers.push_back(total(zone, of.cases[one], Half::all));
    if (both_halves_)
        for (const auto half : {Half::summer, Half::winter})
            numbers.push_back(total(zone, of.saved, half));
    const auto& made = run_.changes[change.change];
    const double cost = made.cost_per_m2.value_or(nan_value) * treated_m2(zone, change);
    const double per_cost = cost > 0 ? saved / cost : nan_value;
    numbers.push_back(per_cost);
    if (is_energy()) numbers.push_back(per_cost * made.lifetime_years.value_or(nan_value));
}

FeatureRow ChangeTable::row(std::size_t row) const {
    const std::size_t zone = row / changes_.size();
    const auto& change = changes_[row % changes_.size()];
    const auto& made = run_.changes[change.change];
    const double treated = treated_m2(zone, change);
    FeatureRow cells{zones_[zone].fid,
                     {zones_[zone].id, made.name},
                     {treated, made.cost_per_m2.value_or(nan_value) * treated}};
    for (std::size_t n = 0; n < names_.size(); ++n) put_layer(zone, change, n, cells.numbers);
    for (const auto& of : change.means)
        for (const auto layer : {of.before, of.after, of.saved})
            cells.numbers.push_back(mean_in_time(zone, layer));
    return cells;
}

void ChangeTable::write_csv(const std::filesystem::path& file) const {
    write_csv_file(file, columns_, rows(), [&](std::size_t r) { return row(r); });
}

std::vector<std::string> ChangeTable::notes() const {
    std::vector<std::string> notes;
    const auto name = std::ranges::find(names_, "net_shortwave");
    if (name == names_.end()) return notes;
    const auto n = static_cast<std::size_t>(name - names_.begin());
    for (const auto& change : changes_) {
        double here = 0, beside = 0;
        std::size_t treated = 0, neighbours = 0;
        for (std::size_t zone = 0; zone < zones_.size(); ++zone) {
            const double saved = total(zone, change.layers[n].saved, Half::all);
            if (treated_m2(zone, change) > 0) {
                ++treated;
                here += std::isnan(saved) ? 0 : saved;
            } else if (saved < 0) {
                ++neighbours;
                beside -= saved;
            }
        }
        const auto* unit = is_energy() ? "GJ" : "W";
        auto text =
            fmt::format("{}: saves {:.4g} {} of net shortwave in {} zones with treated ground",
                        run_.changes[change.change].name, here, unit, treated);
        if (neighbours > 0)
            text += fmt::format("; {} other zones keep {:.4g} {} more, by light reflected to them",
                                neighbours, beside, unit);
        notes.push_back(std::move(text));
    }
    return notes;
}

}  // namespace sunbudget
