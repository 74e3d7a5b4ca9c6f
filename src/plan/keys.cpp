#include "keys.hpp"

#include <algorithm>
#include <cassert>
#include <stdexcept>

#include "names.hpp"
#include "sunbudget/base/text.hpp"
#include "sunbudget/model/sky.hpp"
#include "sunbudget/tables/class_table.hpp"
#include "sunbudget/tables/layers.hpp"
#include "sunbudget/tables/methods.hpp"
#include "sunbudget/tables/sensors.hpp"

namespace sunbudget {

namespace {

Form of(ValueKind kind) {
    return {.kind = kind};
}
Form number() {
    return of(ValueKind::number);
}
Form number(double min, double max) {
    return {.kind = ValueKind::number, .min = min, .max = max};
}
Form number_above(double min) {
    return {.kind = ValueKind::number, .min = min, .above_min = true};
}
Form integer(double min, double max) {
    return {.kind = ValueKind::integer, .min = min, .max = max};
}
Form length(double min_m, double max_m) {
    return {.kind = ValueKind::length, .min = min_m, .max = max_m};
}
Form duration(double min_s, double max_s) {
    return {.kind = ValueKind::duration, .min = min_s, .max = max_s};
}
Form quantity(ValueKind kind, double min, double max) {
    return {.kind = kind, .min = min, .max = max};
}
// From below the coldest night of Antarctica to above the hottest ground.
Form temperature() {
    return quantity(ValueKind::temperature, 180, 380);
}
Form path_beside_names() {
    return {.kind = ValueKind::path, .beside_names = true};
}
Form choice(std::vector<std::string> choices) {
    return {.kind = ValueKind::choice, .choices = std::move(choices)};
}
template <std::size_t N>
Form choice(const std::array<std::string_view, N>& names) {
    return choice(std::vector<std::string>(names.begin(), names.end()));
}
Form map(std::vector<Key> keys, std::vector<Rule> rules = {}) {
    return {.kind = ValueKind::map, .keys = std::move(keys), .rules = std::move(rules)};
}
Form list(Form item, double min, std::optional<double> max = {}, bool distinct = false) {
    return {.kind = ValueKind::list, .min = min, .max = max, .distinct = distinct, .items = {item}};
}

Rule exactly_one(std::vector<std::string> keys) {
    return {Rule::Type::exactly_one, std::move(keys)};
}
Rule at_most_one(std::vector<std::string> keys) {
    return {Rule::Type::at_most_one, std::move(keys)};
}
Rule needs(std::string key, std::vector<std::string> others) {
    others.insert(others.begin(), std::move(key));
    return {Rule::Type::needs, std::move(others)};
}

Form grid_form() {
    return map(
        {{"like",
          {choice(like_names), path_beside_names()},
          "the raster whose grid the outputs take; bounds and cell beside it crop or coarsen it"},
         {"crs", {of(ValueKind::text)}, "coordinate reference system, such as EPSG:32633"},
         {"bounds", {list(number(), 4, 4)}, "[west, south, east, north] in the CRS's unit"},
         {"cell", {number_above(0)}, "side of a pixel in the CRS's unit"}},
        {at_most_one({"like", "crs"}), needs("crs", {"bounds", "cell"})});
}

Form cover_form() {
    // Class codes are stored as 16-bit numbers.
    return map({{"raster", {of(ValueKind::raster)}, "land-cover classes", {}, true},
                {"classes",
                 {choice(shipped_class_table_names()), path_beside_names()},
                 "the table of albedo by class: one of ours or a CSV file",
                 {},
                 true},
                {"default_class",
                 {integer(0, 65535), choice({"none"})},
                 "the class that stands in for a code without a row; none: such codes stop the run",
                 "none"}});
}

Form albedo_form() {
    return map({{"raster", {of(ValueKind::raster)}, "broadband albedo"},
                {"scale",
                 {number_above(0)},
                 "albedo = stored value * scale + offset; default: the file's own"},
                {"offset", {number()}, "see scale; default: the file's own"},
                {"value", {number(0, 1)}, "one albedo everywhere"},
                {"uncertainty",
                 {number(0, 1)},
                 "standard uncertainty of the albedo, for the layers albedo_uncertainty and "
                 "net_shortwave_uncertainty"}},
               {exactly_one({"raster", "value"}), needs("scale", {"raster"}),
                needs("offset", {"raster"})});
}

/// The names of all sensors' quality tests, but for "fill", which no plan can choose.
std::vector<std::string> quality_test_names() {
    std::vector<std::string> names;
    for (const auto& sensor : sensors())
        for (const auto& test : sensor.tests)
            if (test.name != "fill" && std::ranges::find(names, test.name) == names.end())
                names.push_back(test.name);
    return names;
}

std::vector<std::string> method_of_weights_names() {
    std::vector<std::string> names;
    for (const auto& set : weight_sets())
        if (std::ranges::find(names, set.name) == names.end()) names.push_back(set.name);
    return names;
}

std::vector<Key> one_key_a_band(const Form& form, const std::string& doc) {
    std::vector<Key> keys;
    for (const auto* name : plan_band_names) keys.push_back({name, {form}, doc});
    return keys;
}

Form weights_form() {
    auto keys = one_key_a_band(number(), "of this band's reflectance");
    keys.push_back({"constant", {number()}, "added to the sum", "0"});
    return map(std::move(keys));
}

Form reflectance_form() {
    const Form raster = of(ValueKind::raster);
    const auto methods = method_of_weights_names();
    return map(
        {{"sensor",
          {choice(sensor_names())},
          "how the numbers are stored; generic: as scale, offset, nodata and weights say",
          {},
          true},
         {"bands",
          {map(one_key_a_band(raster, "surface reflectance"))},
          "a raster for each band; one that the method does not need is left alone"},
         {"scene", {of(ValueKind::path)}, "a product's folder, whose files are found by name"},
         {"scale",
          {number_above(0)},
          "reflectance = stored value * scale + offset; default: the file's own, else the "
          "sensor's"},
         {"offset", {number()}, "see scale; default beside a scale: the sensor's"},
         {"nodata", {number()}, "no data; default: the file's own, else the sensor's"},
         {"method", {choice(methods)}, "published weights of the bands", methods.front()},
         {"weights",
          {weights_form()},
          "weights of one's own: albedo = constant + sum of weight * reflectance"},
         {"quality", {raster}, "the product's quality bits (Landsat: QA_PIXEL)"},
         {"saturation", {raster}, "bands that were blinded (Landsat: QA_RADSAT)"},
         {"aerosol", {raster}, "quality of the aerosol (Landsat: SR_QA_AEROSOL)"},
         {"reject",
          {list(choice(quality_test_names()), 0, {}, true)},
          "what the image's pixels are not used for; default: all but snow, which is a surface, "
          "and high_aerosol"},
         {"fill",
          {choice(fill_names)},
          "what pixels without an image get: no data, or the albedo of surface.cover",
          "nodata"},
         {"product",
          {choice(product_names)},
          "what the numbers are; auto: recognised by names and metadata, else refused",
          "auto"},
         {"mtl",
          {of(ValueKind::path)},
          "the scene's metadata file; default: found beside the bands"},
         {"implausible",
          {choice(implausible_names)},
          "values unlike surface reflectance stop the run, or warn",
          "stop"}},
        {exactly_one({"bands", "scene"}), at_most_one({"method", "weights"}),
         needs("offset", {"scale"})});
}

/// A number, one for each month, or a raster in a unit that is named.
std::vector<Form> field_forms(const Form& one, const std::vector<std::string>& units) {
    std::vector<Key> keys{{"raster",
                           {of(ValueKind::raster)},
                           "a value for each pixel, taken as it is there",
                           {},
                           true}};
    if (!units.empty()) keys.push_back({"unit", {choice(units)}, "of the raster", {}, true});
    keys.push_back(
        {"scale", {number_above(0)}, "value = stored value * scale + offset, in that unit", {}});
    keys.push_back({"offset", {number()}, "see scale", {}});
    return {one, list(one, 12, 12), map(std::move(keys))};
}

Form emissivity_form() {
    return map(
        {{"raster", {of(ValueKind::raster)}, "emissivity of each pixel"},
         {"scale", {number_above(0)}, "emissivity = stored value * scale + offset"},
         {"offset", {number()}, "see scale"},
         {"from",
          {choice(emissivity_from_names)},
          "cover: of the class; ndvi: from the image (Sobrino 2004), built kinds of a cover keep "
          "their class's"}},
        {exactly_one({"raster", "from"}), needs("scale", {"raster"}), needs("offset", {"raster"})});
}

Form surface_form() {
    return map({{"cover", {cover_form()}, "albedo from land cover"},
                {"reflectance", {reflectance_form()}, "albedo from an image's surface reflectance"},
                {"albedo", {albedo_form()}, "albedo as given"},
                {"emissivity",
                 {number(0, 1), emissivity_form()},
                 "share of a black body's heat radiation: a number, or a map with raster, or with "
                 "from; default: of the cover's classes"}},
               {at_most_one({"cover", "albedo"}), at_most_one({"reflectance", "albedo"})});
}

Form terrain_form() {
    // From below the shore of the Dead Sea to above Everest.
    const Form raster = of(ValueKind::raster);
    return map({{"elevation",
                 {length(-500, 9000), raster, list(raster, 1)},
                 "heights above sea level: a raster, several of which the first with a value "
                 "counts, or one height everywhere"},
                {"unit",
                 {choice(height_unit_names)},
                 "of the rasters' heights; default: as the files say"},
                {"slope_from",
                 {choice(slope_from_names), path_beside_names()},
                 "planes of the surface: of the elevation, level, or of another (bare-ground) "
                 "raster; shadows are always the elevation's",
                 "elevation"},
                {"directions",
                 {integer(8, 360)},
                 "in which horizons are looked for, a multiple of 4",
                 "64"},
                {"reach", {length(100, 100000)}, "how far a horizon is looked for", "20 km"}},
               {needs("unit", {"elevation"}), needs("slope_from", {"elevation"}),
                needs("directions", {"elevation"}), needs("reach", {"elevation"})});
}

/// The parameter in the first model that has it: its range is the widest, its default theirs all.
const Parameter& sky_parameter(std::string_view name) {
    for (const auto& model : method_names("clear_sky"))
        if (const auto* parameter = method("clear_sky", model).parameter(name)) return *parameter;
    throw std::logic_error("a sky parameter without a model");
}

std::string models_with(std::string_view parameter) {
    std::vector<std::string> names;
    for (const auto& model : method_names("clear_sky"))
        if (method("clear_sky", model).parameter(parameter) != nullptr) names.push_back(model);
    return joined(names, ", ");
}

// Ranges and defaults come from the models' own rows.
Key sky_parameter_key(SkyParameter id) {
    const auto name = std::string(name_of(id));
    const auto& parameter = sky_parameter(name);
    const auto& [low, high, low_open] = parameter.allowed;
    const Form one{.kind = ValueKind::number, .min = low, .max = high, .above_min = low_open};
    std::vector<Form> forms{one, list(one, 12, 12)};
    if (may_be_raster(id)) forms.push_back({.kind = ValueKind::raster, .beside_names = true});
    auto doc = parameter.text + (parameter.unit == "1" ? "" : ", " + parameter.unit) +
               "; one number or one per month";
    if (may_be_raster(id)) doc += ", or a raster with one band or one per month";
    return {name, std::move(forms), doc + " (" + models_with(name) + ")",
            parameter.default_value ? shortest(*parameter.default_value) : std::string()};
}

Form sky_form() {
    const auto models = method_names("clear_sky");
    std::vector<Key> keys{{"model", {choice(models)}, "clear-sky model", models.front()}};
    for (std::size_t i = 0; i < sky_parameter_count; ++i)
        keys.push_back(sky_parameter_key(static_cast<SkyParameter>(i)));
    keys.push_back({"diffuse",
                    {choice(method_names("diffuse_sky"))},
                    "how the sky's light is spread over the sky, for inclined ground",
                    "hay-davies1980"});
    keys.push_back({"uncertainty",
                    {number(0, 1)},
                    "relative standard uncertainty of the light; default: 0.07, what a turbidity "
                    "not fitted to measurements is worth, "
                    "0.05 under a measured sky, 0.10 under clouds"});
    keys.push_back({"cloud",
                    {number(0, 1), list(number(0, 1), 12, 12), of(ValueKind::raster)},
                    "share of the sky under cloud, one number, one per month, or a raster (a file "
                    "with a band for each period, or one "
                    "for all): over a period a mixture of clear and overcast, at an instant Kasten "
                    "& Czeplak 1980"});
    keys.push_back({"overcast",
                    {number(0, 1), list(number(0, 1), 12, 12)},
                    "light under a closed cover as a share of the clear sky's; default: 0.25"});
    keys.push_back({"sunshine",
                    {list(number(0, 24), 12, 12)},
                    "mean hours of sunshine a day for each month: light by Angstrom-Prescott, "
                    "worked out for the middle of the grid"});
    keys.push_back(
        {"angstrom",
         {list(number(0, 1), 2, 2)},
         "[a, b] of global = (a + b n/N) of the light outside the air; default: 0.25 and 0.50"});
    keys.push_back(
        {"index",
         {of(ValueKind::raster), list(of(ValueKind::raster), 1)},
         "clear-sky index, global over the clear sky's: a raster for each period, or one for all"});
    return map(std::move(keys),
               {at_most_one({"cloud", "sunshine"}), at_most_one({"cloud", "index"}),
                at_most_one({"sunshine", "index"}), needs("overcast", {"cloud"}),
                needs("angstrom", {"sunshine"})});
}

std::vector<Key> one_key_a_quantity(const std::vector<Form>& forms, const std::string& doc) {
    std::vector<Key> keys;
    for (const auto* name : weather_names) keys.push_back({name, forms, doc});
    return keys;
}

Form weather_columns_form() {
    const std::vector<Form> column{of(ValueKind::text), integer(1, 10000)};
    std::vector<Key> keys;
    for (const auto* name : weather_time_names)
        keys.push_back({name, column,
                        std::string(name) == "time" ? "instants, or days" : "a part of the time"});
    const auto quantities =
        one_key_a_quantity(column, "by name in the header, or by number from 1");
    keys.insert(keys.end(), quantities.begin(), quantities.end());
    return map(std::move(keys));
}

Form weather_units_form() {
    std::vector<Key> keys;
    for (std::size_t i = 0; i < weather_quantities; ++i)
        keys.push_back({weather_names[i],
                        {choice(weather_units(static_cast<Weather>(i)))},
                        "of the column; energies are sums over the interval"});
    return map(std::move(keys));
}

// Steps from a minute to a day; heights as of the terrain.
Form weather_form() {
    std::vector<Rule> rules;
    for (const auto* key :
         {"columns", "units", "flags", "good_flags", "missing", "separator", "decimal", "header",
          "skip", "comment", "time_form", "stamp", "interval", "zone", "years", "gaps", "station"})
        rules.push_back(needs(key, {"table"}));
    for (const auto* key : {"air_temperature", "air_temperature_max", "air_temperature_min",
                            "relative_humidity", "dew_point", "vapour_pressure"})
        rules.push_back(at_most_one({"table", key}));
    rules.push_back(needs("air_temperature_max", {"air_temperature_min"}));
    rules.push_back(needs("air_temperature_min", {"air_temperature_max"}));
    rules.push_back(at_most_one({"relative_humidity", "dew_point"}));
    rules.push_back(at_most_one({"relative_humidity", "vapour_pressure"}));
    rules.push_back(at_most_one({"dew_point", "vapour_pressure"}));
    return map(
        {{"table", {of(ValueKind::path)}, "a station's record, rows in order of time"},
         {"columns",
          {weather_columns_form()},
          "which columns to take; default: those with the names of quantities"},
         {"units",
          {weather_units_form()},
          "of the columns; default: what stands in brackets in the header, as in air_temperature "
          "[degC]"},
         {"flags",
          {map(one_key_a_quantity({of(ValueKind::text), integer(1, 10000)},
                                  "the column with this quantity's quality"))},
          "columns of quality numbers: values with other ones than good_flags are missing"},
         {"good_flags", {number(), list(number(), 1)}, "flags of values that count", "0"},
         {"missing",
          {number(), list(number(), 1)},
          "numbers that mean no value, such as -9999; empty cells and NaN always do"},
         {"separator", {choice(separator_names)}, "between cells", "auto"},
         {"decimal", {choice(decimal_names)}, "sign in numbers", "point"},
         {"header", {choice(header_names)}, "none: columns go by their numbers", "line"},
         {"skip", {integer(0, 10000)}, "lines in front that are left out", "0"},
         {"comment", {of(ValueKind::text)}, "lines that begin so are left out", "#"},
         {"time_form",
          {of(ValueKind::text)},
          "how times are written, such as DD/MM/YYYY hh:mm; default: 2025-06-21T12:00 or "
          "202506211200"},
         {"stamp", {choice(stamp_names)}, "what a row's time is of its interval", "start"},
         {"interval",
          {duration(60, 86400)},
          "length of a row's interval; default: as the rows are apart"},
         {"zone",
          {of(ValueKind::zone)},
          "of the rows' times: UTC, an offset, an IANA name, solar-mean or solar-true",
          "UTC"},
         {"years",
          {choice(years_names)},
          "typical: the rows stand for every year, whatever theirs is",
          "own"},
         {"gaps",
          {choice(gaps_names)},
          "report: a day needs 90 % of its light and a month 80 % of its days, else no data; "
          "smaller gaps take the day's or month's mean; stop: a sunlit gap stops the run",
          "report"},
         {"station",
          {list(number(-180, 180), 2, 2)},
          "[latitude, longitude] in degrees; default: the middle of the grid"},
         {"station_elevation",
          {length(-500, 9000)},
          "height above sea level at which table or numbers hold; default: that of the ground "
          "where it is one height, numbers hold at every height"},
         {"air_temperature", field_forms(temperature(), {"degC", "K"}),
          "without a table: one temperature, one per month, or {raster, unit, scale, offset}"},
         {"air_temperature_max",
          {temperature(), list(temperature(), 12, 12)},
          "the day's highest, for longwave.method fao56 and asce2005 without a table: one, or one "
          "per month"},
         {"air_temperature_min",
          {temperature(), list(temperature(), 12, 12)},
          "the day's lowest, likewise"},
         {"relative_humidity", field_forms(number(0, 1), {}), "as air_temperature, from 0 to 1"},
         {"dew_point", field_forms(temperature(), {"degC", "K"}), "as air_temperature"},
         {"vapour_pressure",
          field_forms(quantity(ValueKind::pressure, 0, 100), {"hPa", "kPa", "Pa"}),
          "as air_temperature"},
         {"lapse",
          {quantity(ValueKind::lapse, -50, 50), list(quantity(ValueKind::lapse, -50, 50), 12, 12)},
          "how much colder the air is for each km up; negative in an inversion",
          "6.5 K/km"},
         {"wind",
          {choice(wind_names), quantity(ValueKind::speed, 0, 110),
           list(quantity(ValueKind::speed, 0, 110), 12, 12)},
          "below 2, 2 to 6, 6 to 10 m/s, or a speed: for a balanced surface temperature and the "
          "solar reflectance index; default: the table's wind at the instant, else medium"},
         {"pressure",
          {quantity(ValueKind::pressure, 300, 1100),
           list(quantity(ValueKind::pressure, 300, 1100), 12, 12)},
          "of the air, for the clear sky and for refraction: one, or one per month; default: the "
          "table's column, else the standard atmosphere's"},
         {"pressure_at",
          {choice(pressure_at_names)},
          "where the pressure holds: at the station, or brought down to the sea; default: "
          "station"}},
        std::move(rules));
}

Form longwave_form() {
    auto methods = method_names("longwave");
    methods.push_back("measured");
    for (const auto& name : method_names("longwave_daily")) methods.push_back(name);
    auto laws = method_names("longwave_cloud");
    std::erase(
        laws,
        "crawford-duchon1999");  // its number comes from sunlight, not from a share of the sky
    return map(
        {{"method",
          {choice(methods)},
          "the clear sky's heat radiation; fao56 and asce2005: the net of whole days after those "
          "papers; default: measured where the table has longwave_down, else " +
              methods.front()},
         {"cloud",
          {number(0, 1), list(number(0, 1), 12, 12)},
          "share of the sky; default: the table's cloud, else told from its global (Crawford & "
          "Duchon 1999); without a table that of sky.cloud, else none"},
         {"cloud_method", {choice(laws)}, "what a share of cloud adds; default: " + laws.front()}});
}

std::vector<Form> surface_temperature_forms() {
    return {temperature(), choice(surface_table_names), list(temperature(), 12, 12),
            map({{"raster", {of(ValueKind::raster)}, "temperature of each pixel"},
                 {"product",
                  {choice(surface_product_names)},
                  "Landsat Collection 2 Level-2: K = stored value * 0.00341802 + 149; default: "
                  "told by the file's name"},
                 {"quality",
                  {of(ValueKind::raster)},
                  "the scene's QA_PIXEL: what lies under clouds and their shadows has no "
                  "temperature; default: that file beside a Landsat raster"},
                 {"unit",
                  {choice({"K", "degC"})},
                  "of the raster; default: as the product or the file says"},
                 {"scale",
                  {number_above(0)},
                  "temperature = stored value * scale + offset, in that unit"},
                 {"offset", {number()}, "see scale"},
                 {"time",
                  {of(ValueKind::instant)},
                  "when it was taken, with its offset from UTC; default: as the product says"},
                 {"covers",
                  {choice(raster_covers_names)},
                  "period-mean: the raster holds the mean of each of the run's periods",
                  "instant"},
                 {"air_plus",
                  {quantity(ValueKind::difference, -50, 80)},
                  "the air's temperature and so much more"},
                 {"from",
                  {choice(heat_source_names)},
                  "steady balance of light, heat radiation and air, of dry built and bare kinds at "
                  "an instant"}},
                {exactly_one({"raster", "air_plus", "from"}), needs("product", {"raster"}),
                 needs("quality", {"raster"}), needs("unit", {"raster"}),
                 needs("scale", {"raster"}), needs("offset", {"raster"}), needs("time", {"raster"}),
                 needs("covers", {"raster"}), at_most_one({"product", "scale"}),
                 at_most_one({"product", "offset"}), at_most_one({"product", "unit"})})};
}

Form period_form() {
    return map({{"name", {of(ValueKind::text)}, "becomes the band's description", {}, true},
                {"from", {of(ValueKind::date)}, "first day", {}, true},
                {"to", {of(ValueKind::date)}, "last day, inclusive", {}, true}});
}

Form time_form() {
    return map(
        {{"at", {of(ValueKind::instant)}, "one instant, with its offset from UTC or in the zone"},
         {"from", {of(ValueKind::date)}, "first day"},
         {"to", {of(ValueKind::date)}, "last day, inclusive"},
         {"step", {duration(60, 3600)}, "between two positions of the sun", "10 min"},
         {"hours", {of(ValueKind::hours)}, "only this part of each day; default: the whole day"},
         {"zone",
          {of(ValueKind::zone)},
          "what days and hours mean: UTC, an offset, an IANA name, solar-mean or solar-true",
          "solar-mean"},
         {"totals",
          {choice(totals_names), list(period_form(), 1)},
          "one band for each of these periods",
          "whole"},
         {"days",
          {choice(day_names)},
          "every day, or one day for each month weighted by the month's length (Klein 1977; not "
          "beyond 60 degrees)",
          "all"}},
        {exactly_one({"at", "from"}), needs("from", {"to"}), needs("to", {"from"}),
         needs("step", {"from"}), needs("hours", {"from"}), needs("totals", {"from"}),
         needs("days", {"from"})});
}

Form outputs_form() {
    return map({{"directory", {of(ValueKind::path)}, "folder of all outputs", "out"},
                {"layers",
                 {list(choice(layer_names()), 1, {}, true)},
                 "what to write, one file each",
                 {},
                 true},
                {"unit",
                 {choice(output_unit_names())},
                 "of radiation: the period's mean (W/m2) or its sum (MJ/m2, kWh/m2)",
                 "W/m2"},
                {"format", {choice(format_names)}, "cloud-optimised or plain GeoTIFF", "cog"}});
}

Form zones_form() {
    return map({{"file",
                 {of(ValueKind::path)},
                 "polygons: GeoPackage, GeoJSON, shapefile or FlatGeobuf, in any CRS",
                 {},
                 true},
                {"layer", {of(ValueKind::text)}, "of the file; default: its only one"},
                {"id", {of(ValueKind::text)}, "the field that names a zone, or fid", "fid"},
                {"layers",
                 {list(choice(layer_names()), 1, {}, true)},
                 "layers of the run to give figures of, uncertainties beside them; default: all "
                 "but aspect and quality"},
                {"above",
                 {number()},
                 "also give the share of each zone above this value, in the layers' unit"}});
}

Form change_form() {
    const Form where =
        map({{"file", {of(ValueKind::path)}, "polygons, as in zones.file"},
             {"layer", {of(ValueKind::text)}, "of the file; default: its only one"},
             {"query",
              {of(ValueKind::text)},
              "which of them, as in SQL after WHERE: kind = 'flat' AND area_m2 > 100"},
             {"classes",
              {list(integer(0, 65535), 1, {}, true)},
              "only ground of these classes of surface.cover"}},
            {needs("layer", {"file"}), needs("query", {"file"})});
    const Form albedo = map(
        {{"initial", {number(0, 1)}, "when new"},
         {"aged",
          {number(0, 1)},
          "after some years, what the run computes with; default: 0.20 + 0.70 (initial - 0.20)"},
         {"low", {number(0, 1)}, "the least to expect: how much is saved then is written too"},
         {"high", {number(0, 1)}, "the most to expect, likewise"}});
    const Form height =
        map({{"add", {length(-500, 1000)}, "the same everywhere: 8 m, or -8 m"},
             {"attribute", {of(ValueKind::text)}, "a field of the polygons, in metres to add"},
             {"raster",
              {of(ValueKind::raster)},
              "the heights after, in metres; where it has no value nothing changes"}},
            {exactly_one({"add", "attribute", "raster"})});
    return map(
        {{"name",
          {of(ValueKind::text)},
          "letters, digits, - and _: becomes part of file names",
          {},
          true},
         {"where", {where}, "default: everywhere"},
         {"albedo", {albedo}, "of what is treated"},
         {"class",
          {integer(0, 65535)},
          "what the ground turns into, a class of surface.cover's table: its albedo counts, "
          "whether it is dry, and where the run's emissivity is by class also its emissivity"},
         {"emissivity",
          {{.kind = ValueKind::number, .min = 0, .max = 1, .above_min = true}},
          "of what is treated: heat radiation, net radiation, balanced temperature and sri follow"},
         {"height",
          {height},
          "what becomes of the elevation: trees, roofs; shadows and light are worked out anew"},
         {"treatable",
          {{.kind = ValueKind::number, .min = 0, .max = 1, .above_min = true}},
          "share of the place that can be treated",
          "1"},
         {"lifetime", {number_above(0)}, "in years"},
         {"cost",
          {number_above(0)},
          "of each treated square metre of map, in a currency of your own"}},
        {at_most_one({"albedo", "class"})});
}

Form report_form() {
    return map({{"html",
                 {of(ValueKind::boolean)},
                 "report.html: maps, curves, tables and sources in one file that opens anywhere",
                 "false"},
                {"layers",
                 {list(choice(layer_names()), 1, {}, true)},
                 "layers of the run to show; default: all of them"}},
               {needs("layers", {"html"})});
}

Form engine_form() {
    return map({{"tile",
                 {{.kind = ValueKind::integer, .choices = {"128", "256", "512", "1024"}}},
                 "side of a file's tile in pixels",
                 "512"}});
}

}  // namespace

const Form& plan_form() {
    static const Form form =
        map({{"sunbudget", {integer(1, 1)}, "version of the plan's format", {}, true},
             {"title", {of(ValueKind::text)}, "for reports and metadata"},
             {"grid", {grid_form()}, "default: the surface raster's grid, else the elevation's"},
             {"surface", {surface_form()}, "where albedo comes from"},
             {"terrain", {terrain_form()}, "default: flat ground at 0 m"},
             {"sky", {sky_form()}, "the cloudless atmosphere"},
             {"weather", {weather_form()}, "what was measured, or the air in numbers"},
             {"longwave", {longwave_form()}, "heat radiation of the sky"},
             {"surface_temperature", surface_temperature_forms(),
              "of the ground: one, one per month, table (the weather's column), or one of raster, "
              "air_plus and from"},
             {"time", {time_form()}, "needed by every layer of radiation"},
             {"outputs", {outputs_form()}, "what to write", {}, true},
             {"zones",
              {zones_form()},
              "parcels, blocks or wards to give figures of, in zones.csv and zones.gpkg"},
             {"changes", {list(change_form(), 1)}, "what-ifs, computed beside the run as it is"},
             {"report", {report_form()}, "what people read of the run"},
             {"engine", {engine_form()}, "rarely needed"}});
    return form;
}

const Key& plan_key(std::string_view path) {
    const std::vector<Key>* keys = &plan_form().keys;
    const Key* key = nullptr;
    for (const auto& name : split(path, '.')) {
        const auto found = std::ranges::find(*keys, name, &Key::name);
        assert(found != keys->end());
        key = &*found;
        const auto& form = key->forms.front();
        keys = form.kind == ValueKind::list ? &form.items.front().keys : &form.keys;
    }
    return *key;
}

std::vector<std::string> names_of(const std::vector<Key>& keys) {
    std::vector<std::string> names;
    for (const auto& key : keys) names.push_back(key.name);
    return names;
}

}  // namespace sunbudget
