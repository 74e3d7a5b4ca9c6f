#include "charts.hpp"

#include <fmt/format.h>

#include <algorithm>
#include <array>
#include <cmath>

#include "html.hpp"

namespace sunbudget {

namespace {

constexpr double width = 360, height = 190;
constexpr double left = 52, right = 18, top = 22, bottom = 34;
constexpr double inner_width = width - left - right, inner_height = height - top - bottom;

std::string svg(const std::string& label, const std::string& content) {
    return fmt::format(
        "<svg class=\"chart\" role=\"img\" aria-label=\"{}\" viewBox=\"0 0 {} {}\">{}</svg>\n",
        label, width, height, content);
}

std::string text_at(double x, double y, const char* anchor, const std::string& text) {
    return fmt::format("<text x=\"{:.1f}\" y=\"{:.1f}\" text-anchor=\"{}\">{}</text>", x, y, anchor,
                       text);
}

std::string line(double x1, double y1, double x2, double y2, const char* kind) {
    return fmt::format(
        "<line class=\"{}\" x1=\"{:.1f}\" y1=\"{:.1f}\" x2=\"{:.1f}\" y2=\"{:.1f}\"/>", kind, x1,
        y1, x2, y2);
}

/// Marks and names along the upright side.
std::string upright_axis(double low, double high, double step, const std::string& title) {
    auto text = text_at(4, 13, "start", title);
    for (double value = low; value <= high + step * 1e-6; value += step) {
        const double y = top + inner_height * (1 - (value - low) / (high - low));
        text +=
            line(left, y, width - right, y, "grid") +
            text_at(left - 5, y + 4, "end", for_people(std::abs(value) < step * 1e-6 ? 0 : value));
    }
    return text;
}

/// "2025-03" for "2025-03 to 2025-05"; of a longer name its first dozen characters, none of them cut in two.
std::string short_name(const std::string& name) {
    auto text = name.substr(0, name.find(" to "));
    std::size_t characters = 0, end = 0;
    for (; end < text.size() && characters <= 12; ++end)
        if ((static_cast<unsigned char>(text[end]) & 0xC0) != 0x80 && ++characters > 12) break;
    return text.substr(0, end);
}

}  // namespace

std::string for_people(double value) {
    if (std::isnan(value)) return "\u2013";
    if (std::abs(value) >= 1000) return fmt::format("{:.0f}", value);
    auto text = fmt::format("{:.4g}", value);
    if (text.front() == '-') text.replace(0, 1, "\u2212");
    return text;
}

std::string histogram_svg(const Plane<float>& values, const ColourScale& scale,
                          const std::string& unit) {
    constexpr std::size_t bars = 40;
    std::array<double, bars> count{};
    double all = 0;
    for (int r = 0; r < values.height(); ++r)
        for (const float value : values.row(r)) {
            if (std::isnan(value)) continue;
            const double share =
                (static_cast<double>(value) - scale.low) / (scale.high - scale.low);
            ++count[static_cast<std::size_t>(std::clamp(share, 0.0, 1.0 - 1e-9) * bars)];
            ++all;
        }
    if (all == 0) return {};
    const double most = *std::ranges::max_element(count) / all * 100;
    const double step = readable_step(most / 3), high = std::ceil(most / step) * step;
    auto content = upright_axis(0, high, step, "% of the pixels");
    for (std::size_t i = 0; i < bars; ++i) {
        const double tall = count[i] / all * 100 / high * inner_height;
        const auto colour =
            css(ColourMap::named(scale.map).at((static_cast<double>(i) + 0.5) / bars));
        content += fmt::format(
            "<rect class=\"bar\" fill=\"{}\" x=\"{:.1f}\" y=\"{:.1f}\" width=\"{:.1f}\" "
            "height=\"{:.1f}\"/>",
            colour, left + static_cast<double>(i) * inner_width / bars, top + inner_height - tall,
            inner_width / bars - 0.6, tall);
    }
    for (double value = scale.low; value <= scale.high + scale.step * 1e-6; value += scale.step) {
        const double x = left + inner_width * (value - scale.low) / (scale.high - scale.low);
        content += text_at(x, height - 18, "middle",
                           for_people(std::abs(value) < scale.step * 1e-6 ? 0 : value));
    }
    content += text_at(left + inner_width / 2, height - 3, "middle",
                       escaped(unit == "1" ? "share of 1" : unit));
    const auto commonest = static_cast<double>(std::ranges::max_element(count) - count.begin());
    const double bar = (scale.high - scale.low) / bars;
    return svg(fmt::format("Histogram: most pixels lie between {} and {} {}",
                           for_people(scale.low + commonest * bar),
                           for_people(scale.low + (commonest + 1) * bar),
                           escaped(unit == "1" ? "" : unit)),
               content);
}

std::string curve_svg(std::span<const CurvePoint> points, const std::string& unit) {
    double low = 1e300, high = -1e300;
    for (const auto& point : points)
        if (!std::isnan(point.mean)) {
            low = std::min(low, point.mean);
            high = std::max(high, point.mean);
        }
    if (low > high) return {};
    // A flux is read against 0 unless the differences would vanish.
    if (low > 0 && low < 0.8 * high) low = 0;
    const double step = readable_step(std::max(high - low, std::abs(high) * 1e-3 + 1e-9) / 4);
    low = std::floor(low / step) * step;
    high = std::max(low + step, std::ceil(high / step) * step);
    auto content =
        upright_axis(low, high, step, "mean, " + escaped(unit == "1" ? "share of 1" : unit));
    std::string way, dots;
    const auto x_of = [&](std::size_t i) {
        return left +
               inner_width * (static_cast<double>(i) + 0.5) / static_cast<double>(points.size());
    };
    // Names are as wide as their letters: as many are shown as have room side by side.
    constexpr double letter = 6.2, between = 8;
    std::size_t longest = 0;
    for (const auto& point : points) longest = std::max(longest, short_name(point.name).size());
    const double names_with_room = inner_width / (letter * static_cast<double>(longest) + between);
    const auto every = static_cast<std::size_t>(std::ceil(
        std::max(1.0, static_cast<double>(points.size()) / std::max(1.0, names_with_room))));
    bool pen_down = false;
    for (std::size_t i = 0; i < points.size(); ++i) {
        if (i % every == 0)
            content += text_at(x_of(i), height - 16, "middle", escaped(short_name(points[i].name)));
        const bool there = !std::isnan(points[i].mean);
        const double y = top + inner_height * (1 - (points[i].mean - low) / (high - low));
        if (there) way += fmt::format("{}{:.1f} {:.1f}", pen_down ? "L" : "M", x_of(i), y);
        if (there && points.size() <= 40)
            dots += fmt::format("<circle cx=\"{:.1f}\" cy=\"{:.1f}\" r=\"3\"/>", x_of(i), y);
        pen_down = there;
    }
    const auto greatest = std::ranges::max_element(
        points, {}, [](const CurvePoint& p) { return std::isnan(p.mean) ? -1e300 : p.mean; });
    return svg(fmt::format("Curve over {} periods: greatest mean {} {} in {}", points.size(),
                           for_people(greatest->mean), escaped(unit == "1" ? "" : unit),
                           escaped(greatest->name)),
               content + "<path class=\"curve\" d=\"" + way + "\"/>" + dots);
}

}  // namespace sunbudget
