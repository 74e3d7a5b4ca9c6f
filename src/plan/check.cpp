#include "sunbudget/plan/check.hpp"

#include <fmt/format.h>

#include <algorithm>

#include "resolve_parts.hpp"
#include "sunbudget/base/text.hpp"
#include "sunbudget/raster/grid_build.hpp"

namespace sunbudget {

namespace {

std::string heading(const std::string& text) {
    return "\n" + text + "\n";
}

std::string inputs_text(const Run& run) {
    std::string text = heading("Inputs");
    for (const auto& input : run.inputs) {
        text += fmt::format("  {}: {} ({})\n", input.role, input.name, input.digest.substr(0, 23));
        for (const auto& note : input.notes) text += "    " + note + "\n";
        if (!input.notes.empty() && input.role != "weather.table")
            text += fmt::format("    covers {:.1f} % of the grid\n", input.coverage * 100);
    }
    return text;
}

std::string classes_text(const Run& run, bool scanned_everything) {
    if (run.classes.empty()) return {};
    std::string text = heading(
        scanned_everything ? "Classes in the raster (all pixels counted)"
                           : "Classes in the raster (a sample of blocks; --full counts all)");
    std::uint64_t all = 0;
    for (const auto& use : run.classes) all += use.pixels;
    for (const auto& use : run.classes)
        text += fmt::format(
            "  {:>5}  {:<44} {:>6.2f} %  {}\n", use.code, use.name,
            static_cast<double>(use.pixels) / static_cast<double>(std::max<std::uint64_t>(1, all)) *
                100,
            use.albedo ? fmt::format("albedo {:.3f}", *use.albedo) : std::string("no data"));
    return text;
}

std::string image_text(const Run& run) {
    const auto* image = std::get_if<ReflectanceSurface>(&run.surface);
    if (image == nullptr) return {};
    std::string text = heading("Image");
    for (const auto& [key, value] : reflectance_metadata(*image))
        text += fmt::format("  {}: {}\n", key, value);
    if (const auto& facts = image->facts; facts.sun_elevation_deg && facts.sun_azimuth_deg)
        text += fmt::format("  sun: {:.2f} deg high, azimuth {:.2f} deg\n",
                            *facts.sun_elevation_deg, *facts.sun_azimuth_deg);
    return text;
}

std::string time_text(const Run& run) {
    if (!run.times) return {};
    std::string text = heading("Time");
    if (run.times->instant) return text + "  " + format_utc(*run.times->instant) + "\n";
    constexpr std::size_t shown = 14;
    const auto& periods = run.times->periods;
    text += fmt::format("  {} {} in zone {}, step {} s\n", periods.size(),
                        periods.size() == 1 ? "period" : "periods", run.times->zone.name(),
                        run.times->step_s);
    for (std::size_t i = 0; i < std::min(shown, periods.size()); ++i)
        text += fmt::format("  {}: {} to {}, {:.0f} h\n", periods[i].name,
                            format_date(periods[i].days.front().date),
                            format_date(periods[i].days.back().date), periods[i].duration_s / 3600);
    if (periods.size() > shown) text += fmt::format("  and {} more\n", periods.size() - shown);
    return text;
}

std::string layers_text(const Run& run) {
    std::string text = heading("Layers");
    for (const auto& layer : run.layers)
        text += fmt::format("  {}.tif: {} {}, {}{}\n", layer.file.name, layer.file.bands.size(),
                            layer.file.bands.size() == 1 ? "band" : "bands", layer.layer->text,
                            layer.file.quantum > 0
                                ? fmt::format(" [{}], rounded to {}", layer.file.unit,
                                              shortest(static_cast<double>(layer.file.quantum)))
                                : std::string());
    return text;
}

std::string methods_text(const Run& run) {
    std::string text = heading("Methods");
    for (const auto* method : run.methods)
        text += fmt::format("  {} {}: {}\n    {}\n", method->family, method->name, method->text,
                            method->source);
    return text;
}

std::string estimate_text(const Estimate& estimate) {
    return heading(
               fmt::format("Estimate (from {} windows computed as a sample)", estimate.windows)) +
           fmt::format("  time {:.1f} s, memory {}, output {}, scratch {} beside it\n",
                       estimate.seconds, human_bytes(static_cast<double>(estimate.memory_bytes)),
                       human_bytes(static_cast<double>(estimate.output_bytes)),
                       human_bytes(static_cast<double>(estimate.scratch_bytes)));
}

}  // namespace

std::string check_text(const Run& run, const Estimate& estimate, bool scanned_everything) {
    std::string text = run.title.empty() ? std::string() : run.title + "\n";
    text += "Grid\n  " + describe(run.grid) + "\n";
    text += inputs_text(run) + image_text(run) + classes_text(run, scanned_everything) +
            time_text(run) + layers_text(run) + methods_text(run);
    if (!run.assumptions.empty()) {
        text += heading("Assumed");
        for (const auto& line : run.assumptions) text += "  " + line + "\n";
    }
    return text + estimate_text(estimate);
}

}  // namespace sunbudget
