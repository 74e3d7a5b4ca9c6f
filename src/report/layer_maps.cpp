#include "layer_maps.hpp"

#include <fmt/format.h>

#include <algorithm>
#include <array>
#include <cmath>

#include "charts.hpp"
#include "html.hpp"
#include "layer_words.hpp"
#include "sunbudget/raster/preview.hpp"
#include "sunbudget/tables/quality.hpp"

namespace sunbudget {

namespace {

/// Longest side of a picture: enough for a desk's screen, and a quarter of a megabyte.
constexpr int picture_px = 800;

}  // namespace

bool LayerMaps::chosen(std::size_t layer) const {
    const auto& wanted = run_.report->layers;
    return wanted.empty() ||
           std::ranges::find(wanted, run_.layers[layer].layer->id) != wanted.end();
}

std::optional<std::size_t> LayerMaps::layer_named(const std::string& name) const {
    const auto found = std::ranges::find(
        run_.layers, name,
        [](const OutputLayer& layer) -> const std::string& { return layer.file.name; });
    return found == run_.layers.end()
               ? std::nullopt
               : std::optional(static_cast<std::size_t>(found - run_.layers.begin()));
}

std::size_t LayerMaps::band_to_show(std::size_t layer) const {
    const auto& name = run_.layers[layer].file.name;
    const auto base = layer_named(name.substr(0, name.find("__")));
    const auto& bands = execution_.layers[base.value_or(layer)].bands;
    if (bands.empty()) return 0;
    const auto best = std::ranges::max_element(
        bands, {}, [](const BandStatistics& b) { return b.count > 0 ? b.mean : -1e300; });
    return static_cast<std::size_t>(best - bands.begin());
}

Shown LayerMaps::shown(std::size_t layer, std::size_t band) const {
    return {layer, band,
            preview(outputs_.staged(execution_.layers[layer].file_name), static_cast<int>(band) + 1,
                    picture_px)};
}

std::string LayerMaps::caption(const Shown& map, const ColourScale* scale,
                               const MapFrame& frame) const {
    auto text = when(run_, map.layer, map.band) + scene(run_, map.layer);
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

std::string LayerMaps::alt_text(const Shown& map) const {
    const auto& file = run_.layers[map.layer].file;
    auto text = "Map of " + words_for(file.name) + ". " + when(run_, map.layer, map.band);
    if (const auto& bands = execution_.layers[map.layer].bands;
        map.band < bands.size() && bands[map.band].count > 0)
        text += fmt::format(" From {} to {}, mean {} {}.", for_people(bands[map.band].min),
                            for_people(bands[map.band].max), for_people(bands[map.band].mean),
                            file.unit == "1" ? "" : file.unit);
    return text;
}

std::string LayerMaps::article(std::size_t layer, const std::string& figure,
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

std::string LayerMaps::curve(std::size_t layer) const {
    const auto& bands = execution_.layers[layer].bands;
    if (bands.size() < 2) return {};
    std::vector<CurvePoint> points;
    for (std::size_t i = 0; i < bands.size(); ++i)
        points.push_back({run_.layers[layer].file.bands[i].description,
                          bands[i].count > 0 ? bands[i].mean : std::nan("")});
    return "<div><h4>Mean over the map, by period</h4>\n" +
           curve_svg(points, run_.layers[layer].file.unit) + "</div>\n";
}

std::string LayerMaps::layer_article(std::size_t layer) const {
    const auto map = shown(layer, band_to_show(layer));
    const auto& file = run_.layers[layer].file;
    const std::array planes{&map.values};
    const auto scale = scale_for(*run_.layers[layer].layer, is_difference(file.name), planes);
    const auto frame = map_frame(run_, map.values.width(), map.values.height());
    const auto figure = map_box(frame, "map-" + std::to_string(layer),
                                map_picture(picture_of(map.values, scale), alt_text(map))) +
                        map_furniture(frame) + legend(scale, unit_words(run_, layer)) +
                        caption(map, &scale, frame);
    return article(layer, figure,
                   "<div><h4>How often each value occurs on this map</h4>\n" +
                       histogram_svg(map.values, scale, file.unit) + "</div>\n" + curve(layer));
}

std::string LayerMaps::kinds_figure(const Shown& map, const std::array<bool, 8>& met) const {
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
    return map_box(frame, "map-" + std::to_string(map.layer),
                   map_picture(picture_of_kinds(map.values, palette),
                               "Map of where each pixel's albedo came from")) +
           map_furniture(frame) + kinds + "</ul>\n" + caption(map, nullptr, frame);
}

std::string LayerMaps::kinds_article(std::size_t layer) const {
    auto map = shown(layer, 0);
    std::array<bool, 8> met{};
    for (int r = 0; r < map.values.height(); ++r)
        for (auto& value : map.values.row(r)) {
            if (std::isnan(value)) continue;
            value = static_cast<float>(static_cast<int>(value) & quality::source_mask);
            met[static_cast<std::size_t>(value)] = true;
        }
    std::string figure;
    if (std::ranges::count(met, true) == 1) {
        const auto only = static_cast<std::uint16_t>(std::ranges::find(met, true) - met.begin());
        for (const auto& row : quality_rows())
            if (row.mask == quality::source_mask && row.value == only)
                figure = "<p>The same for the whole map: " + escaped(row.text) + ".</p>\n";
    }
    return article(layer, figure.empty() ? kinds_figure(map, met) : figure,
                   "<p>Counts of what was seen on the way stand under Data quality.</p>\n");
}

std::string LayerMaps::slider_article(std::size_t before, std::size_t after) const {
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
                        legend(scale, unit_words(run_, before)) + caption(one, &scale, frame);
    return article(after, figure,
                   "<div><h4>How often each value occurs with the change</h4>\n" +
                       histogram_svg(other.values, scale, run_.layers[after].file.unit) +
                       "</div>\n");
}

}  // namespace sunbudget
