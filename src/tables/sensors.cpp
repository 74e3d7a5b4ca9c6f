#include "sunbudget/tables/sensors.hpp"

#include "sunbudget/base/error.hpp"
#include "sunbudget/base/text.hpp"
#include "sunbudget/tables/quality.hpp"

namespace sunbudget {

namespace {

constexpr auto landsat_guide = "USGS Landsat 8-9 Collection 2 Level-2 science product guide";

QualityTest pixel_bit(std::string name, int bit, std::uint16_t flag, bool rejects) {
    return {.name = std::move(name),
            .raster = "QA_PIXEL",
            .band = {},
            .first_bit = bit,
            .bits = 1,
            .value = 1,
            .flag = flag,
            .rejects = rejects,
            .source = landsat_guide};
}

/// QA_RADSAT counts the sensor's bands from bit 0: band 2 (blue) is bit 1.
QualityTest saturated_bit(std::string band, int number) {
    return {.name = "saturated",
            .raster = "QA_RADSAT",
            .band = std::move(band),
            .first_bit = number - 1,
            .bits = 1,
            .value = 1,
            .flag = quality::saturated,
            .rejects = true,
            .source = landsat_guide};
}

Sensor landsat_oli() {
    Sensor oli{.name = "landsat-oli-c2",
               .text =
                   "Landsat 8 and 9, Operational Land Imager, Collection 2 Level-2 surface "
                   "reflectance",
               .bands = {{"blue", "SR_B2", 0.452, 0.512},
                         {"green", "SR_B3", 0.533, 0.590},
                         {"red", "SR_B4", 0.636, 0.673},
                         {"nir", "SR_B5", 0.851, 0.879},
                         {"swir1", "SR_B6", 1.566, 1.651},
                         {"swir2", "SR_B7", 2.107, 2.294}},
               .scale = 2.75e-5,
               .offset = -0.2,
               .fill = 0.0,
               .tests = {pixel_bit("fill", 0, 0, true),
                         pixel_bit("dilated_cloud", 1, quality::dilated_cloud, true),
                         pixel_bit("cirrus", 2, quality::cirrus, true),
                         pixel_bit("cloud", 3, quality::cloud, true),
                         pixel_bit("cloud_shadow", 4, quality::cloud_shadow, true),
                         pixel_bit("snow", 5, quality::snow, false)},
               .source = landsat_guide};
    int number = 2;
    for (const auto& band : oli.bands) oli.tests.push_back(saturated_bit(band.name, number++));
    oli.tests.push_back({.name = "high_aerosol",
                         .raster = "SR_QA_AEROSOL",
                         .band = {},
                         .first_bit = 6,
                         .bits = 2,
                         .value = 3,
                         .flag = quality::high_aerosol,
                         .rejects = false,
                         .source = landsat_guide});
    return oli;
}

Sensor generic() {
    return {.name = "generic",
            .text = "any surface reflectance: scale, offset, nodata and weights come with it",
            .bands = {{"blue", {}, 0, 0},
                      {"green", {}, 0, 0},
                      {"red", {}, 0, 0},
                      {"nir", {}, 0, 0},
                      {"swir1", {}, 0, 0},
                      {"swir2", {}, 0, 0}},
            .scale = 1.0,
            .offset = 0.0,
            .fill = {},
            .tests = {},
            .source = "given by the user"};
}

const std::vector<Sensor>& sensor_table() {
    static const std::vector<Sensor> rows{landsat_oli(), generic()};
    return rows;
}

const std::vector<WeightSet>& weight_table() {
    static const std::vector<WeightSet> rows{
        {.name = "liang2001",
         .sensor = "landsat-oli-c2",
         .weights =
             {{"blue", 0.356}, {"red", 0.130}, {"nir", 0.373}, {"swir1", 0.085}, {"swir2", 0.072}},
         .constant = -0.0018,
         // 0.02 on the sensors it was made for (Liang et al., Remote Sens. Environ. 84, 2003);
         // half as much again for the narrower bands of OLI is common practice.
         .fit_error = 0.03,
         .text = "made for Landsat TM and ETM+ (error about 0.02); on the matching OLI bands by "
                 "common practice, with a larger error",
         .source = "Liang, Remote Sens. Environ. 76, 2001, 213-238, total shortwave"},
    };
    return rows;
}

}  // namespace

const Band* Sensor::band(std::string_view wanted) const noexcept {
    for (const auto& candidate : bands)
        if (candidate.name == wanted) return &candidate;
    return nullptr;
}

std::span<const Sensor> sensors() {
    return sensor_table();
}

std::vector<std::string> sensor_names() {
    std::vector<std::string> names;
    for (const auto& row : sensor_table()) names.push_back(row.name);
    return names;
}

const Sensor& sensor(std::string_view name) {
    for (const auto& row : sensor_table())
        if (row.name == name) return row;
    throw Error(Cause::usage, "no sensor \"" + std::string(name) + "\"", {},
                suggestion(name, sensor_names()));
}

std::span<const WeightSet> weight_sets() {
    return weight_table();
}

std::vector<std::string> weight_set_names(std::string_view sensor) {
    std::vector<std::string> names;
    for (const auto& row : weight_table())
        if (row.sensor == sensor) names.push_back(row.name);
    return names;
}

const WeightSet& weight_set(std::string_view sensor, std::string_view name) {
    for (const auto& row : weight_table())
        if (row.sensor == sensor && row.name == name) return row;
    const auto names = weight_set_names(sensor);
    throw Error(Cause::usage,
                "no weights \"" + std::string(name) + "\" for the sensor " + std::string(sensor),
                {}, names.empty() ? "give the weights themselves" : suggestion(name, names));
}

}  // namespace sunbudget
