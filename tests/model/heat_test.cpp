#include <array>
#include <catch2/catch.hpp>
#include <cmath>
#include <functional>
#include <sstream>

#include "sunbudget/base/units.hpp"
#include "sunbudget/model/air_record.hpp"
#include "sunbudget/physics/humidity.hpp"
#include "sunbudget/physics/surface_balance.hpp"
#include "sunbudget/tables/quality.hpp"
#include "support/vectors.hpp"
#include "terrain_run.hpp"

using namespace sunbudget;
using namespace sunbudget::test;

namespace {

constexpr int side = 40;
// ESA WorldCover: trees, built-up, bare, water.
constexpr std::array<float, 4> codes{10, 50, 60, 80};

/// A hill of 300 m, and stripes of four kinds of land.
void make_ground(const std::filesystem::path& folder) {
    const auto frame = frame_about("EPSG:32633", 47.0, 15.0, 30, side, side);
    Plane<float> heights(side, side), cover(side, side);
    for (int r = 0; r < side; ++r)
        for (int c = 0; c < side; ++c) {
            heights.at(c, r) =
                500 + 300 * std::exp(-0.01F *
                                     static_cast<float>((c - 20) * (c - 20) + (r - 20) * (r - 20)));
            cover.at(c, r) = codes[static_cast<std::size_t>(c / 10)];
        }
    write_heights(folder / "dem.tif", frame, heights);
    write_heights(folder / "cover.tif", frame, cover, {"Int16", "", -9999});
}

const std::string town =
    "surface: {cover: {raster: cover.tif, classes: worldcover}}\n"
    "terrain: {elevation: dem.tif, directions: 16, reach: 1 km}\n";
const std::string air =
    "weather: {air_temperature: 25 degC, relative_humidity: 0.5, station_elevation: 500 m}\n";

double at(const Plane<float>& plane, int c, int r) {
    return static_cast<double>(plane.at(c, r));
}

double largest(const Plane<float>& plane, const std::function<double(int, int, float)>& off) {
    double worst = 0;
    for (int r = 0; r < plane.height(); ++r)
        for (int c = 0; c < plane.width(); ++c) worst = std::max(worst, off(c, r, plane.at(c, r)));
    return worst;
}

}  // namespace

TEST_CASE("net radiation closes at every pixel to the stored steps, over terrain",
          "[heat][property]") {
    const TemporaryFolder folder;
    make_ground(folder.path());
    const std::string unit = GENERATE("W/m2", "MJ/m2");
    const auto found = computed(
        folder.path(),
        town + air +
            "surface_temperature: {air_plus: 6 K}\n"
            "time: {from: 2025-06-20, to: 2025-06-21, step: 1 h, totals: day}\n"
            "outputs: {unit: " +
            unit +
            ", layers: [net_shortwave, longwave_down, longwave_up, net_longwave, net_radiation]}\n",
        {.rounded = true});
    // Each stored figure is off by half a step at most, and float sums of below 1000 W m-2 by 1e-4 more.
    const double step = static_cast<double>(found.run.layers.front().file.quantum);
    for (std::size_t band = 0; band < 2; ++band) {
        const auto& net_sw = found.layers.at("net_shortwave")[band];
        const auto &down = found.layers.at("longwave_down")[band],
                   &up = found.layers.at("longwave_up")[band];
        const auto &net_lw = found.layers.at("net_longwave")[band],
                   &net = found.layers.at("net_radiation")[band];
        const double worst = largest(net, [&](int c, int r, float rn) {
            return std::abs(static_cast<double>(rn) -
                            (at(net_sw, c, r) + at(down, c, r) - at(up, c, r)));
        });
        CHECK(worst <= 2 * step * 1.01);
        CHECK(largest(net_lw, [&](int c, int r, float lw) {
                  return std::abs(static_cast<double>(lw) - (at(down, c, r) - at(up, c, r)));
              }) <= 1.5 * step * 1.01);
        CHECK(largest(net, [](int, int, float v) { return std::isnan(v) ? 1.0 : 0.0; }) == 0);
    }
}

TEST_CASE("longwave down: the air at each pixel's height, the sky in view and the ground beside it",
          "[heat][property]") {
    const TemporaryFolder folder;
    make_ground(folder.path());
    const auto found =
        computed(folder.path(), town +
                                    "weather: {air_temperature: 25 degC, relative_humidity: 0.5, "
                                    "station_elevation: 500 m, lapse: 9 K/km}\n"
                                    "longwave: {method: prata1996, cloud: 0.4}\n"
                                    "time: {at: 2025-06-21T12:00Z}\n"
                                    "outputs: {layers: [longwave_down, sky_view]}\n");
    const auto heights = read_raster(folder.path() / "dem.tif").values;
    const double e = 0.5 * saturation_vapour_pressure_hpa(298.15);
    const double worst = largest(found["longwave_down"], [&](int c, int r, float value) {
        const auto there = air_at_height({298.15, e}, at(heights, c, r) - 500, 0.009);
        const double clear = clear_longwave_w_m2(LongwaveFormula::prata1996, there.temperature_k,
                                                 there.vapour_pressure_hpa);
        const double sky = cloudy_longwave_w_m2(
            clear, there.temperature_k, cloud_terms(LongwaveCloud::unsworth_monteith1975, 0.4));
        const double view = at(found["sky_view"], c, r);
        return std::abs(view * sky + (1 - view) * black_body_w_m2(there.temperature_k) -
                        static_cast<double>(value));
    });
    CHECK(worst < 0.02);  // twice the field's 1/256 W m-2, and float
}

TEST_CASE("longwave down: rasters of the air give what the same numbers give",
          "[heat][differential]") {
    const TemporaryFolder folder;
    make_ground(folder.path());
    const auto frame = frame_about("EPSG:32633", 47.0, 15.0, 30, side, side);
    Plane<float> celsius(side, side, 18.5F), dew(side, side, 9.25F);
    write_heights(folder.path() / "air.tif", frame, celsius);
    write_heights(folder.path() / "dew.tif", frame, dew);
    const std::string rest =
        "surface_temperature: 30 degC\ntime: {at: 2025-06-21T12:00Z}\noutputs: {layers: "
        "[longwave_down, net_longwave]}\n";
    const auto numbers =
        computed(folder.path(),
                 town + "weather: {air_temperature: 18.5 degC, dew_point: 9.25 degC}\n" + rest);
    for (const std::string weather :
         {"air_temperature: {raster: air.tif, unit: degC}, dew_point: 9.25 degC",
          "air_temperature: 18.5 degC, dew_point: {raster: dew.tif, unit: degC}",
          "air_temperature: {raster: air.tif, unit: degC}, dew_point: {raster: dew.tif, unit: "
          "degC}"}) {
        CAPTURE(weather);
        const auto rasters = computed(folder.path(), town + "weather: {" + weather + "}\n" + rest);
        for (const std::string layer : {"longwave_down", "net_longwave"})
            CHECK(largest(rasters[layer], [&](int c, int r, float value) {
                      return std::abs(static_cast<double>(value) - at(numbers[layer], c, r));
                  }) < 0.01);
    }
}

TEST_CASE(
    "longwave down: clouds and the sky's own longwave from rasters give what the same numbers give",
    "[heat][differential]") {
    const TemporaryFolder folder;
    make_ground(folder.path());
    const auto frame = frame_about("EPSG:32633", 47.0, 15.0, 30, side, side);
    Plane<float> share(side, side, 0.375F), down(side, side, 312.5F);
    share.at(2, 3) = 1.5F;  // no share of a sky
    down.at(2, 3) = -9.0F;
    write_heights(folder.path() / "cloud.tif", frame, share);
    write_heights(folder.path() / "down.tif", frame, down);
    const std::string air =
        "weather: {air_temperature: 18.5 degC, dew_point: 9.25 degC}\nsurface_temperature: 30 "
        "degC\n";
    const std::string rest = "outputs: {layers: [longwave_down, net_longwave]}\n";
    const std::string time =
        GENERATE("time: {at: 2025-06-21T12:00Z}\n",
                 "time: {from: 2025-06-20, to: 2025-06-21, step: 1 h, totals: day}\n");
    const auto same = [&](const std::string& raster, const std::string& number) {
        CAPTURE(raster, time);
        const auto a = computed(folder.path(), town + air + raster + time + rest);
        const auto b = computed(folder.path(), town + air + number + time + rest);
        for (const std::string layer : {"longwave_down", "net_longwave"}) {
            CHECK(largest(a[layer], [&](int c, int r, float value) {
                      if (c == 2 && r == 3) return std::isnan(value) ? 0.0 : 1.0;
                      return std::abs(static_cast<double>(value) - at(b[layer], c, r));
                  }) < 0.01);  // twice the field's 1/256 W m-2, and float
            CHECK_FALSE(std::isnan(b[layer].at(2, 3)));
        }
    };
    same("longwave: {cloud: cloud.tif, cloud_method: maykut-church1973}\n",
         "longwave: {cloud: 0.375, cloud_method: maykut-church1973}\n");
    same("longwave: {down: down.tif}\n", "longwave: {down: 312.5}\n");
}

TEST_CASE("longwave down: a sky whose light has clouds by the pixel has them for its longwave too",
          "[heat][property]") {
    const TemporaryFolder folder;
    make_ground(folder.path());
    const auto frame = frame_about("EPSG:32633", 47.0, 15.0, 30, side, side);
    Plane<float> share(side, side, 0.0F);
    for (int r = 0; r < side; ++r) share.at(5, r) = 1;
    write_heights(folder.path() / "cloud.tif", frame, share);
    const auto found = computed(
        folder.path(), town + "weather: {air_temperature: 18.5 degC, dew_point: 9.25 degC}\n" +
                           "sky: {cloud: cloud.tif}\ntime: {at: 2025-06-21T12:00Z}\n" +
                           "outputs: {layers: [longwave_down, insolation]}\n");
    const auto &down = found["longwave_down"], &sun = found["insolation"];
    for (const int r : {0, side / 2}) {
        CHECK(down.at(5, r) > down.at(4, r) + 30);  // a closed cover adds tens of W m-2
        CHECK(sun.at(5, r) < 0.5F * sun.at(4, r));
    }
}

TEST_CASE("balanced temperature: dry built and bare ground alone, and the balance of its own terms",
          "[heat][property]") {
    const TemporaryFolder folder;
    make_ground(folder.path());
    const auto found =
        computed(folder.path(),
                 town +
                     "weather: {air_temperature: 25 degC, relative_humidity: 0.5, wind: low}\n"
                     "surface_temperature: {from: balance}\n"
                     "time: {at: 2025-06-21T11:00Z}\n"
                     "outputs: {layers: [surface_temperature, net_shortwave, longwave_down, "
                     "emissivity, quality, sri, slope, albedo]}\n");
    int outside = 0;
    const double worst = largest(found["surface_temperature"], [&](int c, int r, float celsius) {
        const auto flag = static_cast<std::uint16_t>(found["quality"].at(c, r));
        const bool dry = c >= 10 && c < 30;
        outside += (flag & quality::outside_scope) != 0;
        if (!dry) return std::isnan(celsius) && (flag & quality::outside_scope) != 0 ? 0.0 : 1.0;
        return std::abs(balanced_temperature_k(at(found["net_shortwave"], c, r),
                                               at(found["emissivity"], c, r),
                                               at(found["longwave_down"], c, r), 298.15, 5) -
                        273.15 - static_cast<double>(celsius));
    });
    CHECK(worst < 0.002);
    // Asked for alone it has its emissivity and its light all the same.
    const auto alone =
        computed(folder.path(),
                 town +
                     "weather: {air_temperature: 25 degC, relative_humidity: 0.5, wind: low}\n"
                     "surface_temperature: {from: balance}\n"
                     "time: {at: 2025-06-21T11:00Z}\n"
                     "outputs: {layers: [surface_temperature]}\n");
    CHECK(largest(alone["surface_temperature"], [&](int c, int r, float celsius) {
              const auto other = static_cast<float>(at(found["surface_temperature"], c, r));
              return celsius == other || (std::isnan(celsius) && std::isnan(other)) ? 0.0 : 1.0;
          }) == 0);
    CHECK(outside >= side * side / 2);
    int level = 0;
    CHECK(largest(found["sri"], [&](int c, int r, float index) {
              if (c < 10 || c >= 30 || at(found["slope"], c, r) >= 9.5)
                  return std::isnan(index) ? 0.0 : 1.0;
              ++level;
              return std::abs(solar_reflectance_index(at(found["albedo"], c, r),
                                                      at(found["emissivity"], c, r), Wind::low) -
                              static_cast<double>(index));
          }) < 0.01);
    CHECK(level > 100);
}

TEST_CASE("emissivity from NDVI: what the image's quality calls snow has snow's, not bare soil's",
          "[heat][property]") {
    const TemporaryFolder folder;
    const auto frame = frame_about("EPSG:32633", 47.0, 15.0, 30, side, side);
    std::string bands;
    for (const auto& [name, reflectance] : {std::pair{"blue", 0.6F},
                                            {"red", 0.6F},
                                            {"nir", 0.55F},
                                            {"swir1", 0.1F},
                                            {"swir2", 0.1F}}) {
        write_heights(folder.path() / (std::string(name) + ".tif"), frame,
                      Plane<float>(side, side, (reflectance + 0.2F) / 2.75e-5F), {"Int16", "", 0});
        bands += std::string(bands.empty() ? "" : ", ") + name + ": " + name + ".tif";
    }
    // QA_PIXEL of USGS Collection 2: bit 6 clear, bit 5 snow.
    Plane<float> quality(side, side, 64);
    for (int r = 0; r < side; ++r) quality.at(3, r) = 32;
    write_heights(folder.path() / "qa.tif", frame, quality, {"Int16", "", 1});
    const auto found = computed(folder.path(),
                                "surface: {emissivity: {from: ndvi}, reflectance: {sensor: "
                                "landsat-oli-c2, product: surface-reflectance, "
                                "implausible: allow, quality: qa.tif, bands: {" +
                                    bands + "}}}\noutputs: {layers: [emissivity]}\n");
    // 0.98 - 0.042 red (Sobrino et al. 2004) beside it; numbers are stored in steps of 2.75e-5.
    CHECK(at(found["emissivity"], 2, 7) == Approx(0.98 - 0.042 * 0.6).margin(1e-5));
    CHECK(at(found["emissivity"], 3, 7) == Approx(0.985).margin(1e-6));
}

TEST_CASE("Landsat's stored temperatures are known by name or product, and 0 is no data",
          "[heat][edge]") {
    const TemporaryFolder folder;
    make_ground(folder.path());
    const auto frame = frame_about("EPSG:32633", 47.0, 15.0, 30, side, side);
    // USGS Collection 2 guide: 0.00341802 * 44177 + 149 = 299.99787 K.
    Plane<float> numbers(side, side, 44177.0F / 2);
    numbers.at(3, 4) = 0;
    const std::string name =
        GENERATE("LC08_L2SP_190027_20250621_20250630_02_T1_ST_B10.TIF", "lst.tif");
    write_heights(folder.path() / name, frame, numbers, {"Float32", "", -1});
    const std::string product = name == "lst.tif" ? ", product: landsat-c2" : "";
    const auto found =
        computed(folder.path(),
                 town + "surface_temperature: {raster: " + name + product + "}\n" +
                     "time: {at: 2025-06-21T10:00Z}\noutputs: {layers: [surface_temperature]}\n");
    CHECK(found["surface_temperature"].at(0, 0) ==
          Approx(0.00341802 * 44177 / 2 + 149 - 273.15).margin(0.001));
    CHECK(std::isnan(found["surface_temperature"].at(3, 4)));
}

TEST_CASE(
    "Landsat's temperatures under clouds are not the ground's, whether QA_PIXEL lies beside them "
    "or is named",
    "[heat][edge]") {
    const TemporaryFolder folder;
    make_ground(folder.path());
    const auto frame = frame_about("EPSG:32633", 47.0, 15.0, 30, side, side);
    const std::string scene = "LC08_L2SP_190027_20250621_20250630_02_T1";
    write_heights(folder.path() / (scene + "_ST_B10.TIF"), frame,
                  Plane<float>(side, side, 44177.0F), {"Float32", "", -1});
    // USGS Landsat Collection 2 guide: 21824 clear land, 22280 cloud, 23888 cloud shadow, 30048 snow, 1 fill.
    Plane<float> codes(side, side, 21824.0F);
    codes.at(1, 0) = 22280;
    codes.at(2, 0) = 23888;
    codes.at(3, 0) = 30048;
    codes.at(4, 0) = 1;
    const std::string name = GENERATE_COPY(scene + "_QA_PIXEL.TIF", std::string("clouds.tif"));
    write_heights(folder.path() / name, frame, codes, {"UInt16", "", -1});
    const std::string named = name == "clouds.tif" ? ", quality: clouds.tif" : "";
    const auto found =
        computed(folder.path(),
                 town + "surface_temperature: {raster: " + scene + "_ST_B10.TIF" + named + "}\n" +
                     "time: {at: 2025-06-21T10:00Z}\noutputs: {layers: [surface_temperature]}\n");
    const auto& celsius = found["surface_temperature"];
    CHECK(celsius.at(0, 0) == Approx(0.00341802 * 44177 + 149 - 273.15).margin(0.001));
    CHECK(celsius.at(3, 0) == celsius.at(0, 0));
    for (const int column : {1, 2, 4}) CHECK(std::isnan(celsius.at(column, 0)));
}

namespace {

/// A day of hours: sunny till noon, overcast after; 20 degC and 12 hPa throughout.
WeatherRecord half_cloudy_day() {
    std::ostringstream text;
    text << "time,global [W/m2],air_temperature [degC],vapour_pressure [hPa]\n";
    for (int hour = 0; hour < 24; ++hour) {
        const double sine = std::sin((hour + 0.5 - 6) / 12 * 3.14159265);
        const double clear = sine > 0 ? 900 * sine : 0;
        text << "2025-03-20T" << (hour < 10 ? "0" : "") << hour << ":00,"
             << (hour < 12 ? clear : 0.2 * clear) << ",20,12\n";
    }
    WeatherFormat format;
    format.file = "day.csv";
    return read_weather(text.str(), format);
}

}  // namespace

TEST_CASE("air_record: clouds told by the sun, held and interpolated through the night",
          "[heat][property]") {
    const Station station{rad_from_deg(0), rad_from_deg(0), 0};
    const Sky sky;
    const auto record = half_cloudy_day();
    const auto air = air_record(record, station, sky, {});
    REQUIRE(air.rows.size() == 24);
    CHECK(air.cloud_from == "global");
    // On the equator at the equinox the sun passes 10 degrees 40 minutes after 6 h: hours 7 to 16 tell.
    CHECK(air.night_rows == 14);
    CHECK(air.first_rows == 14);
    CHECK(air.rows[0].air.cloud.added == air.rows[7].air.cloud.added);
    CHECK(air.rows[23].air.cloud.added == air.rows[16].air.cloud.added);
    CHECK(air.rows[10].air.cloud.added < 0.25);
    CHECK(air.rows[14].air.cloud.added == Approx(0.8).margin(0.1));
    CHECK(air.rows[14].air.cloud.factor + air.rows[14].air.cloud.added == Approx(1).epsilon(1e-12));
}

TEST_CASE("air_record: what is missing is said, never guessed", "[heat][edge]") {
    WeatherFormat format;
    format.file = "day.csv";
    const Station station{0, 0, 0};
    const auto bare =
        read_weather("time,global [W/m2]\n2025-03-20T10:00,500\n2025-03-20T11:00,500\n", format);
    CHECK_THROWS_WITH(air_record(bare, station, Sky(), {}),
                      Catch::Matchers::Contains("no air_temperature"));
    const auto dry = read_weather(
        "time,air_temperature [degC]\n2025-03-20T10:00,20\n2025-03-20T11:00,20\n", format);
    CHECK_THROWS_WITH(air_record(dry, station, Sky(), {}),
                      Catch::Matchers::Contains("no humidity"));
    const auto gap = read_weather(
        "time,dew_point [degC],air_temperature "
        "[degC]\n2025-03-20T10:00,,20\n2025-03-20T11:00,10,20\n",
        format);
    const auto air = air_record(gap, station, Sky(), {});
    CHECK(air.rows.size() == 1);
    CHECK(air.left_out == 1);
    CHECK(air.rows[0].air.vapour_pressure_hpa == Approx(saturation_vapour_pressure_hpa(283.15)));
}

TEST_CASE(
    "PointLongwave: a day is the mean of its hours, a thin day has none, measured longwave stands",
    "[heat][property]") {
    TimePlan times;
    times.zone = Zone::parse("UTC");
    times.periods = periods_of({2025, 3, 20}, {2025, 3, 20}, Totals::day, {}, times.zone);
    Longwave longwave;
    double sum = 0;
    const double start = static_cast<double>(days_from_civil({2025, 3, 20})) * seconds_per_day;
    for (int hour = 0; hour < 24; ++hour) {
        const double t = 280 + hour;
        longwave.rows.push_back({{start + hour * 3600.0, start + (hour + 1) * 3600.0},
                                 {t, 10, {}, std::nan(""), std::nan("")}});
        sum += clear_longwave_w_m2(longwave.formula, t, 10) / 24;
    }
    CHECK(PointLongwave(times, longwave).at(0, 0, 700).sky_w_m2 == Approx(sum).epsilon(1e-12));
    longwave.rows[5].air.longwave_down_w_m2 = 300;
    const double other = sum + (300 - clear_longwave_w_m2(longwave.formula, 285, 10)) / 24;
    CHECK(PointLongwave(times, longwave).at(0, 0, 0).sky_w_m2 == Approx(other).epsilon(1e-12));
    longwave.rows.resize(20);
    CHECK(std::isnan(PointLongwave(times, longwave).at(0, 0, 0).sky_w_m2));
    CHECK(PointLongwave(times, longwave).of_what_there_is(0, 0, 0).sky_w_m2 == 0);
}
