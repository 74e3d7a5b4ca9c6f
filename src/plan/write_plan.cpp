#include <fmt/format.h>

#include <algorithm>
#include <array>
#include <cmath>
#include <utility>

#include "fields.hpp"
#include "names.hpp"
#include "sunbudget/base/digest.hpp"
#include "sunbudget/base/text.hpp"
#include "yaml_text.hpp"

namespace sunbudget {

namespace {

std::string clock_text(double seconds_of_day) {
    const auto minutes = static_cast<int>(seconds_of_day / 60);
    const double rest_s = seconds_of_day - minutes * 60.0;
    auto text = fmt::format("{:02}:{:02}", minutes / 60, minutes % 60);
    if (rest_s == 0) return text;
    // Microseconds are finer than any clock; zeros at the end are dropped.
    auto seconds = fmt::format("{:09.6f}", rest_s);
    seconds.erase(seconds.find_last_not_of('0') + 1);
    if (seconds.back() == '.') seconds.pop_back();
    return text + ":" + seconds;
}

std::string offset_text(double offset_s) {
    if (offset_s == 0) return "Z";
    const auto minutes = static_cast<int>(std::lround(std::abs(offset_s) / 60));
    return fmt::format("{}{:02}:{:02}", offset_s < 0 ? '-' : '+', minutes / 60, minutes % 60);
}

std::string hour_text(double hour) {
    const auto minutes = static_cast<int>(std::lround(hour * 60));
    if (minutes % 60 == 0) return std::to_string(minutes / 60);
    return fmt::format("{}:{:02}", minutes / 60, minutes % 60);
}

std::string duration_text(int duration_s) {
    if (duration_s % 3600 == 0) return std::to_string(duration_s / 3600) + " h";
    if (duration_s % 60 == 0) return std::to_string(duration_s / 60) + " min";
    return std::to_string(duration_s) + " s";
}

struct Style {
    std::filesystem::path folder;  ///< paths are written from here; empty: as given
    bool with_defaults = false;
};

/// Builds the tree that `read_tree` would have made of the plan's text.
class Writer {
  public:
    explicit Writer(Style style) : style_(std::move(style)) { root_.shape = Node::Shape::map; }

    template <class T>
    void value(const char* name, const Maybe<T>& member) {
        if (member) value(name, *member);
    }
    template <class T>
    void value(const char* name, const Given<T>& member) {
        if (!member.place.is_default || style_.with_defaults) add(name, node_of(member.value));
    }
    template <class T>
    void value(const char* name, const std::vector<Given<T>>& member) {
        if (!member.empty()) add(name, list_of(member));
    }
    void duration(const char* name, const Maybe<int>& member) {
        if (member && (!member->place.is_default || style_.with_defaults))
            add(name, text_node(duration_text(**member)));
    }
    template <class Inside>
    void map(const char* name, const Inside& visit_inside) {
        Node outside = std::exchange(root_, {});
        root_.shape = Node::Shape::map;
        visit_inside();
        std::swap(outside, root_);
        if (!outside.children.empty()) add(name, std::move(outside));
    }
    template <class Section, class Inside>
    void map(const char* name, const std::optional<Section>& section, const Inside& visit_inside) {
        if (section) map(name, [&] { visit_inside(*section); });
    }
    template <class Item, class Inside>
    void list(const char* name, const std::vector<Item>& items, const Inside& visit_inside) {
        Node list;
        list.shape = Node::Shape::list;
        for (const auto& item : items) {
            Node outside = std::exchange(root_, {});
            root_.shape = Node::Shape::map;
            visit_inside(item);
            std::swap(outside, root_);
            list.children.push_back(std::move(outside));
        }
        if (!list.children.empty()) add(name, std::move(list));
    }
    void add(const char* name, Node node) {
        node.key = name;
        root_.children.push_back(std::move(node));
    }
    [[nodiscard]] Node& root() { return root_; }

  private:
    [[nodiscard]] std::string path_text(const PlanPath& path) const;

    [[nodiscard]] Node node_of(const std::string& text) const { return text_node(text); }
    [[nodiscard]] Node node_of(const std::vector<std::string>& texts) const {
        return list_of(texts);
    }
    [[nodiscard]] Node node_of(bool value) const { return scalar(value ? "true" : "false", false); }
    [[nodiscard]] Node node_of(const WeatherColumn& column) const {
        return column.number > 0 ? number_node(column.number) : text_node(column.name);
    }
    [[nodiscard]] Node node_of(const std::vector<double>& numbers) const {
        return numbers.size() == 1 ? number_node(numbers.front()) : list_of(numbers);
    }
    [[nodiscard]] Node node_of(const std::vector<int>& numbers) const { return list_of(numbers); }
    [[nodiscard]] Node node_of(const std::array<double, 2>& place) const { return list_of(place); }
    [[nodiscard]] Node node_of(double number) const { return number_node(number); }
    [[nodiscard]] Node node_of(int number) const { return number_node(number); }
    [[nodiscard]] Node node_of(const CivilDate& date) const { return text_node(format_date(date)); }
    [[nodiscard]] Node node_of(const PlanZone& zone) const { return text_node(zone.zone.name()); }
    [[nodiscard]] Node node_of(OutputUnit unit) const {
        return text_node(std::string(name_of(unit)));
    }
    [[nodiscard]] Node node_of(LayerId id) const { return text_node(layer(id).name); }
    template <class Enum>
    requires requires(Enum e) { names_for(e); }
    [[nodiscard]] Node node_of(Enum value) const {
        return text_node(std::string(names_for(value).at(static_cast<std::size_t>(value))));
    }
    [[nodiscard]] Node node_of(const PlanPath& path) const { return text_node(path_text(path)); }
    [[nodiscard]] Node node_of(const PlanRaster& raster) const;
    [[nodiscard]] Node node_of(const PlanLength& length) const {
        return text_node(shortest(length.m) + " m");
    }
    [[nodiscard]] Node node_of(const std::vector<PlanRaster>& rasters) const {
        return rasters.size() == 1 ? node_of(rasters.front()) : list_of(rasters);
    }
    [[nodiscard]] Node node_of(const HourWindow& hours) const {
        return text_node(hour_text(hours.begin_h) + "-" + hour_text(hours.end_h));
    }
    [[nodiscard]] Node node_of(const PlanInstant& instant) const;
    [[nodiscard]] Node node_of(const std::optional<int>& code) const {
        return code ? number_node(*code) : text_node("none");
    }
    [[nodiscard]] Node node_of(const Monthly& months) const;
    [[nodiscard]] Node node_of(const NamedPeriod& period) const;
    [[nodiscard]] Node node_of(const PlanFieldRaster& field) const;
    [[nodiscard]] Node node_of(const PlanSurfaceRaster& field) const;
    [[nodiscard]] Node node_of(const PlanTemperatures& field) const {
        return field_of(field.value, " K");
    }
    [[nodiscard]] Node node_of(const PlanPressures& field) const {
        return field_of(field.value, " hPa");
    }
    [[nodiscard]] Node node_of(const PlanShares& field) const { return node_of(field.value); }
    [[nodiscard]] Node node_of(const PlanLapse& lapse) const {
        return months_of(lapse.k_km, " K/km");
    }
    [[nodiscard]] Node node_of(const PlanWind& wind) const {
        const auto* months = std::get_if<Monthly>(&wind.value);
        return months != nullptr ? months_of(*months, " m/s")
                                 : node_of(std::get<WindCase>(wind.value));
    }
    [[nodiscard]] Node node_of(const PlanEmissivity& emissivity) const {
        const auto* from = std::get_if<EmissivityFrom>(&emissivity.value);
        return from != nullptr ? map_of({{"from", node_of(*from)}}) : node_of(emissivity.value);
    }
    [[nodiscard]] Node node_of(const PlanSurfaceTemperature& surface) const;
    [[nodiscard]] Node field_of(const std::variant<Monthly, PlanFieldRaster>& field,
                                const char* unit) const {
        const auto* months = std::get_if<Monthly>(&field);
        return months != nullptr ? months_of(*months, unit)
                                 : node_of(std::get<PlanFieldRaster>(field));
    }
    /// One value for all months, or a list of twelve.
    [[nodiscard]] Node months_of(const Monthly& months, const char* unit) const {
        std::vector<std::string> texts;
        for (const double value : months) texts.push_back(shortest(value) + unit);
        return std::ranges::count(months, months[0]) == 12 ? node_of(texts.front())
                                                           : node_of(texts);
    }
    [[nodiscard]] static Node map_of(std::vector<std::pair<const char*, Node>> entries) {
        Node map;
        map.shape = Node::Shape::map;
        for (auto& [key, node] : entries) {
            node.key = key;
            map.children.push_back(std::move(node));
        }
        return map;
    }
    template <class... T>
    [[nodiscard]] Node node_of(const std::variant<T...>& value) const {
        return std::visit([&](const auto& one) { return node_of(one); }, value);
    }
    [[nodiscard]] Node node_of(const std::vector<NamedPeriod>& periods) const {
        return list_of(periods);
    }
    [[nodiscard]] Node node_of(const std::array<double, 4>& bounds) const {
        return list_of(bounds);
    }
    template <class T>
    [[nodiscard]] Node node_of(const Given<T>& given) const {
        return node_of(given.value);
    }
    template <class List>
    [[nodiscard]] Node list_of(const List& list) const {
        Node node;
        node.shape = Node::Shape::list;
        for (const auto& item : list) node.children.push_back(node_of(item));
        return node;
    }

    Style style_;
    Node root_;
};

std::string Writer::path_text(const PlanPath& path) const {
    if (style_.folder.empty() || path.given.find("://") != std::string::npos) return path.given;
    if (std::filesystem::path(path.given).is_absolute()) return path.given;
    const auto from = std::filesystem::absolute(style_.folder).lexically_normal();
    return std::filesystem::absolute(path.file).lexically_proximate(from).generic_string();
}

Node Writer::node_of(const PlanRaster& raster) const {
    const auto path = path_text(raster.path);
    if (!raster.band.empty()) return text_node(path + ":" + raster.band);
    // Without a band the end of such a name would be read as one.
    const auto colon = path.rfind(':');
    const bool ends_like_band = colon != path.npos && path.find('/', colon) == path.npos;
    return text_node(ends_like_band ? path + ":1" : path);
}

Node Writer::node_of(const PlanInstant& instant) const {
    const auto& [local, offset_s] = instant.written;
    return text_node(format_date(local.date) + "T" + clock_text(local.seconds_of_day) +
                     (offset_s ? offset_text(*offset_s) : ""));
}

Node Writer::node_of(const Monthly& months) const {
    if (std::ranges::count(months, months[0]) == 12) return number_node(months[0]);
    return list_of(months);
}

Node Writer::node_of(const PlanFieldRaster& field) const {
    std::vector<std::pair<const char*, Node>> entries{{"raster", node_of(field.raster)}};
    if (!field.unit.empty()) entries.emplace_back("unit", text_node(field.unit));
    if (field.scale != 1) entries.emplace_back("scale", number_node(field.scale));
    if (field.offset != 0) entries.emplace_back("offset", number_node(field.offset));
    return map_of(std::move(entries));
}

Node Writer::node_of(const PlanSurfaceRaster& field) const {
    std::vector<std::pair<const char*, Node>> entries{{"raster", node_of(field.raster)}};
    if (field.product) entries.emplace_back("product", node_of(*field.product));
    if (field.quality) entries.emplace_back("quality", node_of(*field.quality));
    if (!field.unit.empty()) entries.emplace_back("unit", text_node(field.unit));
    if (field.scale) entries.emplace_back("scale", number_node(*field.scale));
    if (field.offset) entries.emplace_back("offset", number_node(*field.offset));
    if (!field.time.empty()) entries.emplace_back("time", text_node(field.time));
    if (field.covers != RasterCovers::instant)
        entries.emplace_back("covers", node_of(field.covers));
    return map_of(std::move(entries));
}

Node Writer::node_of(const PlanSurfaceTemperature& surface) const {
    if (const auto* months = std::get_if<Monthly>(&surface.value)) return months_of(*months, " K");
    if (const auto* table = std::get_if<SurfaceTable>(&surface.value)) return node_of(*table);
    if (const auto* above = std::get_if<PlanDifference>(&surface.value))
        return map_of({{"air_plus", text_node(shortest(above->k) + " K")}});
    if (const auto* from = std::get_if<HeatSource>(&surface.value))
        return map_of({{"from", node_of(*from)}});
    return node_of(std::get<PlanSurfaceRaster>(surface.value));
}

Node Writer::node_of(const NamedPeriod& period) const {
    return map_of({{"name", node_of(period.name)},
                   {"from", node_of(period.from)},
                   {"to", node_of(period.to)}});
}

std::string written(const Plan& plan, Style style) {
    Writer writer(std::move(style));
    writer.add("sunbudget", number_node(1));
    visit_plan(plan, writer);
    return yaml_of(writer.root());
}

}  // namespace

std::string plan_text(const Plan& plan, const std::filesystem::path& folder) {
    return written(plan, {folder, false});
}

std::string plan_digest(const Plan& plan) {
    Plan whole = with_defaults(plan);
    whole.outputs.directory.reset();
    whole.report = {};
    return sha256_of(written(whole, {{}, true}));
}

}  // namespace sunbudget
