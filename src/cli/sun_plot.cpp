#include "sun_plot.hpp"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <vector>

namespace sunbudget {

namespace {

constexpr int columns = 72;
constexpr int rows = 12;

/// A round number not far above a value: 712 gives 720, 1012 gives 1200.
double full_scale(double largest) {
    const double step = std::pow(10, std::floor(std::log10(std::max(largest, 1.0)))) / 5;
    return std::max(1.0, std::ceil(largest / step)) * step;
}

char mark(const SunMoment& moment, double low, double high, bool slope) {
    const double middle = (low + high) / 2;
    const bool bright = moment.on_slope_w_m2 > 0;
    if (slope && bright && moment.on_slope_w_m2 > low && moment.on_slope_w_m2 <= high) return 'o';
    if (moment.diffuse_w_m2 >= middle) return '.';
    return moment.global_w_m2 >= middle ? '#' : ' ';
}

/// Every third hour of the zone's clock under the column in which it begins.
std::string hour_line(const std::vector<SunMoment>& moments, const Zone& zone,
                      double longitude_rad) {
    std::string line(columns + 2, ' ');
    int last = -1;
    for (int c = 0; c < columns; ++c) {
        const double hour =
            zone.local(moments[static_cast<std::size_t>(c)].utc, longitude_rad).seconds_of_day /
            3600;
        const int third = static_cast<int>(hour / 3) * 3;
        if (third != last)
            line.replace(static_cast<std::size_t>(c), 2, fmt::format("{:<2}", third));
        last = third;
    }
    line.erase(line.find_last_not_of(' ') + 1);
    return line;
}

}  // namespace

std::string day_plot(const SunPlace& place, const Zone& zone, CivilDate date) {
    const auto begin = zone.day_start(date, place.longitude_rad);
    const double step_s = (zone.day_start(next_day(date), place.longitude_rad) - begin) / columns;
    std::vector<SunMoment> moments;
    double largest = 0;
    for (int c = 0; c < columns; ++c) {
        moments.push_back(sun_moment(place, zone, begin + (c + 0.5) * step_s));
        largest = std::max({largest, moments.back().global_w_m2, moments.back().on_slope_w_m2});
    }
    const double top = full_scale(largest);
    const bool slope = place.slope_rad > 0;
    std::string text = fmt::format("{}, clear sky, W/m2\n", format_date(date));
    for (int r = rows - 1; r >= 0; --r) {
        const double low = top * r / rows, high = top * (r + 1) / rows;
        std::string line;
        for (const auto& moment : moments) line += mark(moment, low, high, slope);
        line.erase(line.find_last_not_of(' ') + 1);
        const auto label = r == rows - 1       ? fmt::format("{:g}", top)
                           : r == rows / 2 - 1 ? fmt::format("{:g}", top / 2)
                                               : "";
        text += fmt::format("{:>6} |{}\n", label, line);
    }
    text += fmt::format("{:>6} +{}\n", 0, std::string(columns, '-'));
    text += std::string(8, ' ') + hour_line(moments, zone, place.longitude_rad) + " h, " +
            zone.name() + "\n";
    return text + "        . sky light   # direct light on top of it, level ground" +
           (slope ? "   o all light on the slope\n" : "\n");
}

}  // namespace sunbudget
