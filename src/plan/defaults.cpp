#include <utility>

#include "fields.hpp"
#include "keys.hpp"
#include "sunbudget/tables/sensors.hpp"
#include "typed.hpp"

namespace sunbudget {

namespace {

/// Reads the default of each absent key as if it had been written.
class DefaultFiller {
  public:
    explicit DefaultFiller(std::filesystem::path folder) : typed_(std::move(folder)) {}

    template <class T>
    void value(const char* name, Maybe<T>& member) {
        if (const auto node = default_of(name); node && !member) member = typed_.given<T>(*node);
    }
    template <class Member>
    void value(const char*, Member&) {}  // required: has no default
    void duration(const char* name, Maybe<int>& member) {
        if (const auto node = default_of(name); node && !member) member = Typed::duration_s(*node);
    }
    template <class Inside>
    void map(const std::string& name, const Inside& visit_inside) {
        const auto outside = std::exchange(prefix_, prefix_ + name + ".");
        visit_inside();
        prefix_ = outside;
    }
    template <class Section, class Inside>
    void map(const char* name, std::optional<Section>& section, const Inside& visit_inside) {
        if (section) map(name, [&] { visit_inside(*section); });
    }
    template <class Item, class Inside>
    void list(const char* name, std::vector<Item>& items, const Inside& visit_inside) {
        for (auto& item : items) map(name, [&] { visit_inside(item); });
    }

  private:
    [[nodiscard]] std::optional<Node> default_of(const char* name) const {
        const auto& key = plan_key(prefix_ + name);
        if (key.default_text.empty()) return std::nullopt;
        Node node;
        node.shape = Node::Shape::scalar;
        node.text = key.default_text;
        node.place = {{}, 0, prefix_ + name, true};
        return node;
    }

    std::string prefix_;
    Typed typed_;
};

}  // namespace

Plan with_defaults(Plan plan) {
    const PlanTime written = plan.time;
    DefaultFiller filler(folder_of(plan.file));
    visit_plan(plan, filler);
    // A default belongs to the models that have the parameter.
    for (std::size_t i = 0; i < sky_parameter_count; ++i)
        if (auto& given = plan.sky.parameters[i];
            given && given->place.is_default && plan.sky.model &&
            !has(clear_model_named(**plan.sky.model), static_cast<SkyParameter>(i)))
            given.reset();
    // How the ground is looked at belongs to an elevation raster.
    const auto& elevation = plan.terrain.elevation;
    if (!elevation || std::holds_alternative<PlanLength>(**elevation))
        plan.terrain = {elevation, {}, {}, {}, {}};
    // Weights of one's own stand in the place of a method, and a sensor of one's own has none.
    if (auto& image = plan.surface.reflectance;
        image && image->method && image->method->place.is_default)
        if (image->weights || weight_set_names(*image->sensor).empty()) image->method.reset();
    // How a table is read belongs to a table.
    if (plan.weather && !plan.weather->table) {
        auto& weather = *plan.weather;
        weather.good_flags.reset();
        weather.separator.reset();
        weather.decimal.reset();
        weather.header.reset();
        weather.skip.reset();
        weather.comment.reset();
        weather.stamp.reset();
        weather.zone.reset();
        weather.years.reset();
        weather.gaps.reset();
        if (!weather.air_temperature && !weather.air_temperature_max) weather.lapse.reset();
    }
    // Steps, days and totals belong to a period.
    if (!written.from) plan.time = written;
    return plan;
}

}  // namespace sunbudget
