#pragma once

#include <cstdint>
#include <span>
#include <string>
#include <vector>

#include "sunbudget/raster/source.hpp"

namespace sunbudget {

/// Reflectance of one band at the sampled pixels, in the order of the other bands' pixels.
struct BandSample {
    std::string role;  ///< blue, green, red, nir, swir1, swir2
    std::vector<float> reflectance;
};

/// Pixels that have a value in every band.
struct ReflectanceSample {
    std::vector<BandSample> bands;
    std::uint64_t pixels_looked_at = 0;  ///< with those that lack a value in some band
    bool whole = false;                  ///< every pixel of the target grid was looked at

    [[nodiscard]] std::size_t size() const noexcept {
        return bands.empty() ? 0 : bands.front().reflectance.size();
    }
};

/// A band to sample: its role and its source, scaled to reflectance.
struct SampledBand {
    std::string role;
    const Source* source = nullptr;
};

/// Reads at most `blocks` windows of 256 x 256 target pixels spread evenly over the target grid (all
/// sources have the same one), and keeps at most a quarter of a million pixels, evenly. The same
/// pixels whatever the number of threads. Throws Error(input) on a read error.
[[nodiscard]] ReflectanceSample sample_reflectance(std::span<const SampledBand> bands, int threads,
                                                   int blocks = 64);

/// Where a band's reflectance lies.
struct BandRange {
    std::string role;
    double p1 = 0;  ///< percentiles
    double p50 = 0;
    double p99 = 0;
    double share_below_zero = 0;
    double share_above_one = 0;
};
/// One a band; none of a sample of fewer than 100 pixels, from which a percentile says nothing.
[[nodiscard]] std::vector<BandRange> ranges_of(const ReflectanceSample& sample);
/// "blue 0.014 to 1.047 (1st to 99th percentile), median 0.274", for people.
[[nodiscard]] std::string text_of(const BandRange& range);

/// What about the values is unlike surface reflectance, in plain words with the figures. Ranges alone
/// prove nothing: sound values may be rare and wrong ones may look sound, so these are warnings.
///
/// haze      darkest land is bluer than red: blue scattered in the air was not taken off
/// offset    every band begins near 0.1, or many values lie clearly below 0: an offset is missing
///           (Sentinel-2 from baseline 04.00), or taken off where there is none
/// scale     half of a band above 1.3, or a hundredth above 2; every band nearly black; or many
///           pixels brighter in red or green than both in blue and in near infrared, which no snow,
///           cloud, soil or plant is
///
/// Bands are known by role; a rule whose bands are missing is left out. Snow, cloud, clear water and
/// deserts pass. No warning from a sample of fewer than 100 pixels.
[[nodiscard]] std::vector<std::string> plausibility_warnings(const ReflectanceSample& sample);

}  // namespace sunbudget
