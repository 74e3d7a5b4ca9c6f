#include "sunbudget/model/weather_record.hpp"

#include <catch2/catch.hpp>
#include <cmath>

#include "sunbudget/base/error.hpp"
#include "surfrad.hpp"

namespace sunbudget {

namespace {

using Catch::Matchers::Contains;

WeatherFormat plain() {
    WeatherFormat format;
    format.file = "station.csv";
    return format;
}

std::size_t at(Weather quantity) {
    return static_cast<std::size_t>(quantity);
}

std::string told(const std::string& text, const WeatherFormat& format) {
    try {
        (void)read_weather(text, format);
    } catch (const Error& error) {
        std::string all;
        for (const auto& problem : error.problems()) all += text_of(problem) + "\n";
        return all;
    }
    return "nothing is wrong";
}

UtcSeconds utc(const char* text) {
    return resolve(parse_instant(text), Zone(), 0);
}

using test::real_text;

}  // namespace

TEST_CASE("weather: a header with names and units says everything", "[model][weather]") {
    const auto record = read_weather(
        "\xef\xbb\xbftime,global [W/m2],air_temperature (degC),relative_humidity [%],cloud "
        "[okta],note\r\n"
        "2025-06-01T10:00Z,500,20,50,2,fine\r\n"
        "2025-06-01T11:00Z,,21,NaN,8,\r\n"
        "# a remark\r\n"
        "2025-06-01T13:00Z,700,-40,102,0,\r\n",
        plain());
    REQUIRE(record.intervals.size() == 3);
    CHECK(record.interval_s == 3600);
    CHECK(record.intervals[0].begin == utc("2025-06-01T10:00Z"));
    CHECK(record.intervals[0].end == utc("2025-06-01T11:00Z"));
    CHECK(record.values(Weather::global)[0] == 500);
    CHECK(std::isnan(record.values(Weather::global)[1]));
    CHECK(record.missing(Weather::global) == 1);
    CHECK(record.values(Weather::air_temperature)[2] == Approx(233.15));
    CHECK(record.values(Weather::relative_humidity)[2] == 1);  // a wet sensor
    CHECK(record.values(Weather::cloud)[0] == 0.25);
    CHECK_FALSE(record.has(Weather::wind));
    REQUIRE(record.gaps.size() == 1);
    CHECK(record.gaps[0].begin == utc("2025-06-01T12:00Z"));
    CHECK(record.gaps[0].end == utc("2025-06-01T13:00Z"));
    CHECK(record.at(utc("2025-06-01T11:59Z")) == 1u);
    CHECK_FALSE(record.at(utc("2025-06-01T12:00Z")).has_value());
    CHECK_FALSE(record.at(utc("2025-06-01T09:59Z")).has_value());
    CHECK_FALSE(record.at(utc("2025-06-01T14:00Z")).has_value());
}

TEST_CASE("weather: energies are divided by their interval, units turned", "[model][weather]") {
    auto format = plain();
    format.columns[at(Weather::global)] = WeatherColumn{"g", 0};
    format.columns[at(Weather::pressure)] = WeatherColumn{"p", 0};
    format.columns[at(Weather::wind)] = WeatherColumn{"w", 0};
    format.columns[at(Weather::dew_point)] = WeatherColumn{"", 5};
    format.units[at(Weather::global)] = "J/m2";
    format.units[at(Weather::pressure)] = "kPa";
    format.units[at(Weather::wind)] = "km/h";
    format.units[at(Weather::dew_point)] = "degF";
    const auto record = read_weather(
        "time,g,p,w,d\n2025-06-01 10:00,1800000,101.3,36,50\n2025-06-01 10:30,0,100,0,32\n",
        format);
    CHECK(record.values(Weather::global)[0] == 1000);  // 1.8 MJ in half an hour
    CHECK(record.values(Weather::pressure)[0] == Approx(1013));
    CHECK(record.values(Weather::wind)[0] == Approx(10));
    CHECK(record.values(Weather::dew_point)[0] == Approx(283.15));  // 50 degF is 10 degC
    CHECK(record.values(Weather::dew_point)[1] == Approx(273.15));

    format = plain();
    format.units[at(Weather::global)] = "MJ/m2";
    const auto days = read_weather("time;global\n2025-06-01;17,28\n2025-06-02;8,64\n", [&] {
        auto german = format;
        german.decimal_comma = true;
        return german;
    }());
    CHECK(days.days);
    CHECK(days.values(Weather::global)[0] == Approx(200));  // 17.28 MJ over 86400 s
    CHECK(days.intervals[0].end == utc("2025-06-02T00:00Z"));
}

TEST_CASE("weather: stamps at start, middle and end, hour 24 and leap days", "[model][weather]") {
    auto format = plain();
    const std::string text = "time,global [W/m2]\n2024-02-28T24:00,0\n2024-02-29T01:00,0\n";
    CHECK(read_weather(text, format).intervals[0].begin == utc("2024-02-29T00:00Z"));
    format.stamp = Stamp::middle;
    CHECK(read_weather(text, format).intervals[0].begin == utc("2024-02-28T23:30Z"));
    format.stamp = Stamp::end;
    CHECK(read_weather(text, format).intervals[0].begin == utc("2024-02-28T23:00Z"));
    CHECK_THAT(told("time,global [W/m2]\n2025-02-29T01:00,0\n2025-03-01T01:00,0\n", format),
               Contains("station.csv:2: time") && Contains("2025-02-29T01:00"));
    const auto parts = read_weather(
        "year,month,day,hour,global [W/m2]\n2025,12,31,23,1\n2025,12,31,24,2\n", format);
    CHECK(parts.intervals[1].end == utc("2026-01-01T00:00Z"));
    auto written = plain();
    written.time_form = "DD.MM.YYYY hh:mm";
    CHECK(read_weather("time;global [W/m2]\n1.6.2025 9:00;1\n01.06.2025 10:00;1\n", written)
              .intervals[0]
              .begin == utc("2025-06-01T09:00Z"));
    const auto closed =
        read_weather("time,global [W/m2]\n202506010900,1\n202506010930,1\n", plain());
    CHECK(closed.intervals[1].begin == utc("2025-06-01T09:30Z"));
    const auto doy = read_weather(
        "year,day_of_year,hour,global [W/m2]\n2024,366,12.5,1\n2024,366,13.5,1\n", plain());
    CHECK(doy.intervals[0].begin == utc("2024-12-31T12:30Z"));
}

TEST_CASE(
    "weather: local clocks; what they skip or show twice is an error that says how to write it",
    "[model][weather]") {
    auto format = plain();
    format.zone = Zone::parse("Europe/Berlin");
    const auto across =
        read_weather("time,global [W/m2]\n2025-03-30T01:00,0\n2025-03-30T03:00,0\n", format);
    CHECK(across.intervals[1].begin == across.intervals[0].end);
    CHECK(across.gaps.empty());
    CHECK_THAT(
        told("time,global [W/m2]\n2025-03-30T01:00,0\n2025-03-30T02:00,0\n2025-03-30T03:00,0\n",
             format),
        Contains("station.csv:3") && Contains("does not exist") && Contains("+01:00"));
    CHECK_THAT(told("time,global [W/m2]\n2025-10-26T01:00,0\n2025-10-26T02:00,0\n", format),
               Contains("station.csv:3") && Contains("happens twice") &&
                   Contains("2025-10-26T02:00:00+02:00") && Contains("weather.zone as an offset"));
    const auto twice = read_weather(
        "time,global [W/m2]\n2025-10-26T02:00+02:00,0\n2025-10-26T02:00+01:00,0\n", format);
    CHECK(twice.intervals[1].begin - twice.intervals[0].begin == 3600);
    format.zone = Zone::parse("solar-mean");
    format.longitude_rad = -3.14159265358979 / 2;  // six hours behind
    CHECK(read_weather("time,global [W/m2]\n2025-06-01T06:00,0\n2025-06-01T07:00,0\n", format)
              .intervals[0]
              .begin == Approx(utc("2025-06-01T12:00Z")).margin(1e-3));
    format.zone = Zone::parse("solar-true");
    // The sundial is 16.4 minutes ahead on 3 November (Meeus, Astronomical Algorithms, ch. 28).
    CHECK(read_weather("time,global [W/m2]\n2025-11-03T12:00,0\n2025-11-03T13:00,0\n", format)
              .intervals[0]
              .begin == Approx(utc("2025-11-03T18:00Z") - 16.4 * 60).margin(10));
}

TEST_CASE("weather: nonsense is refused at its row", "[model][weather]") {
    const auto row = [](const std::string& head, const std::string& cell) {
        return told(
            "time," + head + "\n2025-06-01T10:00Z," + cell + "\n2025-06-01T11:00Z," + cell + "\n",
            plain());
    };
    CHECK_THAT(row("relative_humidity [1]", "1.4"),
               Contains("station.csv:2: relative_humidity") && Contains("1.4 1 is no value"));
    CHECK_THAT(row("relative_humidity [%]", "0.4"), Contains("no value is above 0.4 %"));
    CHECK_THAT(row("air_temperature [degC]", "300"),
               Contains("300 degC is no value a station measures"));
    CHECK_THAT(row("air_temperature [K]", "25"), Contains("25 K is no value"));
    CHECK_THAT(row("pressure [hPa]", "101.3"), Contains("101.3 hPa is no value"));
    CHECK_THAT(row("cloud [okta]", "9"), Contains("9 okta is no value"));
    CHECK_THAT(row("global [MJ/m2]", "20"), Contains("20 MJ/m2 in 3600 s is 5556 W/m2"));
    CHECK_THAT(row("global [W/m2]", "12,5"),
               Contains("nothing is wrong"));  // a cell more than the header
    CHECK_THAT(row("global [W/m2]", "much"), Contains("\"much\" is no number"));
    CHECK_THAT(row("global", "100"),
               Contains("nothing says in which unit it is") && Contains("W/m2"));
    CHECK_THAT(row("global [bar]", "100"), Contains("the unit \"bar\" is not known"));
    CHECK_THAT(row("sun [W/m2]", "100"), Contains("no column of the table is known"));
    CHECK_THAT(told("global [W/m2]\n5\n", plain()),
               Contains("no column of the table is known to hold its time"));
    CHECK_THAT(told("time,global [W/m2]\n", plain()), Contains("has no row"));
    CHECK_THAT(told("", plain()), Contains("has no row"));
    CHECK_THAT(told("time,global [W/m2]\n2025-06-01T10:00Z\n2025-06-01T11:00Z\n", plain()),
               Contains("the row has 1 cells, not 2"));
    auto wrong = plain();
    wrong.columns[at(Weather::global)] = WeatherColumn{"sun_totl", 0};
    CHECK_THAT(told("time,sun_total\n2025-06-01T10:00Z,1\n", wrong),
               Contains("did you mean \"sun_total\"?"));
    const auto many = told(
        "time,global [W/m2]\n" +
            [] {
                std::string rows;
                for (int i = 0; i < 30; ++i)
                    rows += "2025-06-01T10:" + std::to_string(10 + i) + "Z,x\n";
                return rows;
            }(),
        plain());
    CHECK_THAT(many, Contains("20 more problems"));
}

TEST_CASE("weather: an empty last cell is a missing value like any other",
          "[model][weather][edge]") {
    const std::string sign = GENERATE(",", ";", "\t");
    CAPTURE(sign);
    const auto row = [&](const std::string& time, const std::string& air, const std::string& wind) {
        return time + sign + air + sign + wind + "\n";
    };
    const auto record = read_weather(
        row("time", "air_temperature [degC]", "wind [m/s]") + row("2025-06-01T10:00Z", "20", "") +
            row("2025-06-01T11:00Z", "", "3") + row("2025-06-01T12:00Z", "", ""),
        plain());
    REQUIRE(record.intervals.size() == 3);
    CHECK(record.values(Weather::air_temperature)[0] == Approx(293.15));
    CHECK(record.missing(Weather::air_temperature) == 2);
    CHECK(record.missing(Weather::wind) == 2);
    CHECK(record.values(Weather::wind)[1] == 3);
    // A row that ends before the column has a problem, as ever.
    CHECK_THAT(told(row("time", "air_temperature [degC]", "wind [m/s]") + "2025-06-01T10:00Z" +
                        sign + "20\n",
                    plain()),
               Contains("the row has 2 cells, not 3"));
}

TEST_CASE("weather: rows out of order, doubled or overlapping are refused", "[model][weather]") {
    const auto rows = [](const char* a, const char* b, const char* c) {
        return told(std::string("time,global [W/m2]\n") + a + ",1\n" + b + ",1\n" + c + ",1\n",
                    plain());
    };
    CHECK_THAT(rows("2025-06-01T10:00", "2025-06-01T11:00", "2025-05-01T12:00"),
               Contains("station.csv:4") && Contains("before that of line 3") &&
                   Contains("weather.years: typical"));
    CHECK_THAT(rows("2025-06-01T10:00", "2025-06-01T11:00", "2025-06-01T11:00"),
               Contains("station.csv:4") && Contains("has ended"));
    CHECK_THAT(rows("2025-06-01", "2025-06-02T11:00", "2025-06-03"),
               Contains("some rows have a time of day"));
    CHECK_THAT(rows("2025-01-01T00:00", "2025-02-01T00:00", "2025-03-04T00:00"),
               Contains("days apart"));
    CHECK_THAT(told("time,global [W/m2]\n2025-06-01T10:00,1\n", plain()),
               Contains("weather.interval"));
}

TEST_CASE("weather: a typical year of months from different years stands for each year of the run",
          "[model][weather]") {
    auto format = plain();
    format.stamp = Stamp::end;
    format.typical = WeatherFormat::Years{2024, 2025};
    std::string text = "year,month,day,hour,global [W/m2]\n";
    for (int month = 1; month <= 12; ++month)
        for (int day = 1; day <= days_in_month(2001, month); ++day)
            for (int hour = 1; hour <= 24; ++hour)
                text += std::to_string(1990 + month % 5) + "," + std::to_string(month) + "," +
                        std::to_string(day) + "," + std::to_string(hour) + "," +
                        std::to_string(month * 50 + day) + "\n";
    const auto record = read_weather(text, format);
    CHECK(record.intervals.size() == (366 + 365) * 24);
    CHECK(record.gaps.empty());
    CHECK(record.values(Weather::global)[*record.at(utc("2025-03-07T12:30Z"))] == 157);
    CHECK(record.values(Weather::global)[*record.at(utc("2024-12-31T23:30Z"))] == 631);
    // The 28th stands for the 29th, which the table has not.
    CHECK(record.values(Weather::global)[*record.at(utc("2024-02-29T12:30Z"))] == 128);
    CHECK_THAT(told(text,
                    [&] {
                        auto own = format;
                        own.typical.reset();
                        return own;
                    }()),
               Contains("weather.years: typical"));
}

TEST_CASE("weather: the formats of real networks are read through declarations",
          "[model][weather]") {
    SUNBUDGET_NEEDS_DATA();
    const auto surfrad = test::surfrad_format();
    const auto day = read_weather(real_text("ground/surfrad/bon06197.dat"), surfrad);
    CHECK(day.intervals.size() == 480);
    CHECK(day.interval_s == 180);
    CHECK(day.gaps.empty());
    CHECK(day.intervals[0].end == utc("2006-07-16T00:00Z"));
    CHECK(day.values(Weather::beam)[0] == 557.2);
    CHECK(day.values(Weather::air_temperature)[0] == Approx(273.15 + 31.1));
    CHECK(day.values(Weather::relative_humidity)[0] == Approx(0.683));
    CHECK(day.values(Weather::pressure)[0] == 992.0);
    const auto old = read_weather(real_text("ground/surfrad/bon95001.dat"), surfrad);
    CHECK(old.missing(Weather::air_temperature) == old.intervals.size());
    CHECK(old.missing(Weather::global) < old.intervals.size() / 10);

    auto ameriflux = plain();
    ameriflux.time_columns[0] = WeatherColumn{"TIMESTAMP_START", 0};
    ameriflux.columns[at(Weather::global)] = WeatherColumn{"SW_IN", 0};
    ameriflux.columns[at(Weather::air_temperature)] = WeatherColumn{"TA", 0};
    ameriflux.units[at(Weather::global)] = "W/m2";
    ameriflux.units[at(Weather::air_temperature)] = "degC";
    ameriflux.missing = {-9999};
    ameriflux.zone = Zone::parse("-05:00");
    const auto week = read_weather(
        real_text("ground/ameriflux/AMF_US-CRT_BASE_HH_20110101-20110107.csv"), ameriflux);
    CHECK(week.intervals.size() == 7 * 48);
    CHECK(week.intervals[0].begin == utc("2011-01-01T05:00Z"));
    CHECK(week.values(Weather::air_temperature)[0] == Approx(273.15 + 11.17954));

    auto arm = plain();
    arm.time_columns[0] = WeatherColumn{"time_utc", 0};
    arm.columns[at(Weather::vapour_pressure)] = WeatherColumn{"vapor_pressure_mean", 0};
    arm.units[at(Weather::vapour_pressure)] = "kPa";
    arm.flags[at(Weather::vapour_pressure)] = WeatherColumn{"qc_vapor_pressure_mean", 0};
    const auto minutes =
        read_weather(real_text("ground/arm/sgpmetE13.b1.20190101.000000.csv"), arm);
    CHECK(minutes.interval_s == 60);
    CHECK(minutes.values(Weather::vapour_pressure)[*minutes.at(utc("2019-01-01T11:35:30Z"))] ==
          Approx(2.84));
}

}  // namespace sunbudget
