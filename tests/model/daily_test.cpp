#include <catch2/catch.hpp>
#include <cmath>
#include <fstream>
#include <sstream>

#include "sunbudget/base/units.hpp"
#include "sunbudget/model/daily_air.hpp"
#include "sunbudget/physics/fao56.hpp"
#include "sunbudget/physics/fao56_balance.hpp"
#include "support/vectors.hpp"
#include "terrain_run.hpp"

using namespace sunbudget;
using namespace sunbudget::test;
using Catch::Matchers::Contains;

namespace {

/// Two pixels by two, a tenth of a kilometre each, about a place.
std::string grid_about(double latitude, double longitude) {
    std::ostringstream text;
    text.precision(10);
    constexpr double half = 0.001;
    text << "grid: {crs: \"EPSG:4326\", bounds: [" << longitude - half << ", " << latitude - half
         << ", " << longitude + half << ", " << latitude + half << "], cell: " << half << "}\n";
    return text.str();
}

/// A plan of the paper's grass at a place and day, with the rest of its keys.
std::string grass(const Table& table, std::size_t i, const std::string& sky,
                  const std::string& weather, const std::string& layers) {
    const auto cell = [&](const char* name) { return table.cell(i, name); };
    return grid_about(table.number(i, "latitude"), table.number(i, "longitude")) +
           "surface: {albedo: {value: 0.23}}\nterrain: {elevation: " + cell("height") +
           " m}\nsky: {model: fao56" + sky + "}\nweather: {" + weather +
           ", station_elevation: " + cell("height") +
           " m}\nlongwave: {method: fao56}\ntime: {from: " + cell("date") +
           ", to: " + cell("date") + "}\noutputs: {unit: MJ/m2, layers: [" + layers + "]}\n";
}

void write_text(const std::filesystem::path& file, const std::string& text) {
    std::ofstream(file) << text;
}

double sum_of(const Computed& found, const char* layer) {
    return static_cast<double>(found[layer].at(0, 1));
}

constexpr double mj_a_day = 86400 / 1e6;  // of 1 W m-2
/// Stored sums of a day are multiples of 2^-8 MJ m-2, the largest power of two below 1/16 W m-2 for a day.
constexpr double half_step = 1.0 / 512;

}  // namespace

TEST_CASE(
    "FAO-56: the paper's examples through a plan and a table of one day, to the printed digit",
    "[heat][vector]") {
    const auto table = read_table("vectors/fao56_balance_days.csv");
    REQUIRE(table.rows.size() == 4);
    for (std::size_t i = 0; i < table.rows.size(); ++i) {
        CAPTURE(table.cell(i, "example"));
        const TemporaryFolder folder;
        const auto cell = [&](const char* name) { return table.cell(i, name); };
        const bool humidity = cell("vapour").empty();
        write_text(
            folder.path() / "day.csv",
            std::string(
                "time,air_temperature_max [degC],air_temperature_min [degC],global [MJ/m2],") +
                (humidity ? "relative_humidity_max [%],relative_humidity_min [%]\n"
                          : "vapour_pressure [kPa]\n") +
                cell("date") + "," + cell("max") + "," + cell("min") + "," + cell("sunlight") +
                "," +
                (humidity ? cell("humidity_max") + "," + cell("humidity_min") : cell("vapour")) +
                "\n");
        const auto found = computed(
            folder.path(),
            grass(table, i, "", "table: day.csv, zone: solar-mean", "net_longwave, net_radiation"),
            {.rounded = true});
        const double digit = table.number(i, "digit");
        CHECK(-sum_of(found, "net_longwave") ==
              Approx(table.number(i, "net_longwave")).margin(digit / 2 + half_step).epsilon(0));
        // The paper subtracts printed figures: the digit's half comes in once more.
        CHECK(sum_of(found, "net_radiation") ==
              Approx(table.number(i, "net_radiation")).margin(digit + half_step).epsilon(0));
        REQUIRE(found.run.assumptions.size() > 0);
    }
}

TEST_CASE("FAO-56: the paper's examples from hours of sunshine and numbers in the plan",
          "[heat][vector]") {
    const auto table = read_table("vectors/fao56_balance_days.csv");
    int seen = 0;
    for (std::size_t i = 0; i < table.rows.size(); ++i) {
        const auto cell = [&](const char* name) { return table.cell(i, name); };
        if (cell("sunshine").empty()) continue;
        CAPTURE(cell("example"));
        ++seen;
        const TemporaryFolder folder;
        std::string months;
        for (int m = 0; m < 12; ++m) months += (m > 0 ? ", " : "") + cell("sunshine");
        // Example 18 comes to 1.409 kPa.
        const auto vapour = cell("vapour").empty() ? std::string("1.409") : cell("vapour");
        const auto found = computed(folder.path(),
                                    grass(table, i, ", sunshine: [" + months + "]",
                                          "air_temperature_max: " + cell("max") +
                                              " degC, air_temperature_min: " + cell("min") +
                                              " degC, vapour_pressure: " + vapour + " kPa",
                                          "net_longwave"),
                                    {.rounded = true});
        CHECK(-sum_of(found, "net_longwave") ==
              Approx(table.number(i, "net_longwave"))
                  .margin(table.number(i, "digit") / 2 + half_step)
                  .epsilon(0));
    }
    CHECK(seen == 3);
}

TEST_CASE("FAO-56: rows of hours give their day's extremes, and the light of gaps like the rest's",
          "[heat][property]") {
    const Station station{rad_from_deg(45), 0, 300};
    TimePlan times;
    times.zone = Zone::parse("UTC");
    times.periods = periods_of({2025, 6, 20}, {2025, 6, 21}, Totals::day, {}, times.zone);
    const auto record = [](const std::string& missing) {
        std::ostringstream text;
        text << "time,global [W/m2],air_temperature [degC],relative_humidity [%]\n";
        for (int day = 20; day <= 21; ++day)
            for (int hour = 0; hour < 24; ++hour) {
                const double sine = std::max(0.0, std::sin((hour + 0.5 - 4.2) / 15.6 * 3.14159265));
                text << "2025-06-" << day << "T" << (hour < 10 ? "0" : "") << hour << ":00,"
                     << (hour == 9 && !missing.empty() ? missing : std::to_string(800 * sine))
                     << "," << 20 + 8 * sine << "," << 80 - 40 * sine << "\n";
            }
        WeatherFormat format;
        format.file = "day.csv";
        return read_weather(text.str(), format);
    };
    const auto clear = [](const CivilDate&) { return 1.0; };
    const auto whole = daily_air(record(""), station, times, clear);
    REQUIRE(whole.days.size() == 2);
    const double top = std::sin((12 + 0.5 - 4.2) / 15.6 * 3.14159265),
                 top11 = std::sin((11 + 0.5 - 4.2) / 15.6 * 3.14159265);
    const double most = std::max(top, top11);
    CHECK(whole.days[0].min_celsius == Approx(20));
    CHECK(whole.days[0].max_celsius == Approx(20 + 8 * most).epsilon(1e-6));
    CHECK(whole.days[0].vapour_kpa ==
          Approx(fao56_vapour_pressure_kpa(20, 20 + 8 * most, 80, 80 - 40 * most)).epsilon(1e-5));
    double joules = 0;
    for (int hour = 0; hour < 24; ++hour)
        joules += 3600 * 800 * std::max(0.0, std::sin((hour + 0.5 - 4.2) / 15.6 * 3.14159265));
    CHECK(whole.days[0].relative_sunlight ==
          Approx(joules / 1e6 / daily_clear_mj_m2({2025, 6, 20}, station.latitude_rad, 300))
              .epsilon(1e-5));
    CHECK(whole.humidity_from == "the day's highest and lowest relative humidity");
    // An hour of eight per cent of the light is missing: the day counts, about as bright as before.
    const auto gap = daily_air(record("NaN"), station, times, clear);
    REQUIRE(gap.days.size() == 2);
    CHECK(gap.days[0].relative_sunlight == Approx(whole.days[0].relative_sunlight).epsilon(0.03));
}

TEST_CASE(
    "FAO-56: a day that lacks something does not count, and a table that cannot tell is refused",
    "[heat][edge]") {
    const Station station{rad_from_deg(45), 0, 300};
    TimePlan times;
    times.zone = Zone::parse("UTC");
    times.periods = periods_of({2025, 6, 20}, {2025, 6, 22}, Totals::day, {}, times.zone);
    const auto found = [&](const std::string& text) {
        WeatherFormat format;
        format.file = "day.csv";
        return daily_air(read_weather(text, format), station, times,
                         [](const CivilDate&) { return 0.8; });
    };
    const std::string head = "time,air_temperature_max [degC],air_temperature_min [degC],";
    const auto some = found(
        head + "dew_point [degC]\n2025-06-20,30,15,12\n2025-06-21,30,15,\n2025-06-22,,15,12\n");
    REQUIRE(some.days.size() == 1);
    CHECK(some.left_out == 2);
    CHECK(some.days[0].relative_sunlight == 0.8);
    CHECK(some.days[0].vapour_kpa == Approx(fao56_saturation_kpa(12)));
    CHECK(found(head + "relative_humidity [%]\n2025-06-20,30,15,50\n").days[0].vapour_kpa ==
          Approx((fao56_saturation_kpa(30) + fao56_saturation_kpa(15)) / 4));
    CHECK(found(head + "vapour_pressure [hPa],cloud [1]\n2025-06-20,30,15,12,0.5\n")
              .days[0]
              .relative_sunlight == Approx(1 - 0.75 * 0.5));
    CHECK_THROWS_WITH(found("time,air_temperature [degC],dew_point [degC]\n2025-06-20,20,12\n"),
                      Contains("more than 3 h"));
    CHECK_THROWS_WITH(found("time,dew_point [degC]\n2025-06-20,12\n"),
                      Contains("neither air_temperature nor both"));
    CHECK_THROWS_WITH(found(head + "wind [m/s]\n2025-06-20,30,15,2\n"), Contains("no humidity"));
    CHECK_THROWS_WITH(found(head + "dew_point [degC],beam [W/m2]\n2025-06-20,30,15,12,300\n"),
                      Contains("no global"));
    CHECK_THROWS_WITH(found(head + "dew_point [degC]\n2025-06-20,15,30,12\n"),
                      Contains("day.csv:2: air_temperature_max") && Contains("lies below"));
}

TEST_CASE(
    "FAO-56 and ASCE over terrain: the day's temperatures at each height, one mean over the days, "
    "the net alone",
    "[heat][property]") {
    const TemporaryFolder folder;
    constexpr int side = 24;
    const auto frame = frame_about("EPSG:32633", 47.0, 15.0, 90, side, side);
    Plane<float> heights(side, side);
    for (int r = 0; r < side; ++r)
        for (int c = 0; c < side; ++c)
            heights.at(c, r) = 400 + 60 * static_cast<float>(c) + 5 * static_cast<float>(r);
    write_heights(folder.path() / "dem.tif", frame, heights);
    // Two days of very different skies: a mean of days is not the day of means.
    write_text(folder.path() / "days.csv",
               "time,air_temperature_max [degC],air_temperature_min [degC],global "
               "[MJ/m2],relative_humidity [%]\n2025-06-20,30,15,28,50\n2025-06-21,19,14,3,90\n");
    const std::string name = GENERATE("fao56", "asce2005");
    CAPTURE(name);
    const auto found = computed(
        folder.path(),
        "terrain: {elevation: dem.tif}\nweather: {table: days.csv, zone: solar-mean, station: "
        "[47.0, 15.0], station_elevation: 600 m, "
        "lapse: 8 K/km}\nlongwave: {method: " +
            name +
            "}\nsurface: {emissivity: 0.9}\n"
            "time: {from: 2025-06-20, to: 2025-06-21}\noutputs: {layers: [net_longwave]}\n");
    const auto expected = [&](double height) {
        double sum = 0;
        for (const auto& [most, least, global, humid, date] :
             {std::tuple{30.0, 15.0, 28.0, 0.5, CivilDate{2025, 6, 20}},
              std::tuple{19.0, 14.0, 3.0, 0.9, CivilDate{2025, 6, 21}}}) {
            const double cooler = 0.008 * (height - 600);
            const double clear = (0.75 + 2e-5 * 600) * fao56_extraterrestrial_mj_m2_day(
                                                           day_of_year(date), rad_from_deg(47));
            const double vapour =
                humid *
                (fao56_saturation_kpa(most - cooler) + fao56_saturation_kpa(least - cooler)) / 2;
            const auto up =
                name == "fao56" ? fao56_net_longwave_mj_m2_day : asce2005_net_longwave_mj_m2_day;
            sum -= up(least - cooler, most - cooler, vapour, global / clear) / 2;
        }
        return sum / mj_a_day;
    };
    double worst = 0;
    for (int r = 0; r < side; ++r)
        for (int c = 0; c < side; ++c)
            worst = std::max(worst, std::abs(static_cast<double>(found["net_longwave"].at(c, r)) -
                                             expected(static_cast<double>(heights.at(c, r)))));
    CHECK(worst < 0.01);  // the field's 1/256 W m-2, and float
    const auto says = [](const std::vector<std::string>& texts, const std::string& words) {
        return std::any_of(texts.begin(), texts.end(),
                           [&](const auto& text) { return text.find(words) != text.npos; });
    };
    CHECK(says(found.run.warnings, "is for level open ground"));
    CHECK(says(found.run.assumptions, "surface.emissivity: not used"));
    CHECK(says(found.run.assumptions, "vapour pressure (mean relative humidity)"));
}
