#include "zone_sections.hpp"

#include <fmt/format.h>

#include <algorithm>
#include <array>

#include "html.hpp"
#include "layer_words.hpp"
#include "report_tables.hpp"

namespace sunbudget {

namespace {

/// Zones in the table and on the map; the files have them all.
constexpr std::size_t most_zones = 500;

/// How many zones the table has, in which order, of which period.
std::string view_words(const ZoneView& view) {
    auto text =
        "<p>" + escaped(view.rows.size() < view.zones ? fmt::format("The {} foremost of {} zones",
                                                                    view.rows.size(), view.zones)
                                                      : fmt::format("All {} zones", view.zones));
    text += view.ranked_by.empty() ? ", in the file's order."
                                   : ", by their mean of " + escaped(words_for(view.ranked_by)) +
                                         ": rank 1 has the most.";
    text += (view.period.empty() ? "" : " Figures of the period " + escaped(view.period) + ".") +
            std::string(" zones.csv and zones.gpkg hold every figure.</p>\n");
    return text;
}

}  // namespace

ZoneView ZoneSections::savings() const {
    const auto changes = std::ranges::count_if(
        run_.changes, [](const Change& change) { return change.case_name.empty(); });
    if (!run_.zones || changes == 0) return {};
    return change_view(outputs_.staged("changes.csv"), static_cast<std::size_t>(changes),
                       most_zones);
}

std::string ZoneSections::change_zones() const {
    const auto view = savings();
    if (view.rows.empty()) return {};
    return fmt::format(
               "<p>{} zones and changes that make a difference, the greatest saving first; "
               "changes.csv has them all. Sums are "
               "in {}.</p>\n",
               view.rows.size(), run_.unit == OutputUnit::w_m2 ? "W" : "GJ") +
           zone_table(view, "savings", "Savings of changes by zone");
}

/// The zones of the table of savings too, each once: what is chosen there is marked on the map.
ZoneView ZoneSections::with_changed_zones(ZoneView view) const {
    if (run_.changes.empty()) return view;
    for (auto& row : savings().rows)
        if (std::ranges::find(view.rows, row.zone, &ZoneView::Row::zone) == view.rows.end())
            view.rows.push_back(std::move(row));
    return view;
}

std::string ZoneSections::outlines(const ZoneView& view, const MapFrame& frame) const {
    return fmt::format(
               "<svg viewBox=\"0 0 {} {}\" preserveAspectRatio=\"none\" "
               "role=\"group\" aria-label=\"Outlines of the zones\">\n",
               frame.width, frame.height) +
           zone_paths(run_, with_changed_zones(view), frame.width, frame.height) + "</svg>\n";
}

std::string ZoneSections::zones() const {
    if (!run_.zones) return {};
    const auto csv = outputs_.staged("zones.csv");
    const auto ranked = maps_.layer_named(zone_view(csv, {}, 0).ranked_by);
    const auto layer = ranked ? ranked : maps_.layer_named(run_.zones->layers.front());
    if (!layer) return {};
    // The table speaks of one period: the one that the map of its layer shows.
    const auto map = maps_.shown(*layer, maps_.band_to_show(*layer));
    const auto& periods = run_.layers[*layer].file.bands;
    const auto view = zone_view(
        csv, periods.size() > 1 ? periods[map.band].description : std::string(), most_zones);
    const std::array planes{&map.values};
    const auto scale = scale_for(*run_.layers[*layer].layer, false, planes);
    const auto frame = map_frame(run_, map.values.width(), map.values.height());
    auto text = view_words(view) + "<ul class=\"notes\">\n";
    for (const auto& note : execution_.zone_notes) text += "<li>" + escaped(note) + "</li>\n";
    text += "</ul>\n<div class=\"layer stacked\">\n<figure>\n" +
            map_box(frame, "map-zones",
                    map_picture(picture_of(map.values, scale), maps_.alt_text(map)) +
                        outlines(view, frame)) +
            map_furniture(frame) + legend(scale, unit_words(run_, *layer)) +
            maps_.caption(map, &scale, frame) + "</figure>\n<div class=\"beside\">\n" +
            zone_table(view, "zones", "Zones") + "</div>\n</div>\n";
    return section("zones", "Zones", text);
}

}  // namespace sunbudget
