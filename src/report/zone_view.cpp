#include "zone_view.hpp"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <fstream>
#include <functional>

#include "html.hpp"
#include "sunbudget/base/error.hpp"
#include "sunbudget/base/text.hpp"
#include "sunbudget/raster/polygons.hpp"

namespace sunbudget {

namespace {

/// Cells of the next row of a CSV, quoted ones over several lines too; nothing at the end.
std::optional<std::vector<std::string>> next_row(std::istream& in) {
    std::vector<std::string> cells(1);
    bool quoted = false, any = false;
    for (int c = in.get(); c != EOF; c = in.get()) {
        any = true;
        if (quoted) {
            if (c != '"')
                cells.back() += static_cast<char>(c);
            else if (in.peek() == '"')
                cells.back() += static_cast<char>(in.get());
            else
                quoted = false;
        } else if (c == '"')
            quoted = true;
        else if (c == ',')
            cells.emplace_back();
        else if (c == '\n')
            return cells;
        else
            cells.back() += static_cast<char>(c);
    }
    return any ? std::optional(cells) : std::nullopt;
}

std::optional<std::size_t> column(const std::vector<std::string>& header, const std::string& name) {
    const auto found = std::ranges::find(header, name);
    return found == header.end() ? std::nullopt
                                 : std::optional(static_cast<std::size_t>(found - header.begin()));
}

/// The layer that zones are ranked by: what a planner asks for first.
std::string ranking_layer(const std::vector<std::string>& header) {
    for (const auto* name : {"net_radiation", "net_shortwave"})
        if (column(header, name + std::string("_rank_mean"))) return name;
    constexpr std::string_view end = "_rank_mean";
    for (const auto& name : header)
        if (name.ends_with(end)) return name.substr(0, name.size() - end.size());
    return {};
}

/// Columns that are shown, of the many there are.
std::vector<std::size_t> chosen_columns(const std::vector<std::string>& header,
                                        const std::string& ranking) {
    std::vector<std::size_t> chosen{0};
    const auto add = [&](std::size_t i) {
        if (std::ranges::find(chosen, i) == chosen.end()) chosen.push_back(i);
    };
    for (const auto* part : {"_rank_mean", "_mean", "_rank_sum", "_sum"})
        if (const auto i = column(header, ranking + part); i && !ranking.empty()) add(*i);
    constexpr std::size_t most_changes = 12, most_layers = 5;
    std::size_t changes = 0, layers = 0;
    for (std::size_t i = 0; i < header.size(); ++i) {
        const auto& name = header[i];
        const bool change = name.find("__") != name.npos,
                   figure = name.ends_with("_mean") || name.ends_with("_sum");
        if (change && (figure || name.find("cost") != name.npos) &&
            name.find("_rank_") == name.npos && changes++ < most_changes)
            add(i);
        if (!change && name.ends_with("_mean") && !name.ends_with("_rank_mean") &&
            layers++ < most_layers)
            add(i);
    }
    for (const auto* name : {"surface_area_m2", "one_class_share", "nodata_share"})
        if (const auto i = column(header, name)) add(*i);
    return chosen;
}

/// Rings nearer together than a dot are drawn with fewer corners.
std::string path_of(const Rings& rings, double across, double down) {
    std::string path;
    for (const auto& ring : rings) {
        double last_x = -1e9, last_y = -1e9;
        std::string part;
        for (const auto& [column, row] : ring) {
            const double x = column * across, y = row * down;
            constexpr double nearest_px = 0.4;
            if (std::hypot(x - last_x, y - last_y) < nearest_px) continue;
            part += fmt::format("{}{:.1f} {:.1f}", part.empty() ? "M" : "L", x, y);
            last_x = x;
            last_y = y;
        }
        if (!part.empty()) path += part + "Z";
    }
    return path;
}

/// What is kept counts before what arrives: light that neighbours gain is no saving of the treated place.
std::vector<std::string>::const_iterator saving_to_rank_by(const std::vector<std::string>& header) {
    for (const auto* layer : {"net_radiation", "net_shortwave"})
        if (const auto found = std::ranges::find(header, std::string(layer) + "_saved_sum");
            found != header.end())
            return found;
    return std::ranges::find_if(
        header, [](const std::string& name) { return name.ends_with("_saved_sum"); });
}

}  // namespace

ZoneView zone_view(const std::filesystem::path& csv, const std::string& period, std::size_t most) {
    std::ifstream in(csv, std::ios::binary);
    const auto header = next_row(in);
    if (!header) throw Error(Cause::input, "cannot read the zones for the report", csv.native());
    ZoneView view;
    view.ranked_by = ranking_layer(*header);
    const auto chosen = chosen_columns(*header, view.ranked_by);
    for (const auto i : chosen) view.columns.push_back((*header)[i]);
    const auto period_column = header->size() > 1 && (*header)[1] == "period"
                                   ? std::optional<std::size_t>(1)
                                   : std::nullopt;
    if (period_column) view.period = period;  // empty: the first there is
    const auto rank_column = column(*header, view.ranked_by + "_rank_mean");
    std::vector<std::pair<double, ZoneView::Row>> kept;
    const auto forget_the_rest = [&] {
        std::ranges::stable_sort(kept, {}, &std::pair<double, ZoneView::Row>::first);
        if (kept.size() > most) kept.resize(most);
    };
    while (const auto cells = next_row(in)) {
        if (cells->size() != header->size()) continue;
        if (period_column && view.period.empty()) view.period = (*cells)[*period_column];
        if (period_column && (*cells)[*period_column] != view.period) continue;
        const auto rank =
            rank_column ? parse_number((*cells)[*rank_column]) : std::optional<double>(0);
        ZoneView::Row row{view.zones++, {}};
        if (!rank || (rank_column && *rank < 1)) continue;  // no value: no rank
        for (const auto i : chosen) row.cells.push_back((*cells)[i]);
        kept.emplace_back(*rank, std::move(row));
        if (kept.size() >= 2 * most) forget_the_rest();
    }
    forget_the_rest();
    for (auto& [rank, row] : kept) view.rows.push_back(std::move(row));
    return view;
}

ZoneView change_view(const std::filesystem::path& csv, std::size_t changes, std::size_t most) {
    std::ifstream in(csv, std::ios::binary);
    const auto header = next_row(in);
    if (!header) throw Error(Cause::input, "cannot read the changes for the report", csv.native());
    ZoneView view{*header, {}, 0, {}, {}};
    const auto saved = saving_to_rank_by(*header);
    if (saved == header->end()) return view;
    const auto at = static_cast<std::size_t>(saved - header->begin());
    std::vector<std::pair<double, ZoneView::Row>> kept;
    const auto forget_the_middle = [&] {
        std::ranges::stable_sort(kept, std::greater<>(), &std::pair<double, ZoneView::Row>::first);
        if (kept.size() <= most) return;
        const auto best = static_cast<long>(most - most / 5);
        kept.erase(kept.begin() + best, kept.end() - static_cast<long>(most / 5));
    };
    for (std::size_t row = 0; const auto cells = next_row(in); ++row) {
        if (cells->size() != header->size()) continue;
        view.zones = row / changes + 1;
        const auto value = parse_number((*cells)[at]);
        if (!value || *value == 0) continue;
        kept.push_back({*value, {row / changes, *cells}});
        if (kept.size() >= 2 * most) forget_the_middle();
    }
    forget_the_middle();
    for (auto& [value, row] : kept) view.rows.push_back(std::move(row));
    return view;
}

std::string zone_paths(const Run& run, const ZoneView& view, int width, int height) {
    const auto polygons = read_polygons(run.zones->shapes, run.grid, {run.zones->id, {}});
    const double across = width / static_cast<double>(run.grid.width),
                 down = height / static_cast<double>(run.grid.height);
    std::string text;
    for (const auto& row : view.rows)
        if (row.zone < polygons.all.size())
            text += fmt::format(
                "<path id=\"zone-{}\" class=\"zone\" d=\"{}\"><title>{}</title></path>\n", row.zone,
                path_of(polygons.all[row.zone].rings, across, down), escaped(row.cells.front()));
    return text;
}

}  // namespace sunbudget
