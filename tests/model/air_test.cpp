#include <algorithm>
#include <catch2/catch.hpp>
#include <cmath>
#include <fstream>

#include "sunbudget/base/units.hpp"
#include "sunbudget/model/air_pressure.hpp"
#include "sunbudget/physics/air_mass.hpp"
#include "support/vectors.hpp"
#include "terrain_run.hpp"

using namespace sunbudget;
using namespace sunbudget::test;
using Catch::Matchers::Contains;

namespace {

const std::string spot =
    "grid: {crs: \"EPSG:32633\", bounds: [500000, 5200000, 500400, 5200400], cell: 200}\n";

void write_text(const std::filesystem::path& file, const std::string& text) {
    std::ofstream(file) << text;
}

double value(const Computed& found, const char* layer) {
    return static_cast<double>(found[layer].at(0, 0));
}

bool says(const std::vector<std::string>& texts, const std::string& words) {
    return std::any_of(texts.begin(), texts.end(),
                       [&](const auto& text) { return text.find(words) != text.npos; });
}

TimePlan one_day() {
    TimePlan times;
    times.zone = Zone::parse("UTC");
    times.periods = periods_of({2025, 6, 20}, {2025, 6, 20}, Totals::day, {}, times.zone);
    return times;
}

}  // namespace

TEST_CASE("AirPressure: months by their number, rows from their begin on, held at both ends",
          "[model][edge]") {
    std::array<double, 12> months{};
    months.fill(1);
    months[6] = 0.97;
    CHECK(AirPressure(months).factor(0, 7) == 0.97);
    CHECK(AirPressure(months).mean_factor() == Approx((11 + 0.97) / 12));
    const AirPressure record({{100, 0.9}, {200, 1.1}});
    CHECK(record.factor(0, 1) == 0.9);
    CHECK(record.factor(199, 1) == 0.9);
    CHECK(record.factor(200, 1) == 1.1);
    CHECK(record.factor(1e9, 1) == 1.1);
    CHECK(standard_pressure_hpa(0) == 1013.25);
}

TEST_CASE("pressure: light and refraction are those of the height where the standard has it",
          "[model][property]") {
    // ESRA's model and refraction know a height by its pressure alone.
    constexpr double height_m = 900;
    Sky low;
    std::array<double, 12> months{};
    months.fill(pressure_ratio(height_m));
    low.pressure = std::make_shared<const AirPressure>(months);
    const auto times = one_day();
    const PointLight scaled(times, low), standard(times, Sky());
    const double latitude = rad_from_deg(47), longitude = rad_from_deg(15);
    const auto found = scaled.at(0, latitude, longitude, 0),
               there = standard.at(0, latitude, longitude, height_m),
               sea = standard.at(0, latitude, longitude, 0);
    CHECK(found.direct_w_m2() == Approx(there.direct_w_m2()).epsilon(1e-12));
    CHECK(found.diffuse_w_m2 == Approx(there.diffuse_w_m2).epsilon(1e-12));
    CHECK(found.direct_w_m2() > sea.direct_w_m2() + 1);
    const auto way = scaled.path(0, latitude, longitude, 0),
               way_there = standard.path(0, latitude, longitude, height_m);
    REQUIRE(way.size() == way_there.size());
    CHECK(way.front().sine_high == Approx(way_there.front().sine_high).epsilon(1e-12));
    CHECK(way.front().sine_low == Approx(way_there.front().sine_low).margin(1e-12));
    CHECK(way.front().sine_low != standard.path(0, latitude, longitude, 0).front().sine_low);
}

TEST_CASE("pressure: a number, months, at the sea or in a table's column give the same light",
          "[model][differential]") {
    const TemporaryFolder folder;
    const double station_hpa = 0.96 * standard_pressure_hpa(500);
    const auto with = [&](const std::string& weather) {
        return computed(folder.path(), spot + "terrain: {elevation: 200 m}\n" + weather +
                                           "time: {from: 2025-06-20, to: 2025-06-20, step: 30 "
                                           "min}\noutputs: {layers: [direct]}\n");
    };
    const auto hpa = std::to_string(station_hpa);
    const auto number = with("weather: {pressure: " + hpa + " hPa, station_elevation: 500 m}\n");
    const auto standard = with("");
    CHECK(value(number, "direct") > value(standard, "direct") + 0.5);
    CHECK(says(number.run.assumptions, "0.960 of the standard's"));
    std::string months;
    for (int m = 0; m < 12; ++m)
        months += std::string(m > 0 ? ", " : "") + (m == 5 ? hpa : "950") + " hPa";
    CHECK(value(with("weather: {pressure: [" + months + "], station_elevation: 500 m}\n"),
                "direct") == value(number, "direct"));
    const auto sea = std::to_string(0.96 * 1013.25);
    CHECK(value(with("weather: {pressure: " + sea + " hPa, pressure_at: sea-level}\n"), "direct") ==
          Approx(value(number, "direct")).epsilon(1e-6));
    // The second row holds through the gap behind it.
    write_text(folder.path() / "p.csv", "time,pressure [hPa],wind [m/s]\n2025-06-19T00:00," + hpa +
                                            ",1\n2025-06-19T01:00," + hpa +
                                            ",\n2025-06-19T02:00,,\n");
    const auto table = with("weather: {table: p.csv, station_elevation: 500 m}\n");
    CHECK(value(table, "direct") == Approx(value(number, "direct")).epsilon(1e-6));
    CHECK(says(table.run.assumptions, "1 rows without a value take the last before them"));
    CHECK(says(table.run.assumptions, "wind is checked, but nothing in this run is made from it"));
    CHECK_THROWS_WITH(with("weather: {pressure: 1013 hPa, station_elevation: 1600 m}\n"),
                      Contains("121 % of the standard's") && Contains("pressure_at: sea-level"));
    CHECK_THROWS_WITH(with("weather: {pressure: 850 hPa, pressure_at: sea-level}\n"),
                      Contains("84 % of the standard's") && Contains("pressure_at: station"));
    write_text(folder.path() / "p.csv",
               "time,pressure [hPa]\n2025-06-19T00:00,900\n2025-06-19T01:00,600\n");
    CHECK_THROWS_WITH(with("weather: {table: p.csv, station_elevation: 500 m}\n"),
                      Contains("600.0 hPa in the row of 2025-06-19T01:00"));
}

TEST_CASE("pressure: a run without the sun's light does not look at it", "[model][edge]") {
    const TemporaryFolder folder;
    write_text(folder.path() / "p.csv",
               "time,pressure [hPa],longwave_down [W/m2]\n"
               "2025-06-20T00:00,600,300\n2025-06-20T01:00,600,310\n");
    const auto with = [&](const std::string& weather) {
        return computed(folder.path(), spot + weather +
                                           "time: {at: 2025-06-20T00:30Z}\n"
                                           "outputs: {layers: [longwave_down]}\n")
            .run.assumptions;
    };
    CHECK(says(with("weather: {table: p.csv}\n"),
               "pressure is checked, but nothing in this run is made from it"));
    CHECK(says(with("weather: {air_temperature: 20 degC, dew_point: 10 degC, pressure: 990 hPa}\n"),
               "weather.pressure: not used"));
}

TEST_CASE(
    "wind: speeds are the standard's three cases, in the plan's units or at the table's instant",
    "[heat][differential]") {
    const TemporaryFolder folder;
    const auto frame = frame_about("EPSG:32633", 47.0, 15.0, 30, 4, 4);
    write_heights(folder.path() / "cover.tif", frame, Plane<float>(4, 4, 60), {"Int16", "", -9999});
    const auto with = [&](const std::string& weather) {
        return computed(folder.path(),
                        "surface: {cover: {raster: cover.tif, classes: worldcover}}\nweather: {" +
                            weather +
                            "}\nsurface_temperature: {from: balance}\ntime: {at: "
                            "2025-06-21T11:20Z}\noutputs: {layers: [surface_temperature]}\n");
    };
    const std::string air = "air_temperature: 25 degC, relative_humidity: 0.5, wind: ";
    const double low = value(with(air + "low"), "surface_temperature"),
                 medium = value(with(air + "medium"), "surface_temperature"),
                 high = value(with(air + "high"), "surface_temperature");
    CHECK(low > medium);
    CHECK(medium > high);
    CHECK(value(with(air + "1.9 m/s"), "surface_temperature") == low);
    CHECK(value(with(air + "12 km/h"), "surface_temperature") == medium);
    CHECK(value(with(air + "12 kn"), "surface_temperature") == high);
    CHECK(says(with(air + "3.4 m/s").run.assumptions, "weather.wind: 3.4 m/s, medium"));
    const auto storm = with(air + "14 m/s");
    CHECK(value(storm, "surface_temperature") == high);
    CHECK(says(storm.run.warnings, "14.0 m/s, high: ASTM E1980 knows winds of up to 10 m/s"));
    std::string months;
    for (int m = 0; m < 12; ++m)
        months += std::string(m > 0 ? ", " : "") + (m == 5 ? "1 m/s" : "8 m/s");
    CHECK(value(with(air + "[" + months + "]"), "surface_temperature") == low);
    write_text(
        folder.path() / "w.csv",
        "time,air_temperature [degC],relative_humidity [%],wind "
        "[m/s]\n2025-06-21T10:00,25,50,9\n2025-06-21T11:00,25,50,1\n2025-06-21T12:00,25,50,\n");
    const auto table = with("table: w.csv");
    CHECK(value(table, "surface_temperature") == Approx(low).margin(0.01));
    CHECK(says(table.run.assumptions, "weather.wind: 1.0 m/s, low"));
    CHECK_FALSE(says(table.run.assumptions, "is checked, but"));
    // The plan's own word stands above the table's column.
    const auto other = with("table: w.csv, wind: high");
    CHECK(value(other, "surface_temperature") == Approx(high).margin(0.01));
    CHECK(says(other.run.assumptions, "wind is checked, but nothing in this run is made from it"));
}

TEST_CASE("weather columns: those that a run is not made from are told, and no others",
          "[heat][property]") {
    const TemporaryFolder folder;
    std::string rows =
        "time,global [W/m2],air_temperature [degC],relative_humidity [%],dew_point "
        "[degC],vapour_pressure [hPa],pressure [hPa],wind [m/s],cloud [1]\n";
    for (int hour = 0; hour < 24; ++hour)
        rows += "2025-06-20T" + std::string(hour < 10 ? "0" : "") + std::to_string(hour) + ":00," +
                std::to_string(hour > 6 && hour < 18 ? 400 : 0) + ",20,50," +
                (hour == 3 ? "" : "9.3") + ",,1000,3,0.4\n";
    write_text(folder.path() / "t.csv", rows);
    const auto told = [&](const std::string& more, const std::string& layers) -> std::string {
        const auto found = computed(
            folder.path(),
            spot + "surface: {albedo: {value: 0.2}, emissivity: 0.95}\nweather: {table: t.csv}\n" +
                more +
                "time: {from: 2025-06-20, to: 2025-06-20, step: 1 h, zone: UTC}\noutputs: {layers: "
                "[" +
                layers + "]}\n");
        for (const auto& text : found.run.assumptions)
            if (text.find("checked, but") != text.npos)
                return text.substr(0, text.find(" are checked"));
        return {};
    };
    CHECK(told("", "insolation") ==
          "weather.table: cloud, air_temperature, relative_humidity, dew_point, vapour_pressure, "
          "wind");
    // Vapour has a column without a value; where dew point has a gap relative humidity stands in.
    CHECK(told("", "longwave_down") == "weather.table: global, vapour_pressure, pressure, wind");
    CHECK(told("longwave: {method: fao56}\n", "net_longwave") ==
          "weather.table: cloud, relative_humidity, vapour_pressure, pressure, wind");
}
