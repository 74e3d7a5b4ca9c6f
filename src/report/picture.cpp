#include "picture.hpp"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <map>

#include "html.hpp"
#include "sunbudget/base/text.hpp"

namespace sunbudget {

namespace {

std::string_view map_for(const Layer& layer, bool difference) {
    if (difference) return "puor";
    if (layer.id == LayerId::aspect) return "twilight";
    if (layer.quantity == Quantity::ratio) return "cividis";
    return layer.quantity == Quantity::radiation ? "inferno" : "viridis";
}

/// The value below which a share of them lies.
double quantile(std::vector<float>& values, double share) {
    const auto at =
        values.begin() + static_cast<long>(share * static_cast<double>(values.size() - 1));
    std::ranges::nth_element(values, at);
    return static_cast<double>(*at);
}

std::string data_uri(const Plane<std::uint8_t>& pixels, std::span<const Colour> palette) {
    return "data:image/png;base64," + base64(png_of(pixels, palette));
}

}  // namespace

const ColourMap& ColourMap::named(std::string_view name) {
    static const auto maps = [] {
        std::map<std::string, ColourMap, std::less<>> all;
        for (const auto& line : split(report_file("colour_maps.csv"), '\n')) {
            const auto cells = split(line, ',');
            if (line.starts_with('#') || cells.size() != 5 || cells[0] == "map") continue;
            const auto part = [&](std::size_t i) {
                return static_cast<std::uint8_t>(*parse_number(cells[i]));
            };
            all[cells[0]].stops_.push_back({*parse_number(cells[1]), {part(2), part(3), part(4)}});
        }
        return all;
    }();
    return maps.find(name)->second;
}

Colour ColourMap::at(double share) const {
    const double within = std::clamp(share, 0.0, 1.0);
    const auto next =
        std::ranges::find_if(stops_, [&](const Stop& stop) { return stop.at >= within; });
    if (next == stops_.begin()) return next->colour;
    const auto& [from, before] = *std::prev(next);
    const double part = (within - from) / (next->at - from);
    const auto mix = [&](std::uint8_t a, std::uint8_t b) {
        return static_cast<std::uint8_t>(std::lround(a + part * (b - a)));
    };
    return {mix(before.red, next->colour.red), mix(before.green, next->colour.green),
            mix(before.blue, next->colour.blue)};
}

std::string ColourMap::gradient() const {
    std::string text = "linear-gradient(to right";
    for (const auto& stop : stops_)
        text += fmt::format(",{} {:.5g}%", css(stop.colour), stop.at * 100);
    return text + ")";
}

std::string css(const Colour& colour) {
    return fmt::format("#{:02x}{:02x}{:02x}", colour.red, colour.green, colour.blue);
}

double readable_step(double least) {
    const double tens = std::pow(10, std::floor(std::log10(least)));
    for (const double times : {1.0, 2.0, 5.0})
        if (times * tens >= least * (1 - 1e-9)) return times * tens;
    return 10 * tens;
}

ColourScale scale_for(const Layer& layer, bool difference,
                      std::span<const Plane<float>* const> planes) {
    if (layer.id == LayerId::aspect && !difference) return {0, 360, 90, "twilight", false};
    std::vector<float> values;
    for (const auto* plane : planes)
        for (int r = 0; r < plane->height(); ++r)
            std::ranges::copy_if(plane->row(r), std::back_inserter(values),
                                 [](float v) { return !std::isnan(v); });
    ColourScale scale;
    scale.map = map_for(layer, difference);
    if (values.empty()) return scale;
    constexpr double tail = 0.02;
    double low = quantile(values, tail), high = quantile(values, 1 - tail);
    if (difference) {
        high = std::max(std::abs(low), std::abs(high));
        low = -high;
    }
    const double least = std::max(1e-9, std::max(std::abs(low), std::abs(high)) * 1e-3);
    if (high - low < least) {
        low -= least;
        high += least;
    }
    constexpr double marks = 7;
    scale.step = readable_step((high - low) / marks);
    scale.low = std::floor(low / scale.step + 1e-9) * scale.step;
    scale.high = std::ceil(high / scale.step - 1e-9) * scale.step;
    const auto [least_value, greatest] = std::ranges::minmax(values);
    scale.cut =
        static_cast<double>(least_value) < scale.low || static_cast<double>(greatest) > scale.high;
    return scale;
}

std::string picture_of(const Plane<float>& values, const ColourScale& scale) {
    constexpr int colours = 255;
    std::vector<Colour> palette{{}};
    for (int i = 0; i < colours; ++i)
        palette.push_back(ColourMap::named(scale.map).at(i / double{colours - 1}));
    Plane<std::uint8_t> pixels(values.width(), values.height());
    for (int r = 0; r < values.height(); ++r)
        std::ranges::transform(values.row(r), pixels.row(r).begin(), [&](float value) {
            if (std::isnan(value)) return std::uint8_t{0};
            const double share =
                (static_cast<double>(value) - scale.low) / (scale.high - scale.low);
            return static_cast<std::uint8_t>(
                1 + std::lround(std::clamp(share, 0.0, 1.0) * (colours - 1)));
        });
    return data_uri(pixels, palette);
}

std::string picture_of_kinds(const Plane<float>& values, std::span<const Colour> palette) {
    std::vector<Colour> colours{{}};
    colours.insert(colours.end(), palette.begin(), palette.end());
    Plane<std::uint8_t> pixels(values.width(), values.height());
    for (int r = 0; r < values.height(); ++r)
        std::ranges::transform(values.row(r), pixels.row(r).begin(), [](float value) {
            return static_cast<std::uint8_t>(std::isnan(value) ? 0 : static_cast<int>(value) + 1);
        });
    return data_uri(pixels, colours);
}

}  // namespace sunbudget
