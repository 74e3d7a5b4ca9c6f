// The sun in the metadata of real satellite scenes.
#include <catch2/catch.hpp>
#include <cmath>
#include <fstream>
#include <map>
#include <numbers>

#include "sunbudget/base/text.hpp"
#include "sunbudget/physics/sun_place.hpp"
#include "support/vectors.hpp"

using namespace sunbudget;
using namespace sunbudget::test;

namespace {

/// KEY = VALUE lines of a Landsat metadata file, quotes taken off; the first of each key.
std::map<std::string, std::string> metadata(const std::string& file) {
    std::map<std::string, std::string> values;
    std::ifstream stream(real_data(file).value());
    for (std::string line; std::getline(stream, line);) {
        const auto equals = line.find(" = ");
        if (equals == std::string::npos) continue;
        auto value = line.substr(equals + 3);
        std::erase(value, '"');
        values.emplace(trimmed(line.substr(0, equals)), trimmed(value));
    }
    return values;
}

/// Mean of the directions of the product's four corners.
EarthVector scene_centre(const std::map<std::string, std::string>& mtl) {
    EarthVector sum{0, 0, 0};
    for (const auto* corner : {"UL", "UR", "LL", "LR"}) {
        const auto at = [&](const char* axis) {
            const auto key = std::string("CORNER_") + corner + "_" + axis + "_PRODUCT";
            return rad_from_deg(parse_number(mtl.at(key)).value());
        };
        const auto direction = up_direction(at("LAT"), at("LON"));
        sum = {sum.x + direction.x, sum.y + direction.y, sum.z + direction.z};
    }
    return sum;
}

struct Scene {
    const char* file;
    double angle_deg;
    double distance_au;
};

// 0.02 deg: the centre is only known as the mean of the product's corners, some 2 km. The scene of
// 2013-04-19 was taken off nadir (roll -11.7 deg), so its centre is further off. The Landsat 7
// file's own distance (4.9e-5 au off every ephemeris here) shows that its sun came from a coarser
// formula.
constexpr double known = 0.02, coarse = 0.05;
const Scene scenes[] = {
    {"landsat_c2l2/LC08_L2SP_005009_20150710_20200908_02_T2/"
     "LC08_L2SP_005009_20150710_20200908_02_T2_MTL.txt",
     known, 1e-6},
    {"landsat_c2l2/LC08_L2SP_008059_20191201_20200825_02_T1/"
     "LC08_L2SP_008059_20191201_20200825_02_T1_MTL.txt",
     known, 1e-6},
    {"landsat_c2l2/LC08_L2SP_017036_20130419_20200913_02_T2/"
     "LC08_L2SP_017036_20130419_20200913_02_T2_MTL.txt",
     coarse, 1e-6},
    {"marburg_landsat_l1/LC08_L1TP_195025_20130707_20170503_01_T1_MTL.txt", known, 1e-6},
    {"marburg_landsat_l1/LE07_L1TP_195025_20010730_20170204_01_T1_MTL.txt", coarse, 1e-4}};

}  // namespace

TEST_CASE("horizontal: agrees with the sun of Landsat scenes", "[physics][vector]") {
    SUNBUDGET_NEEDS_DATA();
    const auto& scene = GENERATE(from_range(std::begin(scenes), std::end(scenes)));
    const auto mtl = metadata(scene.file);
    const auto number = [&](const char* key) { return parse_number(mtl.at(key)).value(); };
    const double t = resolve(
        parse_instant(mtl.at("DATE_ACQUIRED") + "T" + mtl.at("SCENE_CENTER_TIME")), Zone(), 0);
    const auto centre = scene_centre(mtl);
    const auto sun = sun_state(t);
    const auto view = horizontal(sun, std::atan2(centre.z, std::hypot(centre.x, centre.y)),
                                 std::atan2(centre.y, centre.x));
    const double elevation_off_deg = deg_from_rad(view.elevation_rad) - number("SUN_ELEVATION");
    // On the sky: a degree of azimuth is less the higher the sun stands.
    const double azimuth_off_deg =
        std::remainder(deg_from_rad(view.azimuth_rad) - number("SUN_AZIMUTH"), 360.0) *
        std::cos(view.elevation_rad);
    CAPTURE(scene.file, elevation_off_deg, azimuth_off_deg);
    CHECK(std::abs(elevation_off_deg) < scene.angle_deg);
    CHECK(std::abs(azimuth_off_deg) < scene.angle_deg);
    CHECK(sun.distance_au ==
          Approx(number("EARTH_SUN_DISTANCE")).margin(scene.distance_au).epsilon(0));
}
