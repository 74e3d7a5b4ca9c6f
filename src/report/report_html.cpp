#include "sunbudget/report/report_html.hpp"

#include <fmt/format.h>

#include <algorithm>
#include <array>
#include <cmath>

#include "charts.hpp"
#include "html.hpp"
#include "map_figure.hpp"
#include "report_tables.hpp"
#include "sunbudget/base/digest.hpp"
#include "sunbudget/base/text.hpp"
#include "sunbudget/base/version.hpp"
#include "sunbudget/raster/grid_build.hpp"
#include "sunbudget/raster/preview.hpp"
#include "sunbudget/report/run_json.hpp"
#include "sunbudget/tables/quality.hpp"

namespace sunbudget {

namespace {

/// Longest side of a picture: enough for a desk's screen, and a quarter of a megabyte.
constexpr int picture_px = 800;
/// Zones in the table and on the map; the files have them all.
constexpr std::size_t most_zones = 500;

bool is_change(const std::string& name) {
    return name.find("__") != name.npos;
}
bool is_difference(const std::string& name) {
    return name.find("__saved") != name.npos;
}

/// One layer's band as the report shows it.
struct Shown {
    std::size_t layer = 0, band = 0;
    Plane<float> values;
};

class Report {
  public:
    Report(const Run& run, const Execution& execution, const OutputSet& outputs)
        : run_(run), execution_(execution), outputs_(outputs) {}
    [[nodiscard]] std::string whole();

  private:
    void add(const std::string& id, const std::string& title, const std::string& text);
    [[nodiscard]] bool chosen(std::size_t layer) const;
    [[nodiscard]] std::size_t band_to_show(std::size_t layer) const;
    [[nodiscard]] Shown shown(std::size_t layer, std::size_t band) const;
    [[nodiscard]] std::optional<std::size_t> layer_named(const std::string& name) const;
    [[nodiscard]] std::string unit_words(std::size_t layer) const;
    [[nodiscard]] std::string when(std::size_t layer, std::size_t band) const;
    [[nodiscard]] std::string scene(std::size_t layer) const;
    [[nodiscard]] std::string caption(const Shown& map, const ColourScale* scale,
                                      const MapFrame& frame) const;
    [[nodiscard]] std::string alt_text(const Shown& map) const;
    [[nodiscard]] std::string layer_article(std::size_t layer) const;
    [[nodiscard]] std::string kinds_article(std::size_t layer) const;
    [[nodiscard]] std::string article(std::size_t layer, const std::string& figure,
                                      const std::string& beside) const;
    [[nodiscard]] std::string curve(std::size_t layer) const;
    [[nodiscard]] std::string slider_article(std::size_t before, std::size_t after) const;
    [[nodiscard]] std::string maps() const;
    [[nodiscard]] std::string changes() const;
    [[nodiscard]] std::string change_zones() const;
    [[nodiscard]] ZoneView savings() const;
    [[nodiscard]] ZoneView with_changed_zones(ZoneView view) const;
    [[nodiscard]] std::string zones() const;
    [[nodiscard]] std::string facts() const;
    [[nodiscard]] std::string footer() const;

    const Run& run_;
    const Execution& execution_;
    const OutputSet& outputs_;
    std::string navigation_, sections_;
};

void Report::add(const std::string& id, const std::string& title, const std::string& text) {
    if (text.empty()) return;
    navigation_ += "<li><a href=\"#" + id + "\">" + title + "</a></li>\n";
    sections_ += text;
}

bool Report::chosen(std::size_t layer) const {
    const auto& wanted = run_.report->layers;
    return wanted.empty() ||
           std::ranges::find(wanted, run_.layers[layer].layer->id) != wanted.end();
}

/// The period with the greatest mean, of the layer itself where this is a change of it.
std::size_t Report::band_to_show(std::size_t layer) const {
    const auto& name = run_.layers[layer].file.name;
    const auto base = layer_named(name.substr(0, name.find("__")));
    const auto& bands = execution_.layers[base.value_or(layer)].bands;
    if (bands.empty()) return 0;
    const auto best = std::ranges::max_element(
        bands, {}, [](const BandStatistics& b) { return b.count > 0 ? b.mean : -1e300; });
    return static_cast<std::size_t>(best - bands.begin());
}

Shown Report::shown(std::size_t layer, std::size_t band) const {
    return {layer, band,
            preview(outputs_.staged(execution_.layers[layer].file_name), static_cast<int>(band) + 1,
                    picture_px)};
}

std::optional<std::size_t> Report::layer_named(const std::string& name) const {
    const auto found = std::ranges::find(
        run_.layers, name,
        [](const OutputLayer& layer) -> const std::string& { return layer.file.name; });
    return found == run_.layers.end()
               ? std::nullopt
               : std::optional(static_cast<std::size_t>(found - run_.layers.begin()));
}

std::string Report::unit_words(std::size_t layer) const {
    const auto& file = run_.layers[layer].file;
    if (file.unit == "1") return "share, 0 to 1";
    auto text = file.unit;
    const auto method = file.bands.front().metadata.find("cell_methods");
    if (method != file.bands.front().metadata.end())
        text += method->second == "time: mean" ? ", mean over the period, night included"
                                               : ", sum over the period";
    if (const auto area = file.metadata.find("per_area"); area != file.metadata.end())
        text += ", per " + area->second;
    return text;
}

std::string Report::when(std::size_t layer, std::size_t band) const {
    if (!run_.layers[layer].layer->needs_sun || !run_.times) return "Not of a certain date.";
    if (run_.times->instant) return "At " + format_utc(*run_.times->instant) + ".";
    const auto& period = run_.times->periods[std::min(band, run_.times->periods.size() - 1)];
    auto text = "Period " + period.name + ": " + format_date(period.days.front().date);
    if (period.days.size() > 1) text += " to " + format_date(period.days.back().date);
    if (period.days.front().weight != 1) text += ", one day standing for each month";
    return text + ", days by " + run_.times->zone.name() + " time.";
}

std::string Report::scene(std::size_t layer) const {
    const auto* image = std::get_if<ReflectanceSurface>(&run_.surface);
    if (image == nullptr || !(run_.layers[layer].layer->needs_albedo ||
                              run_.layers[layer].layer->id == LayerId::quality))
        return {};
    std::string text =
        " Albedo from the image " +
        (image->facts.scene.empty() ? "of sensor " + image->facts.sensor : image->facts.scene);
    if (image->facts.acquired_utc)
        return text + ", taken " + format_utc(*image->facts.acquired_utc) + ".";
    return text + (image->facts.date ? ", taken " + format_date(*image->facts.date) + "."
                                     : ", date unknown.");
}

std::string Report::caption(const Shown& map, const ColourScale* scale,
                            const MapFrame& frame) const {
    auto text = when(map.layer, map.band) + scene(map.layer);
    const auto bands = execution_.layers[map.layer].bands.size();
    if (bands > 1)
        text += fmt::format(" Of {} periods the one with the greatest mean; the file has them all.",
                            bands);
    if (frame.dot_m > 0) text += fmt::format(" One dot is {:.2g} m wide.", frame.dot_m);
    if (scale != nullptr && scale->cut)
        text +=
            " Values beyond the scale (2 % of the dots at either end at most) have the end's "
            "colour.";
    return "<figcaption>" + escaped(text) + " Hatched: without value.</figcaption>\n";
}

std::string Report::alt_text(const Shown& map) const {
    const auto& file = run_.layers[map.layer].file;
    auto text = "Map of " + words_for(file.name) + ". " + when(map.layer, map.band);
    if (const auto& bands = execution_.layers[map.layer].bands;
        map.band < bands.size() && bands[map.band].count > 0)
        text += fmt::format(" From {} to {}, mean {} {}.", for_people(bands[map.band].min),
                            for_people(bands[map.band].max), for_people(bands[map.band].mean),
                            file.unit == "1" ? "" : file.unit);
    return text;
}

std::string Report::article(std::size_t layer, const std::string& figure,
                            const std::string& beside) const {
    const auto& file = run_.layers[layer].file;
    return "<article class=\"layer\">\n<div class=\"words\"><h3>" + escaped(words_for(file.name)) +
           "</h3><p>" +
           (is_difference(file.name) ? "What the change saves, before less after; below 0 the "
                                       "ground keeps more than before"
                                     : escaped(run_.layers[layer].layer->text)) +
           ". File: " + escaped(file.name) + ".tif</p></div>\n<figure>\n" + figure +
           "</figure>\n<div class=\"beside\">\n" + beside + "</div>\n</article>\n";
}

std::string Report::curve(std::size_t layer) const {
    const auto& bands = execution_.layers[layer].bands;
    if (bands.size() < 2) return {};
    std::vector<CurvePoint> points;
    for (std::size_t i = 0; i < bands.size(); ++i)
        points.push_back({run_.layers[layer].file.bands[i].description,
                          bands[i].count > 0 ? bands[i].mean : std::nan("")});
    return "<div><h4>Mean over the map, by period</h4>\n" +
           curve_svg(points, run_.layers[layer].file.unit) + "</div>\n";
}

std::string Report::layer_article(std::size_t layer) const {
    const auto map = shown(layer, band_to_show(layer));
    const auto& file = run_.layers[layer].file;
    const std::array planes{&map.values};
    const auto scale = scale_for(*run_.layers[layer].layer, is_difference(file.name), planes);
    const auto frame = map_frame(run_, map.values.width(), map.values.height());
    const auto figure = map_box(frame, "map-" + std::to_string(layer),
                                map_picture(picture_of(map.values, scale), alt_text(map))) +
                        map_furniture(frame) + legend(scale, unit_words(layer)) +
                        caption(map, &scale, frame);
    return article(layer, figure,
                   "<div><h4>How often each value occurs on this map</h4>\n" +
                       histogram_svg(map.values, scale, file.unit) + "</div>\n" + curve(layer));
}

/// The quality layer: where the albedo came from.
std::string Report::kinds_article(std::size_t layer) const {
    auto map = shown(layer, 0);
    std::array<bool, 8> met{};
    for (int r = 0; r < map.values.height(); ++r)
        for (auto& value : map.values.row(r)) {
            if (std::isnan(value)) continue;
            value = static_cast<float>(static_cast<int>(value) & quality::source_mask);
            met[static_cast<std::size_t>(value)] = true;
        }
    if (std::ranges::count(met, true) == 1) {
        const auto only = static_cast<std::uint16_t>(std::ranges::find(met, true) - met.begin());
        for (const auto& row : quality_rows())
            if (row.mask == quality::source_mask && row.value == only)
                return article(
                    layer, "<p>The same for the whole map: " + escaped(row.text) + ".</p>\n",
                    "<p>Counts of what was seen on the way stand under Data quality.</p>\n");
    }
    std::vector<Colour> palette;
    for (std::size_t i = 0; i < met.size(); ++i)
        palette.push_back(i == 0 ? Colour{200, 200, 200}
                                 : ColourMap::named("viridis").at(static_cast<double>(i) / 6));
    std::string kinds = "<ul class=\"kinds\">\n";
    for (const auto& row : quality_rows())
        if (row.mask == quality::source_mask && met[row.value])
            kinds += "<li><span class=\"dot\" style=\"background:" + css(palette[row.value]) +
                     "\"></span>" + escaped(row.text) + "</li>\n";
    const auto frame = map_frame(run_, map.values.width(), map.values.height());
    const auto figure = map_box(frame, "map-" + std::to_string(layer),
                                map_picture(picture_of_kinds(map.values, palette),
                                            "Map of where each pixel's albedo came from")) +
                        map_furniture(frame) + kinds + "</ul>\n" + caption(map, nullptr, frame);
    return article(layer, figure,
                   "<p>Counts of what was seen on the way stand under Data quality.</p>\n");
}

std::string Report::slider_article(std::size_t before, std::size_t after) const {
    const auto band = band_to_show(before);
    const auto one = shown(before, band), other = shown(after, band);
    const std::array planes{&one.values, &other.values};
    const auto scale = scale_for(*run_.layers[before].layer, false, planes);
    const auto frame = map_frame(run_, one.values.width(), one.values.height());
    const auto id = "map-" + std::to_string(after);
    const auto inside = map_picture(picture_of(one.values, scale), alt_text(one), "before") +
                        map_picture(picture_of(other.values, scale), alt_text(other), "after") +
                        "<div class=\"edge\"></div><span class=\"side left\">as it is</span><span "
                        "class=\"side right\">with the change</span>\n";
    const auto slider = "<div class=\"slider\"><label for=\"slider-" + id +
                        "\">As it is, from the left</label><input id=\"slider-" + id +
                        "\" type=\"range\" min=\"0\" max=\"100\" value=\"50\" data-map=\"" + id +
                        "\"><output for=\"slider-" + id + "\">50 %</output></div>\n";
    const auto figure = map_box(frame, id, inside) + slider + map_furniture(frame) +
                        legend(scale, unit_words(before)) + caption(one, &scale, frame);
    return article(after, figure,
                   "<div><h4>How often each value occurs with the change</h4>\n" +
                       histogram_svg(other.values, scale, run_.layers[after].file.unit) +
                       "</div>\n");
}

std::string Report::maps() const {
    std::string text;
    for (std::size_t n = 0; n < run_.layers.size(); ++n) {
        if (!chosen(n) || is_change(run_.layers[n].file.name)) continue;
        text += run_.layers[n].file.sample == Sample::uint16 ? kinds_article(n) : layer_article(n);
    }
    return section("maps", "Maps", text);
}

std::string Report::changes() const {
    std::string text;
    for (std::size_t n = 0; n < run_.layers.size(); ++n) {
        const auto& name = run_.layers[n].file.name;
        if (!chosen(n) || !is_change(name)) continue;
        // How much more or less the low and high albedo save stands in the tables.
        const auto& changed = run_.layers[n].changed;
        if (changed && !run_.changes[changed->change].case_name.empty()) continue;
        const auto base = layer_named(name.substr(0, name.find("__")));
        text += is_difference(name) || !base ? layer_article(n) : slider_article(*base, n);
    }
    if (text.empty()) return {};
    return section("changes", "Changes",
                   "<p>What would be different, beside what is. Negative savings, at neighbours "
                   "that get more light, are shown "
                   "too.</p>\n" +
                       change_zones() + text);
}

ZoneView Report::savings() const {
    const auto changes = std::ranges::count_if(
        run_.changes, [](const Change& change) { return change.case_name.empty(); });
    if (!run_.zones || changes == 0) return {};
    return change_view(outputs_.staged("changes.csv"), static_cast<std::size_t>(changes),
                       most_zones);
}

/// Savings by zone and change, before and after, by cost, in summer and winter.
std::string Report::change_zones() const {
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
ZoneView Report::with_changed_zones(ZoneView view) const {
    if (run_.changes.empty()) return view;
    for (auto& row : savings().rows)
        if (std::ranges::find(view.rows, row.zone, &ZoneView::Row::zone) == view.rows.end())
            view.rows.push_back(std::move(row));
    return view;
}

std::string Report::zones() const {
    if (!run_.zones) return {};
    const auto csv = outputs_.staged("zones.csv");
    const auto ranked = layer_named(zone_view(csv, {}, 0).ranked_by);
    const auto layer = ranked ? ranked : layer_named(run_.zones->layers.front());
    if (!layer) return {};
    // The table speaks of one period: the one that the map of its layer shows.
    const auto map = shown(*layer, band_to_show(*layer));
    const auto& periods = run_.layers[*layer].file.bands;
    const auto view = zone_view(
        csv, periods.size() > 1 ? periods[map.band].description : std::string(), most_zones);
    const std::array planes{&map.values};
    const auto scale = scale_for(*run_.layers[*layer].layer, false, planes);
    const auto frame = map_frame(run_, map.values.width(), map.values.height());
    const auto outlines = fmt::format(
                              "<svg viewBox=\"0 0 {} {}\" preserveAspectRatio=\"none\" "
                              "role=\"group\" aria-label=\"Outlines of the zones\">\n",
                              frame.width, frame.height) +
                          zone_paths(run_, with_changed_zones(view), frame.width, frame.height) +
                          "</svg>\n";
    auto text =
        "<p>" + escaped(view.rows.size() < view.zones ? fmt::format("The {} foremost of {} zones",
                                                                    view.rows.size(), view.zones)
                                                      : fmt::format("All {} zones", view.zones));
    text += view.ranked_by.empty() ? ", in the file's order."
                                   : ", by their mean of " + escaped(words_for(view.ranked_by)) +
                                         ": rank 1 has the most.";
    text += (view.period.empty() ? "" : " Figures of the period " + escaped(view.period) + ".") +
            std::string(" zones.csv and zones.gpkg hold every figure.</p>\n");
    text += "<ul class=\"notes\">\n";
    for (const auto& note : execution_.zone_notes) text += "<li>" + escaped(note) + "</li>\n";
    text += "</ul>\n<div class=\"layer stacked\">\n<figure>\n" +
            map_box(frame, "map-zones",
                    map_picture(picture_of(map.values, scale), alt_text(map)) + outlines) +
            map_furniture(frame) + legend(scale, unit_words(*layer)) + caption(map, &scale, frame) +
            "</figure>\n<div class=\"beside\">\n" + zone_table(view, "zones", "Zones") +
            "</div>\n</div>\n";
    return section("zones", "Zones", text);
}

std::string Report::facts() const {
    std::string text;
    const auto fact = [&](const char* name, const std::string& value) {
        text += std::string("<dt>") + name + "</dt><dd>" + escaped(value) + "</dd>\n";
    };
    fact("Grid", describe(run_.grid));
    if (run_.times && run_.times->instant) fact("Time", format_utc(*run_.times->instant));
    if (run_.times && !run_.times->instant)
        fact("Time", fmt::format("{} to {}{}, {}, steps of {:g} min",
                                 format_date(run_.times->periods.front().days.front().date),
                                 format_date(run_.times->periods.back().days.back().date),
                                 run_.times->periods.front().days.front().weight != 1
                                     ? " (one day standing for each month)"
                                     : "",
                                 run_.times->periods.size() == 1
                                     ? "one period"
                                     : fmt::format("{} periods", run_.times->periods.size()),
                                 run_.times->step_s / 60));
    if (const auto* image = std::get_if<ReflectanceSurface>(&run_.surface);
        image != nullptr && !image->facts.scene.empty())
        fact("Image", image->facts.scene);
    fact("Plan", run_.plan_file.empty() ? "made from flags" : run_.plan_file);
    return text;
}

std::string Report::footer() const {
    return "<p>Made by sunbudget " + escaped(program_version()) + " from the plan with digest " +
           escaped(run_.plan_digest) + "; run " + run_digest(run_) +
           ". Colours: inferno, viridis (van der Walt &amp; Smith), cividis (Nu\u00f1ez, Anderton "
           "&amp; Renslow 2018), twilight (Bechtold), PuOr (ColorBrewer, Brewer &amp; "
           "Harrower).</p>\n";
}

std::string Report::whole() {
    add("maps", "Maps", maps());
    add("changes", "Changes", changes());
    add("zones", "Zones", zones());
    add("figures", "Figures", figures_section(run_, execution_));
    add("quality", "Data quality", quality_section(run_, execution_));
    add("methods", "Methods", methods_section(run_));
    add("inputs", "Inputs", inputs_section(run_));
    navigation_ += "<li><a href=\"#cautions\">Before you act on this</a></li>\n";
    // The policy names the script by its digest: no other script runs, whatever a name holds.
    const auto script = std::string(report_file("report.js"));
    const auto hex = sha256_of("\n" + script);
    std::vector<std::byte> digest;
    for (std::size_t i = 0; i < hex.size(); i += 2)
        digest.push_back(static_cast<std::byte>(std::stoi(hex.substr(i, 2), nullptr, 16)));
    return filled(
        report_file("report.html"),
        {{"title", escaped(run_.title.empty() ? "What the ground keeps of the sun" : run_.title)},
         {"version", escaped(program_version())},
         {"script_digest", base64(digest)},
         {"style", std::string(report_file("report.css"))},
         {"facts", facts()},
         {"navigation", navigation_},
         {"sections", sections_},
         {"footer", footer()},
         {"script", script}});
}

}  // namespace

std::string report_html(const Run& run, const Execution& execution, const OutputSet& outputs) {
    return Report(run, execution, outputs).whole();
}

}  // namespace sunbudget
