#pragma once

#include <array>
#include <filesystem>
#include <optional>
#include <string>
#include <variant>
#include <vector>

#include "sunbudget/base/time.hpp"
#include "sunbudget/model/sky.hpp"
#include "sunbudget/model/time_plan.hpp"
#include "sunbudget/model/weather_record.hpp"
#include "sunbudget/plan/place.hpp"
#include "sunbudget/tables/layers.hpp"

namespace sunbudget {

/// A file as the plan names it, and where that is: relative names are relative to the plan's
/// folder.
struct PlanPath {
    std::string given;
    std::filesystem::path file;
    friend bool operator==(const PlanPath& a, const PlanPath& b) { return a.file == b.file; }
};

/// One band of a raster file: PATH, PATH:N or PATH:NAME.
struct PlanRaster {
    PlanPath path;
    std::string band;  ///< a number from 1 or a name; empty: the file's only or first band
    friend bool operator==(const PlanRaster&, const PlanRaster&) = default;
};

/// A value for each month, January first; one number in the plan fills all twelve.
using Monthly = std::array<double, 12>;

/// Hours of the day in the plan's zone, 0 <= begin < end <= 24.
struct HourWindow {
    double begin_h = 0;
    double end_h = 24;
    friend bool operator==(const HourWindow&, const HourWindow&) = default;
};

/// Both days inclusive.
struct NamedPeriod {
    Given<std::string> name;
    Given<CivilDate> from;
    Given<CivilDate> to;
    friend bool operator==(const NamedPeriod&, const NamedPeriod&) = default;
};

enum class FileFormat { cog, geotiff };
enum class DayChoice { all, mid_month };

enum class LikeInput { surface, elevation };

struct PlanGrid {
    Maybe<std::variant<LikeInput, PlanPath>> like;
    Maybe<std::string> crs;
    Maybe<std::array<double, 4>> bounds;  ///< west, south, east, north in the CRS's unit
    Maybe<double> cell;                   ///< in the CRS's unit
    friend bool operator==(const PlanGrid&, const PlanGrid&) = default;
};

/// The name of a table that ships with the program, or a file of the user's.
using TableChoice = std::variant<std::string, PlanPath>;

struct PlanCover {
    Place place;
    Given<PlanRaster> raster;
    Given<TableChoice> classes;
    /// The class that codes without a row get; `default_class: none` is nullopt inside.
    Maybe<std::optional<int>> default_class;
    friend bool operator==(const PlanCover& a, const PlanCover& b) {
        return a.raster == b.raster && a.classes == b.classes && a.default_class == b.default_class;
    }
};

/// Exactly one of `raster` and `value`; scale and offset belong to the raster.
struct PlanAlbedo {
    Place place;
    Maybe<PlanRaster> raster;
    Maybe<double> scale;
    Maybe<double> offset;
    Maybe<double> value;
    Maybe<double> uncertainty;
    friend bool operator==(const PlanAlbedo& a, const PlanAlbedo& b) {
        return a.raster == b.raster && a.scale == b.scale && a.offset == b.offset &&
               a.value == b.value && a.uncertainty == b.uncertainty;
    }
};

/// The plan's names of reflectance bands, in the order of the spectrum.
inline constexpr std::array<const char*, 6> plan_band_names{"blue", "green", "red",
                                                            "nir",  "swir1", "swir2"};

/// Something for each of the bands that are named, in the order of `plan_band_names`.
template <class T>
struct PlanBands {
    Place place;
    std::array<Maybe<T>, plan_band_names.size()> of;
    friend bool operator==(const PlanBands& a, const PlanBands& b) { return a.of == b.of; }
};

/// albedo = constant + sum of weight times reflectance.
struct PlanWeights {
    PlanBands<double> bands;
    Maybe<double> constant;
    friend bool operator==(const PlanWeights&, const PlanWeights&) = default;
};

enum class ProductChoice { automatic, surface_reflectance, top_of_atmosphere };
enum class FillFrom { nodata, cover };
enum class Implausible { stop, allow };

/// Exactly one of `bands` and `scene`; at most one of `method` and `weights`.
struct PlanReflectance {
    Place place;
    Given<std::string> sensor;
    std::optional<PlanBands<PlanRaster>> bands;
    Maybe<PlanPath> scene;
    Maybe<double> scale;
    Maybe<double> offset;
    Maybe<double> nodata;
    Maybe<std::string> method;
    std::optional<PlanWeights> weights;
    Maybe<PlanRaster> quality;
    Maybe<PlanRaster> saturation;
    Maybe<PlanRaster> aerosol;
    Maybe<std::vector<std::string>> reject;  ///< names of quality tests; absent: as the sensor says
    Maybe<FillFrom> fill;
    Maybe<ProductChoice> product;
    Maybe<PlanPath> mtl;
    Maybe<Implausible> implausible;
    friend bool operator==(const PlanReflectance& a, const PlanReflectance& b) {
        return a.sensor == b.sensor && a.bands == b.bands && a.scene == b.scene &&
               a.scale == b.scale && a.offset == b.offset && a.nodata == b.nodata &&
               a.method == b.method && a.weights == b.weights && a.quality == b.quality &&
               a.saturation == b.saturation && a.aerosol == b.aerosol && a.reject == b.reject &&
               a.fill == b.fill && a.product == b.product && a.mtl == b.mtl &&
               a.implausible == b.implausible;
    }
};

/// A raster of a quantity: stored value * scale + offset, in the unit named.
struct PlanFieldRaster {
    PlanRaster raster;
    std::string unit;  ///< as the plan names it; empty for pure numbers
    double scale = 1;
    double offset = 0;
    friend bool operator==(const PlanFieldRaster&, const PlanFieldRaster&) = default;
};
/// Numbers in K, hPa or pure ones, or a raster. Apart by type, since each is written with its own unit.
struct PlanTemperatures {
    std::variant<Monthly, PlanFieldRaster> value;  ///< K
    friend bool operator==(const PlanTemperatures&, const PlanTemperatures&) = default;
};
struct PlanPressures {
    std::variant<Monthly, PlanFieldRaster> value;  ///< hPa
    friend bool operator==(const PlanPressures&, const PlanPressures&) = default;
};
struct PlanShares {
    std::variant<Monthly, PlanFieldRaster> value;
    friend bool operator==(const PlanShares&, const PlanShares&) = default;
};
struct PlanLapse {
    Monthly k_km{};
    friend bool operator==(const PlanLapse&, const PlanLapse&) = default;
};

enum class EmissivityFrom { cover, ndvi };
struct PlanEmissivity {
    std::variant<double, PlanFieldRaster, EmissivityFrom> value;
    friend bool operator==(const PlanEmissivity&, const PlanEmissivity&) = default;
};

/// At most one of them, but for the cover that fills what the image does not show.
struct PlanSurface {
    std::optional<PlanCover> cover;
    std::optional<PlanReflectance> reflectance;
    std::optional<PlanAlbedo> albedo;
    Maybe<PlanEmissivity> emissivity;
    friend bool operator==(const PlanSurface&, const PlanSurface&) = default;
};

struct PlanLength {
    double m = 0;
    friend bool operator==(const PlanLength&, const PlanLength&) = default;
};

enum class HeightUnit { m, ft, us_ft };
enum class SlopeFrom { elevation, flat };

struct PlanTerrain {
    /// Rasters, of which the first that has a value counts; or one height everywhere.
    Maybe<std::variant<std::vector<PlanRaster>, PlanLength>> elevation;
    Maybe<HeightUnit> unit;  ///< of the rasters; default: as the files say
    Maybe<std::variant<SlopeFrom, PlanPath>> slope_from;
    Maybe<int> directions;
    Maybe<PlanLength> reach;
    friend bool operator==(const PlanTerrain&, const PlanTerrain&) = default;
};

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

struct PlanZone {
    Zone zone;
    friend bool operator==(const PlanZone& a, const PlanZone& b) {
        return a.zone.name() == b.zone.name();
    }
};

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
    Maybe<Monthly> cloud;
    Maybe<std::string> cloud_method;
    friend bool operator==(const PlanLongwave&, const PlanLongwave&) = default;
};

enum class SurfaceTable { table };
enum class SurfaceProduct { landsat_c2 };
enum class RasterCovers { instant, period_mean };
enum class HeatSource { balance };

/// A difference of temperatures.
struct PlanDifference {
    double k = 0;
    friend bool operator==(const PlanDifference&, const PlanDifference&) = default;
};
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

/// Has an offset of its own, or the plan has a zone: never both, never neither.
struct PlanInstant {
    WrittenInstant written;
    friend bool operator==(const PlanInstant& a, const PlanInstant& b) {
        return a.written.local.date == b.written.local.date &&
               a.written.local.seconds_of_day == b.written.local.seconds_of_day &&
               a.written.offset_s == b.written.offset_s;
    }
};

/// Nothing, or `at`, or `from` and `to` (inclusive) with what belongs to a period.
struct PlanTime {
    Maybe<PlanInstant> at;
    Maybe<CivilDate> from;
    Maybe<CivilDate> to;
    Maybe<int> step_s;
    Maybe<HourWindow> hours;
    Maybe<PlanZone> zone;
    Maybe<std::variant<Totals, std::vector<NamedPeriod>>> totals;
    Maybe<DayChoice> days;
    friend bool operator==(const PlanTime&, const PlanTime&) = default;
};

struct PlanOutputs {
    Maybe<PlanPath> directory;
    std::vector<Given<LayerId>> layers;  ///< each once, at least one
    Maybe<OutputUnit> unit;
    Maybe<FileFormat> format;
    friend bool operator==(const PlanOutputs&, const PlanOutputs&) = default;
};

struct PlanZones {
    Place place;
    Given<PlanPath> file;
    Maybe<std::string> layer;            ///< of the file
    Maybe<std::string> id;               ///< a field, or "fid"
    std::vector<Given<LayerId>> layers;  ///< each once; empty: every layer of the run
    Maybe<double> above;
    friend bool operator==(const PlanZones& a, const PlanZones& b) {
        return a.file == b.file && a.layer == b.layer && a.id == b.id && a.layers == b.layers &&
               a.above == b.above;
    }
};

/// Where a change is made: polygons, classes of the land cover, or classes inside polygons.
struct PlanWhere {
    Place place;
    Maybe<PlanPath> file;
    Maybe<std::string> layer;  ///< of the file
    Maybe<std::string> query;  ///< an SQL WHERE clause
    Maybe<std::vector<int>> classes;
    friend bool operator==(const PlanWhere& a, const PlanWhere& b) {
        return a.file == b.file && a.layer == b.layer && a.query == b.query &&
               a.classes == b.classes;
    }
};

/// Initial, or aged, or both.
struct PlanChangedAlbedo {
    Place place;
    Maybe<double> initial, aged, low, high;
    friend bool operator==(const PlanChangedAlbedo& a, const PlanChangedAlbedo& b) {
        return a.initial == b.initial && a.aged == b.aged && a.low == b.low && a.high == b.high;
    }
};

/// Exactly one of them.
struct PlanChangedHeight {
    Place place;
    Maybe<PlanLength> add;
    Maybe<std::string> attribute;  ///< metres to add, of the polygons
    Maybe<PlanRaster> raster;
    friend bool operator==(const PlanChangedHeight& a, const PlanChangedHeight& b) {
        return a.add == b.add && a.attribute == b.attribute && a.raster == b.raster;
    }
};

struct PlanChange {
    Place place;
    Given<std::string> name;
    std::optional<PlanWhere> where;
    std::optional<PlanChangedAlbedo> albedo;
    Maybe<int> to_class;  ///< a class of the cover's table
    Maybe<double> emissivity;
    std::optional<PlanChangedHeight> height;
    Maybe<double> treatable;
    Maybe<double> lifetime;
    Maybe<double> cost;
    friend bool operator==(const PlanChange& a, const PlanChange& b) {
        return a.name == b.name && a.where == b.where && a.albedo == b.albedo &&
               a.to_class == b.to_class && a.emissivity == b.emissivity && a.height == b.height &&
               a.treatable == b.treatable && a.lifetime == b.lifetime && a.cost == b.cost;
    }
};

/// What people read of a run.
struct PlanReport {
    Maybe<bool> html;
    std::vector<Given<LayerId>> layers;  ///< each once; empty: every layer of the run
    friend bool operator==(const PlanReport&, const PlanReport&) = default;
};

struct PlanEngine {
    Maybe<int> tile;
    friend bool operator==(const PlanEngine&, const PlanEngine&) = default;
};

/// A plan as written: a key that is absent is absent here. `with_defaults` fills in the defaults.
struct Plan {
    std::string file;  ///< as named by the user; empty for a plan made from flags
    Maybe<std::string> title;
    PlanGrid grid;
    PlanSurface surface;
    PlanTerrain terrain;
    PlanSky sky;
    std::optional<PlanWeather> weather;
    PlanLongwave longwave;
    Maybe<PlanSurfaceTemperature> surface_temperature;
    PlanTime time;
    PlanOutputs outputs;
    std::optional<PlanZones> zones;
    std::vector<PlanChange> changes;
    PlanReport report;
    PlanEngine engine;

    /// Same values; where they stand does not matter.
    friend bool operator==(const Plan& a, const Plan& b) {
        return a.title == b.title && a.grid == b.grid && a.surface == b.surface &&
               a.terrain == b.terrain && a.sky == b.sky && a.weather == b.weather &&
               a.longwave == b.longwave && a.surface_temperature == b.surface_temperature &&
               a.time == b.time && a.outputs == b.outputs && a.zones == b.zones &&
               a.changes == b.changes && a.report == b.report && a.engine == b.engine;
    }
};

/// `key.path=value` as given to --set: lists and quoted texts in YAML's flow style, anything else
/// taken as it stands.
using Override = std::string;

struct PlanText {
    std::string file;  ///< the name in messages; its folder is what relative paths start from
    std::string text;
    std::vector<Override> overrides;
};

/// Reads and checks a plan, every problem at once.
///
/// errors  Error(usage) with one problem per mistake, sorted by line, `where` = "FILE:LINE:
/// key.path"
[[nodiscard]] Plan parse_plan(const PlanText& plan);
/// The same from a file. Throws Error(input) when it cannot be read.
[[nodiscard]] Plan read_plan(const std::filesystem::path& file,
                             const std::vector<Override>& overrides = {});

/// The plan with every default filled in that applies to it; such values say `place.is_default`.
/// Left empty: what follows from the inputs (grid, scale and offset of a raster).
[[nodiscard]] Plan with_defaults(Plan plan);

/// The plan as YAML, keys in the order of the manual, without defaults that nobody wrote. Relative
/// paths stay as given, which is right in the plan's own folder; with a `folder` they are written
/// from there. Reads back as an equal plan.
[[nodiscard]] std::string plan_text(const Plan& plan, const std::filesystem::path& folder = {});

/// SHA-256 of everything that shapes the rasters' content and metadata, defaults included; so not
/// of the output directory, the report, comments, the order of keys or the way numbers are written. Files count
/// by the name the plan gives them: their content has digests of its own.
[[nodiscard]] std::string plan_digest(const Plan& plan);

/// JSON Schema (draft 2020-12) of the plan file.
[[nodiscard]] std::string plan_schema_json();

/// Every key with meaning, unit, choices and default, as a commented plan.
[[nodiscard]] std::string plan_help();

}  // namespace sunbudget
