#pragma once

#include <cstdint>
#include <optional>
#include <span>
#include <string>
#include <string_view>
#include <vector>

namespace sunbudget {

/// One spectral band: the program's name, the product's name, and where it lies.
struct Band {
    std::string name;     ///< blue, green, red, nir, swir1, swir2
    std::string product;  ///< SR_B2; empty for a sensor without a product of its own
    double from_um = 0;   ///< 0 where the sensor does not say
    double to_um = 0;
};

/// One test on a quality raster of the product: holds where ((pixel >> first_bit) & (2^bits - 1))
/// equals `value`.
struct QualityTest {
    std::string name;    ///< cloud, cirrus, ...; fill means no data
    std::string raster;  ///< QA_PIXEL
    std::string band;    ///< the one band it is about; empty: the whole pixel
    int first_bit = 0;
    int bits = 1;
    std::uint16_t value = 1;
    std::uint16_t flag = 0;  ///< of the layer `quality`; 0 for fill
    bool rejects =
        true;  ///< unless the plan says otherwise, such a pixel's reflectance is not used
    std::string source;

    [[nodiscard]] bool holds(std::uint16_t pixel) const noexcept {
        return ((pixel >> first_bit) & ((1u << bits) - 1u)) == value;
    }
};

/// How a product stores surface reflectance: reflectance = scale * number + offset.
struct Sensor {
    std::string name;
    std::string text;
    std::vector<Band> bands;
    double scale = 1;
    double offset = 0;
    std::optional<double> fill;  ///< the number that means no data
    std::vector<QualityTest> tests;
    std::string source;

    /// nullptr when there is none of that name.
    [[nodiscard]] const Band* band(std::string_view wanted) const noexcept;
};

[[nodiscard]] std::span<const Sensor> sensors();
[[nodiscard]] std::vector<std::string> sensor_names();
/// Throws Error(usage) with a suggestion for a name that does not exist.
[[nodiscard]] const Sensor& sensor(std::string_view name);

struct BandWeight {
    std::string band;
    double weight = 0;
};

/// Narrow to broadband: albedo = constant + sum of weight times surface reflectance, bands taken as
/// those of a Lambertian surface.
struct WeightSet {
    std::string name;
    std::string sensor;
    std::vector<BandWeight> weights;
    double constant = 0;
    double fit_error = 0;  ///< one standard deviation of albedo, for the sensor at hand
    std::string text;
    std::string source;
};

[[nodiscard]] std::span<const WeightSet> weight_sets();
[[nodiscard]] std::vector<std::string> weight_set_names(std::string_view sensor);
/// Throws Error(usage) with a suggestion when the sensor has no such set.
[[nodiscard]] const WeightSet& weight_set(std::string_view sensor, std::string_view name);

}  // namespace sunbudget
