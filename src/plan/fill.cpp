#include "fill.hpp"

#include <algorithm>
#include <cmath>
#include <utility>

#include "fields.hpp"
#include "keys.hpp"
#include "names.hpp"
#include "scalars.hpp"
#include "sunbudget/tables/sensors.hpp"

namespace sunbudget {

namespace {

using Folder = std::filesystem::path;

Folder folder_of(const std::string& file) {
    return Folder(file).parent_path();
}

/// Values from nodes, one overload a type. The nodes are valid: `validate` has seen to that.
class Typed {
  public:
    explicit Typed(Folder folder) : folder_(std::move(folder)) {}

    template <class T>
    [[nodiscard]] Given<T> given(const Node& node) const {
        Given<T> value{{}, node.place};
        get(node, value.value);
        return value;
    }
    template <class T>
    void get(const Node& node, std::vector<Given<T>>& value) const {
        for (const auto& item : node.children) value.push_back(given<T>(item));
    }
    [[nodiscard]] static Given<int> duration_s(const Node& node) {
        const double seconds = *read_quantity(node, ValueKind::duration);
        return {static_cast<int>(std::lround(seconds)), node.place};
    }

  private:
    static void get(const Node& node, std::string& value) { value = node.text; }
    static void get(const Node& node, std::vector<std::string>& value) {
        for (const auto& item : node.children) value.push_back(item.text);
    }
    static void get(const Node& node, double& value) { value = *read_number(node); }
    static void get(const Node& node, int& value) { value = static_cast<int>(*read_integer(node)); }
    static void get(const Node& node, std::vector<int>& value) {
        for (const auto& item : node.children)
            value.push_back(static_cast<int>(*read_integer(item)));
    }
    static void get(const Node& node, bool& value) { value = *read_boolean(node); }
    static void get(const Node& node, WeatherColumn& value) {
        if (const auto number = read_integer(node))
            value.number = static_cast<int>(*number);
        else
            value.name = node.text;
    }
    static void get(const Node& node, std::vector<double>& value) {
        if (node.shape == Node::Shape::scalar) value.push_back(*read_number(node));
        for (const auto& item : node.children) value.push_back(*read_number(item));
    }
    static void get(const Node& node, CivilDate& value) { value = *parse_date(node.text); }
    static void get(const Node& node, HourWindow& value) { value = *read_hours(node); }
    static void get(const Node& node, OutputUnit& value) { value = *output_unit_named(node.text); }
    static void get(const Node& node, LayerId& value) { value = layer_named(node.text)->id; }
    static void get(const Node& node, PlanZone& value) { value.zone = Zone::parse(node.text); }
    static void get(const Node& node, PlanInstant& value) {
        value.written = parse_instant(node.text);
    }
    static void get(const Node& node, std::optional<int>& value) {
        if (const auto code = read_integer(node)) value = static_cast<int>(*code);
    }
    template <class Enum>
    requires requires(Enum e) { names_for(e); }
    static void get(const Node& node, Enum& value) {
        const auto& names = names_for(value);
        value = static_cast<Enum>(std::ranges::find(names, node.text) - names.begin());
    }
    template <std::size_t N>
    static void get(const Node& node, std::array<double, N>& value) {
        if (node.shape == Node::Shape::scalar) return value.fill(*read_number(node));
        std::ranges::transform(node.children, value.begin(),
                               [](const Node& item) { return *read_number(item); });
    }
    void get(const Node& node, PlanPath& value) const { value = path_of(node.text); }
    void get(const Node& node, PlanRaster& value) const {
        value = *read_raster(node);
        value.path = path_of(value.path.given);
    }
    void get(const Node& node, NamedPeriod& value) const {
        value = {given<std::string>(*node.find("name")), given<CivilDate>(*node.find("from")),
                 given<CivilDate>(*node.find("to"))};
    }
    void get(const Node& node, std::variant<Totals, std::vector<NamedPeriod>>& value) const {
        if (node.shape == Node::Shape::scalar) return get(node, value.emplace<Totals>());
        auto& periods = value.emplace<std::vector<NamedPeriod>>();
        for (const auto& item : node.children) get(item, periods.emplace_back());
    }
    void get(const Node& node, std::variant<LikeInput, PlanPath>& value) const {
        if (is_choice(node, "grid.like")) return get(node, value.emplace<LikeInput>());
        get(node, value.emplace<PlanPath>());
    }
    void get(const Node& node, TableChoice& value) const {
        if (is_choice(node, "surface.cover.classes"))
            value = node.text;
        else
            get(node, value.emplace<PlanPath>());
    }
    static void get(const Node& node, PlanLength& value) {
        value.m = *read_quantity(node, ValueKind::length);
    }
    void get(const Node& node, std::vector<PlanRaster>& value) const {
        if (node.shape == Node::Shape::scalar) return get(node, value.emplace_back());
        for (const auto& item : node.children) get(item, value.emplace_back());
    }
    void get(const Node& node, std::variant<Monthly, std::vector<PlanRaster>>& value) const {
        if (node.shape == Node::Shape::scalar && !read_number(node))
            return get(node, value.emplace<std::vector<PlanRaster>>());
        get(node, value.emplace<Monthly>());
    }
    void get(const Node& node, std::variant<std::vector<PlanRaster>, PlanLength>& value) const {
        if (node.shape == Node::Shape::scalar && read_quantity(node, ValueKind::length))
            return get(node, value.emplace<PlanLength>());
        auto& rasters = value.emplace<std::vector<PlanRaster>>();
        if (node.shape == Node::Shape::scalar) return get(node, rasters.emplace_back());
        for (const auto& item : node.children) get(item, rasters.emplace_back());
    }
    void get(const Node& node, PlanSkyNumbers& value) const {
        const bool numbers = node.shape == Node::Shape::list || read_number(node);
        return numbers ? get(node, value.emplace<Monthly>())
                       : get(node, value.emplace<PlanRaster>());
    }
    void get(const Node& node, std::variant<SlopeFrom, PlanPath>& value) const {
        if (is_choice(node, "terrain.slope_from")) return get(node, value.emplace<SlopeFrom>());
        get(node, value.emplace<PlanPath>());
    }

    static Monthly months(const Node& node, ValueKind kind) {
        Monthly values{};
        // A bad one among them has a problem of its own already.
        const auto one = [&](const Node& item) {
            return (kind == ValueKind::number ? read_number(item) : read_quantity(item, kind))
                .value_or(0);
        };
        if (node.shape == Node::Shape::scalar)
            values.fill(one(node));
        else
            std::ranges::transform(node.children, values.begin(), one);
        return values;
    }
    /// A number of the map's, or what stands for it.
    static double number_or(const Node& map, const char* name, double otherwise) {
        return map.has(name) ? *read_number(*map.find(name)) : otherwise;
    }
    static std::string text_or_none(const Node& map, const char* name) {
        return map.has(name) ? map.find(name)->text : std::string();
    }
    void get(const Node& node, PlanFieldRaster& value) const {
        if (node.has("raster")) get(*node.find("raster"), value.raster);
        value.unit = text_or_none(node, "unit");
        value.scale = number_or(node, "scale", 1);
        value.offset = number_or(node, "offset", 0);
    }
    void field(const Node& node, ValueKind kind,
               std::variant<Monthly, PlanFieldRaster>& value) const {
        if (node.shape == Node::Shape::map) return get(node, value.emplace<PlanFieldRaster>());
        value = months(node, kind);
    }
    void get(const Node& node, PlanTemperatures& value) const {
        field(node, ValueKind::temperature, value.value);
    }
    void get(const Node& node, PlanPressures& value) const {
        field(node, ValueKind::pressure, value.value);
    }
    void get(const Node& node, PlanShares& value) const {
        field(node, ValueKind::number, value.value);
    }
    static void get(const Node& node, PlanWind& value) {
        if (node.shape == Node::Shape::scalar &&
            std::ranges::find(wind_names, node.text) != wind_names.end())
            get(node, value.value.emplace<WindCase>());
        else
            value.value = months(node, ValueKind::speed);
    }
    static void get(const Node& node, PlanLapse& value) {
        value.k_km = months(node, ValueKind::lapse);
    }
    void get(const Node& node, PlanEmissivity& value) const {
        if (node.shape == Node::Shape::scalar) return get(node, value.value.emplace<double>());
        if (node.has("from")) return get(*node.find("from"), value.value.emplace<EmissivityFrom>());
        get(node, value.value.emplace<PlanFieldRaster>());
    }
    void get(const Node& node, PlanSurfaceRaster& value) const {
        get(*node.find("raster"), value.raster);
        if (node.has("product")) get(*node.find("product"), value.product.emplace());
        if (node.has("quality")) get(*node.find("quality"), value.quality.emplace());
        value.unit = text_or_none(node, "unit");
        if (node.has("scale")) value.scale = number_or(node, "scale", 1);
        if (node.has("offset")) value.offset = number_or(node, "offset", 0);
        value.time = text_or_none(node, "time");
        if (node.has("covers")) get(*node.find("covers"), value.covers);
    }
    void get(const Node& node, PlanSurfaceTemperature& value) const {
        if (node.shape != Node::Shape::map) {
            if (node.shape == Node::Shape::scalar && node.text == surface_table_names[0])
                value.value = SurfaceTable::table;
            else
                value.value = months(node, ValueKind::temperature);
        } else if (node.has("raster")) {
            get(node, value.value.emplace<PlanSurfaceRaster>());
        } else if (node.has("from")) {
            value.value = HeatSource::balance;
        } else {
            value.value = PlanDifference{
                node.has("air_plus") ? *read_quantity(*node.find("air_plus"), ValueKind::difference)
                                     : 0};
        }
    }

    static bool is_choice(const Node& node, const std::string& key) {
        const auto& choices = plan_key(key).forms.front().choices;
        return std::ranges::find(choices, node.text) != choices.end();
    }
    [[nodiscard]] PlanPath path_of(const std::string& given) const {
        // Left alone, so that whoever opens it can say why it is refused.
        if (given.find("://") != std::string::npos) return {given, given};
        return {given, (folder_ / given).lexically_normal()};
    }

    Folder folder_;
};

class Filler {
  public:
    Filler(const Node& root, Folder folder) : node_(&root), typed_(std::move(folder)) {}

    template <class T>
    void value(const char* name, Given<T>& member) {
        if (node_->has(name)) member = typed_.given<T>(*node_->find(name));
    }
    template <class T>
    void value(const char* name, Maybe<T>& member) {
        if (node_->has(name)) member = typed_.given<T>(*node_->find(name));
    }
    template <class T>
    void value(const char* name, std::vector<Given<T>>& member) {
        if (node_->has(name)) typed_.get(*node_->find(name), member);
    }
    void duration(const char* name, Maybe<int>& member) {
        if (node_->has(name)) member = Typed::duration_s(*node_->find(name));
    }
    template <class Inside>
    void map(const char* name, const Inside& visit_inside) {
        if (!node_->has(name)) return;
        const Node* outside = std::exchange(node_, node_->find(name));
        visit_inside();
        node_ = outside;
    }
    template <class Section, class Inside>
    void map(const char* name, std::optional<Section>& section, const Inside& visit_inside) {
        map(name, [&] {
            place_of(section.emplace()) = node_->place;
            visit_inside(*section);
        });
    }

    template <class Item, class Inside>
    void list(const char* name, std::vector<Item>& items, const Inside& visit_inside) {
        if (!node_->has(name)) return;
        const Node* outside = node_;
        for (const auto& child : outside->find(name)->children) {
            node_ = &child;
            items.emplace_back().place = child.place;
            visit_inside(items.back());
        }
        node_ = outside;
    }

  private:
    template <class Section>
    static Place& place_of(Section& section) {
        return section.place;
    }
    static Place& place_of(PlanWeights& weights) { return weights.bands.place; }

    const Node* node_;
    Typed typed_;
};

/// Reads the default of each absent key as if it had been written.
class DefaultFiller {
  public:
    explicit DefaultFiller(Folder folder) : typed_(std::move(folder)) {}

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

Plan fill_plan(const std::string& file, const Node& root) {
    Plan plan;
    plan.file = file;
    Filler filler(root, folder_of(file));
    visit_plan(plan, filler);
    return plan;
}

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
