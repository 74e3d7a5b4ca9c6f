#include "map_figure.hpp"

#include <fmt/format.h>

#include <cmath>
#include <numbers>

#include "charts.hpp"
#include "html.hpp"
#include "sunbudget/base/units.hpp"
#include "sunbudget/physics/direction.hpp"
#include "sunbudget/raster/locator.hpp"

namespace sunbudget {

namespace {

/// The longest readable length that takes at most a third of the map.
std::string scale_bar(double width_m) {
    const double most_m = width_m / 3, tens = std::pow(10, std::floor(std::log10(most_m)));
    const double length_m = 5 * tens <= most_m ? 5 * tens : 2 * tens <= most_m ? 2 * tens : tens;
    const auto text = length_m >= 1000 ? fmt::format("{:g} km", length_m / 1000)
                                       : fmt::format("{:g} m", length_m);
    return fmt::format("<div class=\"scalebar\" style=\"width:{:.2f}%\">{}</div>\n",
                       length_m / width_m * 100, text);
}

std::string north_arrow(double north_deg) {
    return fmt::format(
        "<svg class=\"north\" role=\"img\" aria-label=\"True north is {:.0f} degrees clockwise "
        "from the map's upper side\" "
        "viewBox=\"-20 -20 40 40\"><g transform=\"rotate({:.1f})\"><path d=\"M0 -8 L6 16 L0 11 L-6 "
        "16Z\" fill=\"#1d232b\"/>"
        "<text y=\"-10\" text-anchor=\"middle\" font-size=\"10\" "
        "font-weight=\"700\">N</text></g></svg>\n",
        std::fmod(north_deg + 360, 360), north_deg);
}

}  // namespace

MapFrame map_frame(const Run& run, int width, int height) {
    MapFrame frame{width, height, static_cast<double>(width) / height, 0, 0, 0};
    const auto matrix = Locator(run.grid).matrix(run.grid.width / 2.0, run.grid.height / 2.0);
    if (!matrix) return frame;
    frame.width_m = length_of_m(*matrix, 1, 0) * run.grid.width;
    frame.aspect = frame.width_m / (length_of_m(*matrix, 0, 1) * run.grid.height);
    frame.north_deg =
        -deg_from_rad(std::remainder(azimuth_of_rad(*matrix, 0, -1), 2 * std::numbers::pi));
    if (std::abs(frame.north_deg) < 0.05) frame.north_deg = 0;
    frame.dot_m = frame.width_m / width;
    return frame;
}

std::string map_box(const MapFrame& frame, const std::string& id, const std::string& inside) {
    constexpr int few_px = 200;
    return fmt::format(
        "<div class=\"map{}\" id=\"{}\" "
        "style=\"aspect-ratio:{:.4f};max-width:calc(80vh*{:.4f})\">\n{}</div>\n",
        frame.width < few_px ? " coarse" : "", id, frame.aspect, frame.aspect, inside);
}

std::string map_picture(const std::string& uri, const std::string& alt,
                        const std::string& css_class) {
    return fmt::format("<img{} alt=\"{}\" src=\"{}\">\n",
                       css_class.empty() ? "" : " class=\"" + css_class + "\"", escaped(alt), uri);
}

std::string map_furniture(const MapFrame& frame) {
    if (frame.width_m <= 0) return {};
    return fmt::format("<div class=\"under\" style=\"max-width:calc(80vh*{:.4f})\">\n",
                       frame.aspect) +
           scale_bar(frame.width_m) + north_arrow(frame.north_deg) + "</div>\n";
}

std::string legend(const ColourScale& scale, const std::string& unit) {
    std::string marks;
    for (double value = scale.low; value <= scale.high + scale.step * 1e-6; value += scale.step)
        marks += fmt::format("<span style=\"left:{:.2f}%\">{}</span>",
                             (value - scale.low) / (scale.high - scale.low) * 100,
                             for_people(std::abs(value) < scale.step * 1e-6 ? 0 : value));
    return fmt::format(
        "<div class=\"legend\"><p class=\"unit\">{}</p><div class=\"bar\" "
        "style=\"background:{}\"></div><div class=\"marks\">{}</div></div>\n",
        escaped(unit), ColourMap::named(scale.map).gradient(), marks);
}

}  // namespace sunbudget
