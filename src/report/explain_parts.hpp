#pragma once

#include <string>
#include <vector>

#include "sunbudget/engine/pixel.hpp"

namespace sunbudget {

// What the account of a pixel says in text and in JSON alike.

/// Days whose sun is followed: a year of months, no more.
inline constexpr std::size_t most_ways = 12;

/// "net_shortwave_w_m2": names that carry their unit.
[[nodiscard]] std::string with_unit(const std::string& name, const std::string& unit);
/// The period, or the instant.
[[nodiscard]] std::string band_name(const Run& run, std::size_t band);
/// What the run makes of the input's class; nullptr where it is no class.
[[nodiscard]] const ClassUse* class_of(const Run& run, const InputPixel& input);

/// Weight and reflectance of each band of an image: their products and the constant add up to the albedo.
struct WeightedBand {
    std::string name;
    double weight;
    double reflectance;
};
[[nodiscard]] std::vector<WeightedBand> weighted_bands(const Run& run, const PixelAccount& account);

}  // namespace sunbudget
