#include <algorithm>
#include <cmath>

#include "fill.hpp"
#include "reflectance.hpp"
#include "sunbudget/base/text.hpp"
#include "sunbudget/tables/methods.hpp"
#include "sunbudget/tables/sensors.hpp"

namespace sunbudget {

namespace {

class CrossCheck {
  public:
    CrossCheck(const Plan& plan, const Node& root, Mistakes& mistakes)
        : plan_(plan), root_(root), mistakes_(mistakes) {}

    void all() const {
        bounds();
        grid_source();
        instant_zone();
        dates();
        named_periods();
        layers();
        unit();
        directions();
        zones();
        report();
        sky();
        for (const auto& change : plan_.changes) this->change(change);
        if (plan_.weather) weather(*plan_.weather);
        if (plan_.surface.reflectance) reflectance(*plan_.surface.reflectance);
    }

  private:
    // Whether the key is written at all, right or wrong: a wrong one has its own problem already.
    [[nodiscard]] bool written(std::string_view path) const {
        const Node* node = &root_;
        for (const auto& name : split(path, '.'))
            if (node = node->find(name); node == nullptr) return false;
        return true;
    }
    [[nodiscard]] Place place_of(const char* section, const char* key) const {
        return root_.find(section)->find(key)->place;
    }
    [[nodiscard]] bool has_surface_raster() const {
        return written("surface.cover") || written("surface.reflectance") ||
               written("surface.albedo.raster");
    }
    [[nodiscard]] bool has_elevation_raster() const {
        const auto& elevation = plan_.terrain.elevation;
        if (!elevation) return written("terrain.elevation");
        return std::holds_alternative<std::vector<PlanRaster>>(**elevation);
    }

    void bounds() const;
    void grid_source() const;
    void instant_zone() const;
    void dates() const;
    void named_periods() const;
    void named_period(const NamedPeriod& period) const;
    void layers() const;
    void heat_layers() const;
    void daily_longwave() const;
    void unit() const;
    void directions() const;
    void zones() const;
    void report() const;
    void sky() const;
    void change(const PlanChange& change) const;
    void change_name(const PlanChange& change) const;
    void change_albedo(const PlanChange& change) const;
    void change_height(const PlanChange& change) const;
    void weather(const PlanWeather& weather) const;
    void reflectance(const PlanReflectance& image) const;
    void reflectance_weights(const PlanReflectance& image) const;
    void quality_tests(const PlanReflectance& image) const;
    /// Written, and wrong by itself.
    [[nodiscard]] bool image_is_bad(const char* key) const;
    void layers_without(bool Layer::*need, const std::string& what, const std::string& todo) const;

    const Plan& plan_;
    const Node& root_;
    Mistakes& mistakes_;
};

void CrossCheck::bounds() const {
    if (!plan_.grid.bounds) return;
    const auto& [west, south, east, north] = **plan_.grid.bounds;
    if (west >= east || south >= north)
        mistakes_.add(plan_.grid.bounds->place, "the bounds enclose nothing",
                      "write them as [west, south, east, north]");
}

void CrossCheck::grid_source() const {
    const auto& like = plan_.grid.like;
    const auto* input = like ? std::get_if<LikeInput>(&**like) : nullptr;
    if (input != nullptr && *input == LikeInput::surface && !has_surface_raster())
        mistakes_.add(like->place, "the plan has no surface raster to take the grid from",
                      "add surface.cover, surface.reflectance or surface.albedo.raster, or name a "
                      "raster here");
    if (input != nullptr && *input == LikeInput::elevation && !has_elevation_raster())
        mistakes_.add(like->place, "the plan has no elevation raster to take the grid from",
                      "add terrain.elevation, or name a raster here");
    if (!written("grid.like") && !written("grid.crs") && !has_surface_raster() &&
        !has_elevation_raster())
        mistakes_.add(root_.place, "nothing says which grid the outputs have",
                      "add grid with crs, bounds and cell, or an input raster");
}

void CrossCheck::weather(const PlanWeather& weather) const {
    const bool has_numbers = written("weather.air_temperature") ||
                             written("weather.air_temperature_max") ||
                             written("weather.relative_humidity") || written("weather.dew_point") ||
                             written("weather.vapour_pressure") || written("weather.wind") ||
                             written("weather.pressure");
    if (!weather.table && !written("weather.table") && !has_numbers)
        mistakes_.add(weather.place, "the weather has no table and no numbers",
                      "add table: FILE, or air_temperature and a humidity, or remove weather");
    if (weather.pressure_at && !written("weather.table") && !written("weather.pressure"))
        mistakes_.add(weather.pressure_at->place, "there is no pressure",
                      "give pressure, or a table with a column of it");
    if (weather.station && std::abs((**weather.station)[0]) > 90)
        mistakes_.add(weather.station->place,
                      "no place has the latitude " + shortest((**weather.station)[0]),
                      "write [latitude, longitude], such as [52.5, 13.4]");
}

void CrossCheck::instant_zone() const {
    if (!plan_.time.at) return;
    const bool has_offset = plan_.time.at->value.written.offset_s.has_value();
    if (!has_offset && !written("time.zone"))
        mistakes_.add(plan_.time.at->place, "the instant has neither an offset nor a zone",
                      "add its offset from UTC (2025-06-21T12:00-07:00, or Z), or time.zone");
    if (has_offset && plan_.time.zone)
        mistakes_.add(plan_.time.zone->place, "the instant has an offset, so the zone says nothing",
                      "remove the zone or the offset");
}

void CrossCheck::dates() const {
    const auto& [from, to] = std::tie(plan_.time.from, plan_.time.to);
    if (from && to && **to < **from)
        mistakes_.add(to->place, format_date(**to) + " lies before from, " + format_date(**from),
                      "both days belong to the period: to is the last");
    constexpr long most_days = 31;  // 744 bands
    const auto* totals = plan_.time.totals ? std::get_if<Totals>(&**plan_.time.totals) : nullptr;
    if (from && to && totals != nullptr && *totals == Totals::hour &&
        days_from_civil(**to) - days_from_civil(**from) >= most_days)
        mistakes_.add(plan_.time.totals->place, "a band for each hour of more than 31 days",
                      "take fewer days, or totals: day");
}

void CrossCheck::named_periods() const {
    if (!plan_.time.totals) return;
    const auto* periods = std::get_if<std::vector<NamedPeriod>>(&**plan_.time.totals);
    if (periods == nullptr) return;
    for (const auto& period : *periods) {
        const auto first = std::ranges::find(*periods, period.name, &NamedPeriod::name);
        if (&*first != &period)
            mistakes_.add(period.name.place, "two periods are named \"" + *period.name + "\"",
                          "give each its own name");
        named_period(period);
    }
}

void CrossCheck::named_period(const NamedPeriod& period) const {
    if (*period.to < *period.from)
        mistakes_.add(period.to.place,
                      format_date(*period.to) + " lies before from, " + format_date(*period.from),
                      "both days belong to the period: to is the last");
    const auto& [from, to] = std::tie(plan_.time.from, plan_.time.to);
    if (from && *period.from < **from)
        mistakes_.add(period.from.place,
                      "the period starts before time.from, " + format_date(**from),
                      "named periods lie inside the plan's own");
    if (to && *period.to > **to)
        mistakes_.add(period.to.place, "the period ends after time.to, " + format_date(**to),
                      "named periods lie inside the plan's own");
}

void CrossCheck::layers_without(bool Layer::*need, const std::string& what,
                                const std::string& todo) const {
    std::vector<std::string> names;
    for (const auto& id : plan_.outputs.layers)
        if (layer(*id).*need) names.push_back(layer(*id).name);
    if (names.empty()) return;
    mistakes_.add(place_of("outputs", "layers"),
                  joined(names, ", ") + (names.size() == 1 ? " needs " : " need ") + what, todo);
}

/// The net of whole days: no instant, no part of a day, and no other layer of heat.
void CrossCheck::daily_longwave() const {
    const auto& name = **plan_.longwave.method;
    const auto& place = plan_.longwave.method->place;
    const auto refuse = [&](const char* section, const char* key, const std::string& what,
                            const std::string& todo) {
        if (written(std::string(section) + "." + key))
            mistakes_.add(place_of(section, key), what, todo);
    };
    refuse("time", "at", "longwave " + name + " is of whole days",
           "give time.from and time.to, or another longwave.method");
    refuse("time", "hours", "longwave " + name + " is of whole days",
           "leave hours out, or give another longwave.method");
    const auto* totals = plan_.time.totals ? std::get_if<Totals>(&**plan_.time.totals) : nullptr;
    if (totals != nullptr && *totals == Totals::hour)
        mistakes_.add(plan_.time.totals->place, "longwave " + name + " is of whole days",
                      "take totals: day, or another longwave.method");
    refuse("longwave", "cloud", name + " takes its clouds from the day's sunlight",
           "give sky.cloud or sky.sunshine, or a table with global");
    refuse("longwave", "cloud_method", name + " has its own term for clouds", "leave it out");
    refuse("weather", "air_temperature", name + " takes the day's highest and lowest temperature",
           "give air_temperature_max and air_temperature_min");
    for (const auto& id : plan_.outputs.layers) {
        const auto& wanted = layer(*id);
        const bool of_heat =
            wanted.needs_air || wanted.needs_surface_temperature || wanted.needs_emissivity;
        if (of_heat && *id != LayerId::net_longwave && *id != LayerId::net_radiation)
            mistakes_.add(id.place,
                          "longwave " + name + " gives the net alone: there is no " + wanted.name +
                              " with it",
                          "leave it out, or give another longwave.method");
    }
    const bool humid = written("weather.relative_humidity") || written("weather.dew_point") ||
                       written("weather.vapour_pressure");
    if (!written("weather.table") && !(written("weather.air_temperature_max") && humid))
        mistakes_.add(place,
                      name + " needs the day's highest and lowest temperature and a humidity",
                      "add weather with a table, or with air_temperature_max, air_temperature_min "
                      "and one of dew_point, vapour_pressure, relative_humidity");
    if (!plan_.weather || !plan_.weather->air_temperature_max ||
        !plan_.weather->air_temperature_min)
        return;
    const auto& highest = std::get<Monthly>(plan_.weather->air_temperature_max->value.value);
    const auto& lowest = std::get<Monthly>(plan_.weather->air_temperature_min->value.value);
    for (std::size_t month = 0; month < highest.size(); ++month)
        if (highest[month] < lowest[month])
            return mistakes_.add(plan_.weather->air_temperature_max->place,
                                 "the day's highest temperature lies below its lowest",
                                 "exchange the two");
}

/// What heat radiation asks for. Never a default: a guessed air is a guessed result.
void CrossCheck::heat_layers() const {
    const auto daily = method_names("longwave_daily");
    if (plan_.longwave.method && std::ranges::find(daily, **plan_.longwave.method) != daily.end())
        return daily_longwave();
    if (plan_.weather && plan_.weather->air_temperature_max)
        mistakes_.add(plan_.weather->air_temperature_max->place,
                      "only longwave.method " + joined(daily, " and ") +
                          " take the day's highest and lowest temperature",
                      "give air_temperature, or that method");
    const bool table = written("weather.table");
    const bool humid = written("weather.relative_humidity") || written("weather.dew_point") ||
                       written("weather.vapour_pressure");
    if (!table && !(written("weather.air_temperature") && humid))
        layers_without(&Layer::needs_air, "the air's temperature and humidity",
                       "add weather with a table, or with air_temperature and one of "
                       "relative_humidity, dew_point, vapour_pressure");
    if (!written("surface_temperature"))
        layers_without(
            &Layer::needs_surface_temperature, "the ground's temperature, and the plan has none",
            "add surface_temperature: a number, table, or a map with raster, air_plus or from");
    if (!written("surface.emissivity") && !written("surface.cover"))
        layers_without(&Layer::needs_emissivity, "an emissivity, and the plan has none",
                       "add surface.emissivity: a number or {raster: FILE}, or surface.cover, "
                       "whose classes have one");
    for (const auto& id : plan_.outputs.layers)
        if (*id == LayerId::sri && !written("surface.cover"))
            mistakes_.add(id.place,
                          "sri holds for dry built and bare kinds, and nothing tells the kinds",
                          "add surface.cover");
    if (plan_.surface.emissivity) {
        const auto* from = std::get_if<EmissivityFrom>(&plan_.surface.emissivity->value.value);
        if (from != nullptr && *from == EmissivityFrom::cover && !written("surface.cover"))
            mistakes_.add(plan_.surface.emissivity->place,
                          "there is no land cover to take the emissivity from",
                          "add surface.cover");
        if (from != nullptr && *from == EmissivityFrom::ndvi && !written("surface.reflectance"))
            mistakes_.add(plan_.surface.emissivity->place,
                          "there is no image to take the emissivity from",
                          "add surface.reflectance");
    }
    if (plan_.weather && plan_.weather->lapse && !table && has_elevation_raster() &&
        !written("weather.station_elevation"))
        mistakes_.add(plan_.weather->lapse->place,
                      "nothing says at which height the air's numbers hold",
                      "add weather.station_elevation");
    if (!plan_.surface_temperature) return;
    const auto& value = plan_.surface_temperature->value.value;
    const auto& place = plan_.surface_temperature->place;
    if (std::holds_alternative<SurfaceTable>(value) && !table)
        mistakes_.add(place, "there is no weather table with the ground's temperature",
                      "add weather.table");
    const auto* raster = std::get_if<PlanSurfaceRaster>(&value);
    if (raster != nullptr && written("time.from") && raster->covers == RasterCovers::instant)
        mistakes_.add(
            place,
            "a raster taken at one moment is no mean of a period: a mid-morning scene is 20 to 45 "
            "W/m2 too warm for the day",
            "give time.at, or write covers: period-mean if the raster is a mean of the period");
    if (!std::holds_alternative<HeatSource>(value)) return;
    if (written("time.from"))
        mistakes_.add(place,
                      "a balanced temperature holds for an instant, and the plan has periods",
                      "give time.at");
    if (!written("surface.cover"))
        mistakes_.add(place,
                      "a balance holds for dry built and bare kinds, and nothing tells the kinds",
                      "add surface.cover");
}

void CrossCheck::layers() const {
    heat_layers();
    if (!written("time"))
        layers_without(&Layer::needs_air, "a time, and the plan has none",
                       "add time with at, or with from and to");
    if (!written("time"))
        layers_without(&Layer::needs_sun, "the sun, and the plan has no time",
                       "add time with at, or with from and to");
    if (!written("surface.cover") && !written("surface.reflectance") && !written("surface.albedo"))
        layers_without(&Layer::needs_albedo, "an albedo, and the plan has none",
                       "add surface with cover, reflectance or albedo");
    if (plan_.surface.albedo && !written("surface.albedo.uncertainty"))
        layers_without(&Layer::needs_albedo_uncertainty,
                       "the albedo's uncertainty, and nothing tells that of a given albedo",
                       "add surface.albedo.uncertainty, a standard uncertainty such as 0.03");
    if (!has_elevation_raster())
        layers_without(&Layer::needs_terrain, "terrain, and the plan has no elevation raster",
                       "add terrain.elevation");
    for (const auto& id : plan_.outputs.layers)
        if (*id == LayerId::sunlit_hours && written("time.at"))
            mistakes_.add(id.place, "sunlit_hours needs a period, and the plan has an instant",
                          "add time.from and time.to");
}

void CrossCheck::directions() const {
    const auto& directions = plan_.terrain.directions;
    if (directions && **directions % 4 != 0)
        mistakes_.add(
            directions->place,
            std::to_string(**directions) + " directions do not go evenly round the four sides",
            "give a multiple of 4, from 8 to 360");
}

/// Zones can be given figures only of what the run writes.
void CrossCheck::zones() const {
    if (!plan_.zones) return;
    for (const auto& id : plan_.zones->layers) {
        const auto& name = layer(*id).name;
        const bool is_written = std::ranges::any_of(
            plan_.outputs.layers, [&](const auto& other) { return *other == *id; });
        if (!is_written)
            mistakes_.add(id.place, "the run does not write " + name,
                          "add it to outputs.layers, or leave it out here");
        if (*id == LayerId::aspect || *id == LayerId::quality)
            mistakes_.add(id.place, "a mean of " + name + " has no meaning", "leave it out here");
        if (layer(*id).needs_albedo_uncertainty)
            mistakes_.add(id.place,
                          name + " has no columns of its own: it stands beside its layer's",
                          "leave it out here");
    }
}

void CrossCheck::report() const {
    for (const auto& id : plan_.report.layers)
        if (std::ranges::none_of(plan_.outputs.layers,
                                 [&](const auto& other) { return *other == *id; }))
            mistakes_.add(id.place, "the run does not write " + layer(*id).name,
                          "add it to outputs.layers, or leave it out here");
}

void CrossCheck::sky() const {
    const auto* node = root_.find("sky");
    if (node == nullptr || (node->find("model") != nullptr && !plan_.sky.model)) return;
    const auto model =
        plan_.sky.model ? clear_model_named(**plan_.sky.model) : ClearModel::esra2000;
    for (std::size_t i = 0; i < sky_parameter_count; ++i) {
        const auto parameter = static_cast<SkyParameter>(i);
        const auto* key = node->find(name_of(parameter));
        if (key == nullptr || has(model, parameter)) continue;
        std::vector<std::string> own;
        for (const auto& one : method("clear_sky", name_of(model)).parameters)
            own.push_back(one.name);
        mistakes_.add(key->place,
                      std::string(name_of(model)) + " has no " + std::string(name_of(parameter)),
                      own.empty() ? "it takes no parameters: leave it out, or choose another model"
                                  : "its parameters are " + joined(own, ", "));
    }
}

void CrossCheck::change(const PlanChange& change) const {
    change_name(change);
    change_albedo(change);
    change_height(change);
    if (!change.albedo && !change.to_class && !change.emissivity && !change.height)
        mistakes_.add(change.place, "the change changes nothing",
                      "give albedo, class, emissivity or height");
    if (!change.where) return;
    if (!change.where->file && !change.where->classes)
        mistakes_.add(change.where->place, "nothing says where",
                      "give file, or classes of the land cover");
    if (change.where->classes && !written("surface.cover"))
        mistakes_.add(change.where->classes->place, "the plan has no land cover to find classes in",
                      "add surface.cover, or give file");
}

/// It becomes part of file names.
void CrossCheck::change_name(const PlanChange& change) const {
    const auto& name = *change.name;
    const auto is_plain = [](char c) {
        return (c >= 'a' && c <= 'z') || (c >= 'A' && c <= 'Z') || (c >= '0' && c <= '9') ||
               c == '-' || c == '_';
    };
    if (!std::ranges::all_of(name, is_plain) || name.find("__") != name.npos || name.size() > 40)
        mistakes_.add(change.name.place, "\"" + name + "\" cannot be part of a file's name here",
                      "use letters, digits, - and single _, at most 40");
    const auto first = std::ranges::find(plan_.changes, change.name, &PlanChange::name);
    if (&*first != &change)
        mistakes_.add(change.name.place, "two changes are named \"" + name + "\"",
                      "give each its own name");
}

void CrossCheck::change_albedo(const PlanChange& change) const {
    if (change.to_class && !written("surface.cover"))
        mistakes_.add(change.to_class->place,
                      "the plan has no land cover whose table has the class",
                      "add surface.cover, or give albedo");
    if (!change.albedo) return;
    const auto& [place, initial, aged, low, high] = *change.albedo;
    if (!written("surface.cover") && !written("surface.reflectance") && !written("surface.albedo"))
        mistakes_.add(place, "there is no albedo to change",
                      "add surface with cover, reflectance or albedo");
    if (!initial && !aged) mistakes_.add(place, "the albedo is not given", "give aged, or initial");
    if (low && high && **low > **high)
        mistakes_.add(low->place, "low lies above high", "exchange the two");
    if (low && aged && **low > **aged)
        mistakes_.add(low->place, "low lies above aged",
                      "low is the least to expect of an aged surface");
    if (high && aged && **high < **aged)
        mistakes_.add(high->place, "high lies below aged",
                      "high is the most to expect of an aged surface");
}

void CrossCheck::change_height(const PlanChange& change) const {
    if (!change.height) return;
    if (!has_elevation_raster())
        mistakes_.add(change.height->place, "there are no heights to change",
                      "add terrain.elevation with a raster");
    if (change.height->attribute && !(change.where && change.where->file))
        mistakes_.add(change.height->attribute->place, "an attribute belongs to polygons",
                      "add where with file");
    if (change.where && change.where->classes)
        mistakes_.add(change.where->classes->place,
                      "heights change inside polygons only, not by class", "give file alone");
    if (change.treatable && **change.treatable < 1)
        mistakes_.add(change.treatable->place, "ground cannot be raised in part",
                      "choose the polygons with query, and leave treatable out");
}

void CrossCheck::unit() const {
    const auto& unit = plan_.outputs.unit;
    if (unit && **unit != OutputUnit::w_m2 && !written("time.from") && !written("time.to"))
        mistakes_.add(unit->place, std::string(name_of(**unit)) + " is a sum and needs a period",
                      "add time.from and time.to, or write unit: W/m2");
}

void CrossCheck::reflectance(const PlanReflectance& image) const {
    const bool from_cover = image.fill && **image.fill == FillFrom::cover;
    if (from_cover && !written("surface.cover"))
        mistakes_.add(image.fill->place, "there is no land cover to fill from",
                      "add surface.cover, or write fill: nodata");
    if (!from_cover && written("surface.cover") && !image_is_bad("fill"))
        mistakes_.add(image.place,
                      "both cover and reflectance are given, and nothing fills from the cover",
                      "write fill: cover, or keep one of the two");
    if (!written("surface.reflectance.sensor") || image_is_bad("sensor")) return;
    const bool has_names = !sensor(*image.sensor).bands.front().product.empty();
    if (image.scene && !has_names)
        mistakes_.add(image.scene->place,
                      "files of the sensor " + *image.sensor + " have no names to find them by",
                      "name the bands one by one");
    reflectance_weights(image);
    quality_tests(image);
}

bool CrossCheck::image_is_bad(const char* key) const {
    const auto* node = root_.find("surface")->find("reflectance")->find(key);
    return node != nullptr && node->bad;
}

void CrossCheck::reflectance_weights(const PlanReflectance& image) const {
    if (image.weights) {
        const auto& weights = image.weights->bands.of;
        if (std::ranges::none_of(weights,
                                 [](const auto& weight) { return weight && **weight != 0; }))
            mistakes_.add(image.weights->bands.place, "no band has a weight",
                          "give the weight of each band: {red: 0.5, nir: 0.5, constant: 0}");
        return;
    }
    if (written("surface.reflectance.weights")) return;
    const auto names = weight_set_names(*image.sensor);
    if (names.empty())
        mistakes_.add(image.method ? image.method->place : image.place,
                      "the sensor " + *image.sensor + " has no weights of its own",
                      "add weights, such as weights: {red: 0.5, nir: 0.5, constant: 0}");
    else if (image.method && std::ranges::find(names, **image.method) == names.end())
        mistakes_.add(image.method->place,
                      "no weights \"" + **image.method + "\" for the sensor " + *image.sensor,
                      suggestion(**image.method, names));
}

// Each key, and the raster of the product that it stands for.
void CrossCheck::quality_tests(const PlanReflectance& image) const {
    const auto& tests = sensor(*image.sensor).tests;
    for (const auto& [key, product, given] : quality_rasters(image)) {
        if (!*given || std::ranges::find(tests, product, &QualityTest::raster) != tests.end())
            continue;
        mistakes_.add(
            (*given)->place,
            "the bits of this raster have no known meaning for the sensor " + *image.sensor,
            "leave it out");
    }
    if (!image.reject) return;
    for (const auto& name : **image.reject) {
        const auto test = std::ranges::find(tests, name, &QualityTest::name);
        if (test == tests.end()) {
            mistakes_.add(image.reject->place,
                          "the sensor " + *image.sensor + " has no quality bits for " + name,
                          "leave it out");
            continue;
        }
        for (const auto& [key, product, given] : quality_rasters(image))
            if (product == test->raster && !*given && !image.scene &&
                !written(std::string("surface.reflectance.") + key))
                mistakes_.add(image.reject->place,
                              name + " is told by " + product + ", which the plan does not name",
                              std::string("add ") + key + ", or leave it out");
    }
}

}  // namespace

void cross_check(const Plan& plan, const Node& root, Mistakes& mistakes) {
    CrossCheck(plan, root, mistakes).all();
}

}  // namespace sunbudget
