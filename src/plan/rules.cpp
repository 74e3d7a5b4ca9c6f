#include <algorithm>

#include "rules_parts.hpp"
#include "sunbudget/base/text.hpp"
#include "sunbudget/tables/methods.hpp"

namespace sunbudget {

bool Rules::written(std::string_view path) const {
    const Node* node = &root_;
    for (const auto& name : split(path, '.'))
        if (node = node->find(name); node == nullptr) return false;
    return true;
}

bool Rules::has_elevation_raster() const {
    const auto& elevation = plan_.terrain.elevation;
    if (!elevation) return written("terrain.elevation");
    return std::holds_alternative<std::vector<PlanRaster>>(**elevation);
}

bool Rules::has_albedo() const {
    return written("surface.cover") || written("surface.reflectance") || written("surface.albedo");
}

bool Rules::has_humidity() const {
    return written("weather.relative_humidity") || written("weather.dew_point") ||
           written("weather.vapour_pressure");
}

bool Rules::is_output(LayerId id) const {
    return std::ranges::any_of(plan_.outputs.layers,
                               [&](const auto& other) { return *other == id; });
}

void Rules::layers_without(bool Layer::*need, const std::string& what,
                           const std::string& todo) const {
    std::vector<std::string> names;
    for (const auto& id : plan_.outputs.layers)
        if (layer(*id).*need) names.push_back(layer(*id).name);
    if (names.empty()) return;
    mistakes_.add(place_of("outputs", "layers"),
                  joined(names, ", ") + (names.size() == 1 ? " needs " : " need ") + what, todo);
}

namespace {

/// What no single section shows, and the sections with a rule or two.
class PlanRules : Rules {
  public:
    using Rules::Rules;
    void grid() const {
        bounds();
        grid_source();
    }
    void all_but_grid() const {
        layers();
        unit();
        directions();
        zones();
        report();
        sky();
    }

  private:
    [[nodiscard]] bool has_surface_raster() const {
        return written("surface.cover") || written("surface.reflectance") ||
               written("surface.albedo.raster");
    }
    void bounds() const;
    void grid_source() const;
    void layers() const;
    void unit() const;
    void directions() const;
    void zones() const;
    void report() const;
    void sky() const;
};

void PlanRules::bounds() const {
    if (!plan_.grid.bounds) return;
    const auto& [west, south, east, north] = **plan_.grid.bounds;
    if (west >= east || south >= north)
        mistakes_.add(plan_.grid.bounds->place, "the bounds enclose nothing",
                      "write them as [west, south, east, north]");
}

void PlanRules::grid_source() const {
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

void PlanRules::layers() const {
    if (!written("time"))
        layers_without(&Layer::needs_air, "a time, and the plan has none",
                       "add time with at, or with from and to");
    if (!written("time"))
        layers_without(&Layer::needs_sun, "the sun, and the plan has no time",
                       "add time with at, or with from and to");
    if (!has_albedo())
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

void PlanRules::unit() const {
    const auto& unit = plan_.outputs.unit;
    if (unit && **unit != OutputUnit::w_m2 && !written("time.from") && !written("time.to"))
        mistakes_.add(unit->place, std::string(name_of(**unit)) + " is a sum and needs a period",
                      "add time.from and time.to, or write unit: W/m2");
}

void PlanRules::directions() const {
    const auto& directions = plan_.terrain.directions;
    if (directions && **directions % 4 != 0)
        mistakes_.add(
            directions->place,
            std::to_string(**directions) + " directions do not go evenly round the four sides",
            "give a multiple of 4, from 8 to 360");
}

/// Zones can be given figures only of what the run writes.
void PlanRules::zones() const {
    if (!plan_.zones) return;
    for (const auto& id : plan_.zones->layers) {
        const auto& name = layer(*id).name;
        if (!is_output(*id))
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

void PlanRules::report() const {
    for (const auto& id : plan_.report.layers)
        if (!is_output(*id))
            mistakes_.add(id.place, "the run does not write " + layer(*id).name,
                          "add it to outputs.layers, or leave it out here");
}

void PlanRules::sky() const {
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

}  // namespace

void cross_check(const Plan& plan, const Node& root, Mistakes& mistakes) {
    const PlanRules rules(plan, root, mistakes);
    rules.grid();
    check_time(plan, root, mistakes);
    check_heat(plan, root, mistakes);
    rules.all_but_grid();
    check_changes(plan, root, mistakes);
    check_weather(plan, root, mistakes);
    check_reflectance(plan, root, mistakes);
}

}  // namespace sunbudget
