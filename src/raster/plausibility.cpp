#include "sunbudget/raster/plausibility.hpp"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <optional>

namespace sunbudget {
namespace {

constexpr std::size_t fewest_pixels = 100;  // a 1st percentile needs as many

/// The rules' limits. The first two are the project's (science.md, section 7); the others were put
/// between what sound scenes and wrongly read ones show (tests/raster/plausibility_test.cpp): forest
/// under broken cloud, ice sheet, full cloud, lowland with lakes, mountains.
constexpr double haze_blue_below = 0.1;
constexpr double haze_blue_minus_red = 0.02;
constexpr double thick_haze_red_below = 0.3;
constexpr double thick_haze_blue_minus_red = 0.05;
constexpr double land_nir_above = 0.1;  // water is darker; clear water is blue without any haze
constexpr double lost_offset_from = 0.08, lost_offset_to = 0.12;
constexpr double clearly_negative = -0.02, negative_share = 0.05;
constexpr double bright_median = 1.3, bright_p99 = 2.0;  // cloud and sunny snow reach 1.8
constexpr double dark_p99 = 0.05;                        // sound land reaches 0.3 in near infrared
constexpr double odd_bright = 0.3, odd_ratio = 0.8, odd_share = 0.1;

double percentile(std::vector<float> values, double share) {
    const auto last = static_cast<double>(values.size() - 1);
    const auto at = values.begin() + static_cast<std::ptrdiff_t>(std::lround(share * last));
    std::nth_element(values.begin(), at, values.end());
    return static_cast<double>(*at);
}

template <typename Holds>
double share_of(const std::vector<float>& values, Holds holds) {
    return static_cast<double>(std::count_if(values.begin(), values.end(), holds)) /
           static_cast<double>(values.size());
}

const std::vector<float>* band(const ReflectanceSample& sample, std::string_view role) {
    for (const auto& one : sample.bands)
        if (one.role == role) return &one.reflectance;
    return nullptr;
}

/// The band on land only, as near infrared tells it; the whole band where there is none, or no land.
std::vector<float> on_land(const std::vector<float>& values, const std::vector<float>* nir) {
    if (nir == nullptr) return values;
    std::vector<float> land;
    for (std::size_t i = 0; i < values.size(); ++i)
        if (static_cast<double>((*nir)[i]) > land_nir_above) land.push_back(values[i]);
    return land.size() < fewest_pixels ? values : land;
}

using Warning = std::optional<std::string>;

Warning haze_warning(const ReflectanceSample& sample) {
    const auto *blue = band(sample, "blue"), *red = band(sample, "red");
    const auto* nir = band(sample, "nir");
    if (blue == nullptr || red == nullptr) return std::nullopt;
    const double dark_blue = percentile(on_land(*blue, nir), 0.01);
    const double dark_red = percentile(on_land(*red, nir), 0.01);
    const double difference = dark_blue - dark_red;
    const bool thin = dark_blue < haze_blue_below && difference > haze_blue_minus_red;
    const bool thick = dark_red < thick_haze_red_below && difference > thick_haze_blue_minus_red;
    if (!thin && !thick) return std::nullopt;
    return fmt::format(
        "the darkest hundredth of the land has {:.3f} in blue and {:.3f} in red: so much bluer, it "
        "looks like haze, that is, values not corrected for the atmosphere",
        dark_blue, dark_red);
}

Warning lost_offset_warning(const std::vector<BandRange>& ranges) {
    const bool all_near = std::all_of(ranges.begin(), ranges.end(), [](const BandRange& range) {
        return range.p1 > lost_offset_from && range.p1 < lost_offset_to;
    });
    if (!all_near || ranges.size() < 3) return std::nullopt;
    return fmt::format(
        "the darkest hundredth is near 0.1 in every band ({} {:.3f}, {} {:.3f}): an offset looks "
        "forgotten (Sentinel-2 from processing baseline 04.00: -0.1)",
        ranges.front().role, ranges.front().p1, ranges.back().role, ranges.back().p1);
}

Warning negative_warning(const ReflectanceSample& sample) {
    for (const auto& one : sample.bands) {
        const double share = share_of(one.reflectance, [](float value) {
            return static_cast<double>(value) < clearly_negative;
        });
        if (share > negative_share)
            return fmt::format(
                "{:.0f} % of {} is below {}: scale or offset look wrong, or the numbers are no "
                "surface reflectance",
                100 * share, one.role, clearly_negative);
    }
    return std::nullopt;
}

Warning bright_warning(const std::vector<BandRange>& ranges) {
    for (const auto& range : ranges)
        if (range.p50 > bright_median || range.p99 > bright_p99)
            return fmt::format(
                "{} has a median of {:.3g} and a 99th percentile of {:.3g}: not even snow is so "
                "bright, the scale looks wrong",
                range.role, range.p50, range.p99);
    return std::nullopt;
}

Warning dark_warning(const std::vector<BandRange>& ranges) {
    double brightest = ranges.front().p99;
    for (const auto& range : ranges) brightest = std::max(brightest, range.p99);
    if (brightest > dark_p99) return std::nullopt;
    return fmt::format(
        "99 % of every band is below {:.3g}: only open water is so dark, the scale looks wrong",
        brightest);
}

Warning odd_colour_warning(const ReflectanceSample& sample) {
    const auto *blue = band(sample, "blue"), *red = band(sample, "red");
    const auto *green = band(sample, "green"), *nir = band(sample, "nir");
    if (blue == nullptr || red == nullptr || nir == nullptr) return std::nullopt;
    std::size_t odd = 0;
    for (std::size_t i = 0; i < red->size(); ++i) {
        const float brightest = green == nullptr ? (*red)[i] : std::max((*red)[i], (*green)[i]);
        const float limit = static_cast<float>(odd_ratio) * brightest;
        if (brightest > static_cast<float>(odd_bright) && (*blue)[i] < limit && (*nir)[i] < limit)
            ++odd;
    }
    const double share = static_cast<double>(odd) / static_cast<double>(red->size());
    if (share <= odd_share) return std::nullopt;
    return fmt::format(
        "{:.0f} % of the pixels are bright in red or green but dim in blue and near infrared, as "
        "no "
        "ground is: some bands look several times too bright (scale), or mixed up",
        100 * share);
}

}  // namespace

std::vector<BandRange> ranges_of(const ReflectanceSample& sample) {
    std::vector<BandRange> ranges;
    if (sample.size() < fewest_pixels) return ranges;
    for (const auto& one : sample.bands) {
        const auto& values = one.reflectance;
        ranges.push_back({one.role, percentile(values, 0.01), percentile(values, 0.5),
                          percentile(values, 0.99),
                          share_of(values, [](float value) { return value < 0; }),
                          share_of(values, [](float value) { return value > 1; })});
    }
    return ranges;
}

std::string text_of(const BandRange& range) {
    return fmt::format("{} {:.3f} to {:.3f} (1st to 99th percentile), median {:.3f}", range.role,
                       range.p1, range.p99, range.p50);
}

std::vector<std::string> plausibility_warnings(const ReflectanceSample& sample) {
    std::vector<std::string> warnings;
    const auto ranges = ranges_of(sample);
    if (ranges.empty()) return warnings;
    for (const auto& warning :
         {bright_warning(ranges), dark_warning(ranges), negative_warning(sample),
          lost_offset_warning(ranges), haze_warning(sample), odd_colour_warning(sample)})
        if (warning) warnings.push_back(*warning);
    return warnings;
}

}  // namespace sunbudget
