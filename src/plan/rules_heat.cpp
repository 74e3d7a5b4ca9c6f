#include <algorithm>

#include "rules_parts.hpp"
#include "sunbudget/base/text.hpp"
#include "sunbudget/tables/methods.hpp"

namespace sunbudget {

namespace {

/// What heat radiation asks for. Never a default: a guessed air is a guessed result.
class HeatRules : Rules {
  public:
    using Rules::Rules;
    void all() const {
        air();
        layers();
        emissivity();
        lapse();
        if (!plan_.surface_temperature) return;
        surface_temperature();
        if (std::holds_alternative<HeatSource>(plan_.surface_temperature->value.value)) balance();
    }

  private:
    void air() const;
    void layers() const;
    void emissivity() const;
    void lapse() const;
    void surface_temperature() const;
    void balance() const;
};

void HeatRules::air() const {
    if (plan_.weather && plan_.weather->air_temperature_max)
        mistakes_.add(plan_.weather->air_temperature_max->place,
                      "only longwave.method " + joined(method_names("longwave_daily"), " and ") +
                          " take the day's highest and lowest temperature",
                      "give air_temperature, or that method");
    if (!written("weather.table") && !(written("weather.air_temperature") && has_humidity()))
        layers_without(&Layer::needs_air, "the air's temperature and humidity",
                       "add weather with a table, or with air_temperature and one of "
                       "relative_humidity, dew_point, vapour_pressure");
}

void HeatRules::layers() const {
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
}

void HeatRules::emissivity() const {
    if (!plan_.surface.emissivity) return;
    const auto& place = plan_.surface.emissivity->place;
    const auto* from = std::get_if<EmissivityFrom>(&plan_.surface.emissivity->value.value);
    if (from != nullptr && *from == EmissivityFrom::cover && !written("surface.cover"))
        mistakes_.add(place, "there is no land cover to take the emissivity from",
                      "add surface.cover");
    if (from != nullptr && *from == EmissivityFrom::ndvi && !written("surface.reflectance"))
        mistakes_.add(place, "there is no image to take the emissivity from",
                      "add surface.reflectance");
}

void HeatRules::lapse() const {
    if (plan_.weather && plan_.weather->lapse && !written("weather.table") &&
        has_elevation_raster() && !written("weather.station_elevation"))
        mistakes_.add(plan_.weather->lapse->place,
                      "nothing says at which height the air's numbers hold",
                      "add weather.station_elevation");
}

void HeatRules::surface_temperature() const {
    const auto& [value, place] = *plan_.surface_temperature;
    if (std::holds_alternative<SurfaceTable>(value.value) && !written("weather.table"))
        mistakes_.add(place, "there is no weather table with the ground's temperature",
                      "add weather.table");
    const auto* raster = std::get_if<PlanSurfaceRaster>(&value.value);
    if (raster != nullptr && written("time.from") && raster->covers == RasterCovers::instant)
        mistakes_.add(
            place,
            "a raster taken at one moment is no mean of a period: a mid-morning scene is 20 to 45 "
            "W/m2 too warm for the day",
            "give time.at, or write covers: period-mean if the raster is a mean of the period");
}

void HeatRules::balance() const {
    const auto& place = plan_.surface_temperature->place;
    if (written("time.from"))
        mistakes_.add(place,
                      "a balanced temperature holds for an instant, and the plan has periods",
                      "give time.at");
    if (!written("surface.cover"))
        mistakes_.add(place,
                      "a balance holds for dry built and bare kinds, and nothing tells the kinds",
                      "add surface.cover");
}

/// The net of whole days: no instant, no part of a day, and no other layer of heat.
class DailyRules : Rules {
  public:
    DailyRules(const Plan& plan, const Node& root, Mistakes& mistakes)
        : Rules(plan, root, mistakes), name_(**plan.longwave.method) {}
    void all() const {
        time();
        clouds();
        refuse("weather", "air_temperature",
               name_ + " takes the day's highest and lowest temperature",
               "give air_temperature_max and air_temperature_min");
        layers();
        air();
        order();
    }

  private:
    void refuse(const char* section, const char* key, const std::string& what,
                const std::string& todo) const {
        if (written(std::string(section) + "." + key))
            mistakes_.add(place_of(section, key), what, todo);
    }
    void time() const;
    void clouds() const;
    void layers() const;
    void air() const;
    void order() const;

    const std::string& name_;
};

void DailyRules::time() const {
    const auto what = "longwave " + name_ + " is of whole days";
    refuse("time", "at", what, "give time.from and time.to, or another longwave.method");
    refuse("time", "hours", what, "leave hours out, or give another longwave.method");
    const auto* totals = plan_.time.totals ? std::get_if<Totals>(&**plan_.time.totals) : nullptr;
    if (totals != nullptr && *totals == Totals::hour)
        mistakes_.add(plan_.time.totals->place, what,
                      "take totals: day, or another longwave.method");
}

void DailyRules::clouds() const {
    refuse("longwave", "cloud", name_ + " takes its clouds from the day's sunlight",
           "give sky.cloud or sky.sunshine, or a table with global");
    refuse("longwave", "cloud_method", name_ + " has its own term for clouds", "leave it out");
}

void DailyRules::layers() const {
    for (const auto& id : plan_.outputs.layers) {
        const auto& wanted = layer(*id);
        const bool of_heat =
            wanted.needs_air || wanted.needs_surface_temperature || wanted.needs_emissivity;
        if (of_heat && *id != LayerId::net_longwave && *id != LayerId::net_radiation)
            mistakes_.add(id.place,
                          "longwave " + name_ + " gives the net alone: there is no " + wanted.name +
                              " with it",
                          "leave it out, or give another longwave.method");
    }
}

void DailyRules::air() const {
    if (!written("weather.table") && !(written("weather.air_temperature_max") && has_humidity()))
        mistakes_.add(plan_.longwave.method->place,
                      name_ + " needs the day's highest and lowest temperature and a humidity",
                      "add weather with a table, or with air_temperature_max, air_temperature_min "
                      "and one of dew_point, vapour_pressure, relative_humidity");
}

void DailyRules::order() const {
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

}  // namespace

void check_heat(const Plan& plan, const Node& root, Mistakes& mistakes) {
    const auto daily = method_names("longwave_daily");
    const auto& method = plan.longwave.method;
    if (method && std::ranges::find(daily, **method) != daily.end())
        DailyRules(plan, root, mistakes).all();
    else
        HeatRules(plan, root, mistakes).all();
}

}  // namespace sunbudget
