#pragma once

#include <array>
#include <optional>
#include <string>
#include <variant>
#include <vector>

#include "sunbudget/model/sky.hpp"
#include "sunbudget/model/weather_record.hpp"
#include "sunbudget/plan/plan_values.hpp"

namespace sunbudget {

/// A number or twelve; or a raster: one band for all months, or twelve.
using PlanSkyNumbers = std::variant<Monthly, PlanRaster>;

struct PlanSky {
    Maybe<std::string> model;
    std::array<Maybe<PlanSkyNumbers>, sky_parameter_count>
        parameters;  ///< in the order of SkyParameter
    Maybe<std::string> diffuse;
    Maybe<double> uncertainty;  ///< relative, of the light

    [[nodiscard]] const Maybe<PlanSkyNumbers>& operator[](SkyParameter parameter) const {
        return parameters[static_cast<std::size_t>(parameter)];
    }
    Maybe<std::variant<Monthly, std::vector<PlanRaster>>> cloud;
    Maybe<Monthly> overcast;
    Maybe<Monthly> sunshine;  ///< hours a day
    Maybe<std::array<double, 2>> angstrom;
    Maybe<std::vector<PlanRaster>> index;
    friend bool operator==(const PlanSky&, const PlanSky&) = default;
};

/// Something for each quantity of a weather table that is named, in the order of `weather_names`; columns
/// also for the parts of a time.
template <class T>
struct PlanOfWeather {
    Place place;
    std::array<Maybe<T>, weather_time_names.size()> of_time;
    std::array<Maybe<T>, weather_quantities> of;
    friend bool operator==(const PlanOfWeather& a, const PlanOfWeather& b) {
        return a.of_time == b.of_time && a.of == b.of;
    }
};

enum class HeaderChoice { line, none };
enum class DecimalSign { point, comma };
enum class Years { own, typical };
enum class Gaps { report, stop };

enum class WindCase { low, medium, high };
struct PlanWind {
    std::variant<WindCase, Monthly> value;  ///< m/s
    friend bool operator==(const PlanWind&, const PlanWind&) = default;
};
enum class PressureAt { station, sea_level };

struct PlanWeather {
    Place place;
    Maybe<PlanPath> table;
    std::optional<PlanOfWeather<WeatherColumn>> columns;
    std::optional<PlanOfWeather<std::string>> units;
    std::optional<PlanOfWeather<WeatherColumn>> flags;
    Maybe<std::vector<double>> good_flags;
    Maybe<std::vector<double>> missing;
    Maybe<Separator> separator;
    Maybe<DecimalSign> decimal;
    Maybe<HeaderChoice> header;
    Maybe<int> skip;
    Maybe<std::string> comment;
    Maybe<std::string> time_form;
    Maybe<Stamp> stamp;
    Maybe<int> interval_s;
    Maybe<PlanZone> zone;
    Maybe<Years> years;
    Maybe<Gaps> gaps;
    Maybe<std::array<double, 2>> station;  ///< latitude, longitude in degrees
    Maybe<PlanLength> station_elevation;
    // Without a table.
    Maybe<PlanTemperatures> air_temperature;
    Maybe<PlanTemperatures> air_temperature_max;  ///< of a day, for daily methods: numbers alone
    Maybe<PlanTemperatures> air_temperature_min;
    Maybe<PlanShares> relative_humidity;
    Maybe<PlanTemperatures> dew_point;
    Maybe<PlanPressures> vapour_pressure;
    Maybe<PlanLapse> lapse;
    Maybe<PlanWind> wind;
    Maybe<PlanPressures> pressure;  ///< numbers alone
    Maybe<PressureAt> pressure_at;
    friend bool operator==(const PlanWeather& a, const PlanWeather& b) {
        return a.table == b.table && a.columns == b.columns && a.units == b.units &&
               a.flags == b.flags && a.good_flags == b.good_flags && a.missing == b.missing &&
               a.separator == b.separator && a.decimal == b.decimal && a.header == b.header &&
               a.skip == b.skip && a.comment == b.comment && a.time_form == b.time_form &&
               a.stamp == b.stamp && a.interval_s == b.interval_s && a.zone == b.zone &&
               a.years == b.years && a.gaps == b.gaps && a.station == b.station &&
               a.station_elevation == b.station_elevation &&
               a.air_temperature == b.air_temperature &&
               a.air_temperature_max == b.air_temperature_max &&
               a.air_temperature_min == b.air_temperature_min &&
               a.relative_humidity == b.relative_humidity && a.dew_point == b.dew_point &&
               a.vapour_pressure == b.vapour_pressure && a.lapse == b.lapse && a.wind == b.wind &&
               a.pressure == b.pressure && a.pressure_at == b.pressure_at;
    }
};

struct PlanLongwave {
    Maybe<std::string> method;
    Maybe<std::variant<Monthly, std::vector<PlanRaster>>> cloud;
    Maybe<std::string> cloud_method;
    Maybe<std::variant<Monthly, std::vector<PlanRaster>>> down;  ///< W m-2
    friend bool operator==(const PlanLongwave&, const PlanLongwave&) = default;
};

enum class SurfaceTable { table };
enum class SurfaceProduct { landsat_c2 };
enum class RasterCovers { instant, period_mean };
enum class HeatSource { balance };

/// A raster of temperatures and when it was taken.
struct PlanSurfaceRaster {
    PlanRaster raster;
    std::optional<SurfaceProduct> product;  ///< says unit, scale, offset and nodata
    std::optional<PlanRaster> quality;      ///< Landsat: QA_PIXEL
    std::string unit;                       ///< K or degC; empty: as the product or the file says
    std::optional<double> scale;
    std::optional<double> offset;
    std::string time;  ///< an instant with its offset; empty: as the product says
    RasterCovers covers = RasterCovers::instant;
    friend bool operator==(const PlanSurfaceRaster&, const PlanSurfaceRaster&) = default;
};

struct PlanSurfaceTemperature {
    std::variant<Monthly, SurfaceTable, PlanSurfaceRaster, PlanDifference, HeatSource>
        value;  ///< numbers in K
    friend bool operator==(const PlanSurfaceTemperature&, const PlanSurfaceTemperature&) = default;
};

}  // namespace sunbudget
