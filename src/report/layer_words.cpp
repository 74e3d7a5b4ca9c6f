#include "layer_words.hpp"

#include <algorithm>

namespace sunbudget {

bool is_change(const std::string& name) {
    return name.find("__") != name.npos;
}

bool is_difference(const std::string& name) {
    return name.find("__saved") != name.npos;
}

std::string unit_words(const Run& run, std::size_t layer) {
    const auto& file = run.layers[layer].file;
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

std::string when(const Run& run, std::size_t layer, std::size_t band) {
    if (!run.layers[layer].layer->needs_sun || !run.times) return "Not of a certain date.";
    if (run.times->instant) return "At " + format_utc(*run.times->instant) + ".";
    const auto& period = run.times->periods[std::min(band, run.times->periods.size() - 1)];
    auto text = "Period " + period.name + ": " + format_date(period.days.front().date);
    if (period.days.size() > 1) text += " to " + format_date(period.days.back().date);
    if (period.days.front().weight != 1) text += ", one day standing for each month";
    return text + ", days by " + run.times->zone.name() + " time.";
}

std::string scene(const Run& run, std::size_t layer) {
    const auto* image = std::get_if<ReflectanceSurface>(&run.surface);
    if (image == nullptr ||
        !(run.layers[layer].layer->needs_albedo || run.layers[layer].layer->id == LayerId::quality))
        return {};
    std::string text =
        " Albedo from the image " +
        (image->facts.scene.empty() ? "of sensor " + image->facts.sensor : image->facts.scene);
    if (image->facts.acquired_utc)
        return text + ", taken " + format_utc(*image->facts.acquired_utc) + ".";
    return text + (image->facts.date ? ", taken " + format_date(*image->facts.date) + "."
                                     : ", date unknown.");
}

std::string words_for(const std::string& layer) {
    const auto spaced = [](std::string text) {
        std::ranges::replace(text, '_', ' ');
        return text;
    };
    const auto mark = layer.find("__");
    if (mark == layer.npos) return spaced(layer);
    constexpr std::string_view saved = "__saved";
    auto change = layer.substr(mark + 2);
    const auto base = spaced(layer.substr(0, mark));
    const auto at = change.find(saved);
    if (at == change.npos) return base + " with " + change;
    return base + " saved by " + change.substr(0, at) + spaced(change.substr(at + saved.size()));
}

}  // namespace sunbudget
