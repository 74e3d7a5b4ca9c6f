#include "typed.hpp"

#include "keys.hpp"

namespace sunbudget {

std::filesystem::path folder_of(const std::string& file) {
    return std::filesystem::path(file).parent_path();
}

void Typed::get(const Node& node, std::string& value) {
    value = node.text;
}

void Typed::get(const Node& node, std::vector<std::string>& value) {
    for (const auto& item : node.children) value.push_back(item.text);
}

void Typed::get(const Node& node, double& value) {
    value = *read_number(node);
}

void Typed::get(const Node& node, int& value) {
    value = static_cast<int>(*read_integer(node));
}

void Typed::get(const Node& node, std::vector<int>& value) {
    for (const auto& item : node.children) value.push_back(static_cast<int>(*read_integer(item)));
}

void Typed::get(const Node& node, bool& value) {
    value = *read_boolean(node);
}

void Typed::get(const Node& node, WeatherColumn& value) {
    if (const auto number = read_integer(node))
        value.number = static_cast<int>(*number);
    else
        value.name = node.text;
}

void Typed::get(const Node& node, std::vector<double>& value) {
    if (node.shape == Node::Shape::scalar) value.push_back(*read_number(node));
    for (const auto& item : node.children) value.push_back(*read_number(item));
}

void Typed::get(const Node& node, CivilDate& value) {
    value = *parse_date(node.text);
}

void Typed::get(const Node& node, HourWindow& value) {
    value = *read_hours(node);
}

void Typed::get(const Node& node, OutputUnit& value) {
    value = *output_unit_named(node.text);
}

void Typed::get(const Node& node, LayerId& value) {
    value = layer_named(node.text)->id;
}

void Typed::get(const Node& node, PlanZone& value) {
    value.zone = Zone::parse(node.text);
}

void Typed::get(const Node& node, PlanInstant& value) {
    value.written = parse_instant(node.text);
}

void Typed::get(const Node& node, std::optional<int>& value) {
    if (const auto code = read_integer(node)) value = static_cast<int>(*code);
}

void Typed::get(const Node& node, PlanPath& value) const {
    value = path_of(node.text);
}

void Typed::get(const Node& node, PlanRaster& value) const {
    value = *read_raster(node);
    value.path = path_of(value.path.given);
}

void Typed::get(const Node& node, NamedPeriod& value) const {
    value = {given<std::string>(*node.find("name")), given<CivilDate>(*node.find("from")),
             given<CivilDate>(*node.find("to"))};
}

void Typed::get(const Node& node, std::variant<Totals, std::vector<NamedPeriod>>& value) const {
    if (node.shape == Node::Shape::scalar) return get(node, value.emplace<Totals>());
    auto& periods = value.emplace<std::vector<NamedPeriod>>();
    for (const auto& item : node.children) get(item, periods.emplace_back());
}

void Typed::get(const Node& node, std::variant<LikeInput, PlanPath>& value) const {
    if (is_choice(node, "grid.like")) return get(node, value.emplace<LikeInput>());
    get(node, value.emplace<PlanPath>());
}

void Typed::get(const Node& node, TableChoice& value) const {
    if (is_choice(node, "surface.cover.classes"))
        value = node.text;
    else
        get(node, value.emplace<PlanPath>());
}

void Typed::get(const Node& node, PlanLength& value) {
    value.m = *read_quantity(node, ValueKind::length);
}

void Typed::get(const Node& node, std::vector<PlanRaster>& value) const {
    if (node.shape == Node::Shape::scalar) return get(node, value.emplace_back());
    for (const auto& item : node.children) get(item, value.emplace_back());
}

void Typed::get(const Node& node, std::variant<Monthly, std::vector<PlanRaster>>& value) const {
    if (node.shape == Node::Shape::scalar && !read_number(node))
        return get(node, value.emplace<std::vector<PlanRaster>>());
    get(node, value.emplace<Monthly>());
}

void Typed::get(const Node& node, std::variant<std::vector<PlanRaster>, PlanLength>& value) const {
    if (node.shape == Node::Shape::scalar && read_quantity(node, ValueKind::length))
        return get(node, value.emplace<PlanLength>());
    auto& rasters = value.emplace<std::vector<PlanRaster>>();
    if (node.shape == Node::Shape::scalar) return get(node, rasters.emplace_back());
    for (const auto& item : node.children) get(item, rasters.emplace_back());
}

void Typed::get(const Node& node, PlanSkyNumbers& value) const {
    const bool numbers = node.shape == Node::Shape::list || read_number(node);
    return numbers ? get(node, value.emplace<Monthly>()) : get(node, value.emplace<PlanRaster>());
}

void Typed::get(const Node& node, std::variant<SlopeFrom, PlanPath>& value) const {
    if (is_choice(node, "terrain.slope_from")) return get(node, value.emplace<SlopeFrom>());
    get(node, value.emplace<PlanPath>());
}

Monthly Typed::months(const Node& node, ValueKind kind) {
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

double Typed::number_or(const Node& map, const char* name, double otherwise) {
    return map.has(name) ? *read_number(*map.find(name)) : otherwise;
}

std::string Typed::text_or_none(const Node& map, const char* name) {
    return map.has(name) ? map.find(name)->text : std::string();
}

void Typed::get(const Node& node, PlanFieldRaster& value) const {
    if (node.has("raster")) get(*node.find("raster"), value.raster);
    value.unit = text_or_none(node, "unit");
    value.scale = number_or(node, "scale", 1);
    value.offset = number_or(node, "offset", 0);
}

void Typed::field(const Node& node, ValueKind kind,
                  std::variant<Monthly, PlanFieldRaster>& value) const {
    if (node.shape == Node::Shape::map) return get(node, value.emplace<PlanFieldRaster>());
    value = months(node, kind);
}

void Typed::get(const Node& node, PlanTemperatures& value) const {
    field(node, ValueKind::temperature, value.value);
}

void Typed::get(const Node& node, PlanPressures& value) const {
    field(node, ValueKind::pressure, value.value);
}

void Typed::get(const Node& node, PlanShares& value) const {
    field(node, ValueKind::number, value.value);
}

void Typed::get(const Node& node, PlanWind& value) {
    if (node.shape == Node::Shape::scalar &&
        std::ranges::find(wind_names, node.text) != wind_names.end())
        get(node, value.value.emplace<WindCase>());
    else
        value.value = months(node, ValueKind::speed);
}

void Typed::get(const Node& node, PlanLapse& value) {
    value.k_km = months(node, ValueKind::lapse);
}

void Typed::get(const Node& node, PlanEmissivity& value) const {
    if (node.shape == Node::Shape::scalar) return get(node, value.value.emplace<double>());
    if (node.has("from")) return get(*node.find("from"), value.value.emplace<EmissivityFrom>());
    get(node, value.value.emplace<PlanFieldRaster>());
}

void Typed::get(const Node& node, PlanSurfaceRaster& value) const {
    get(*node.find("raster"), value.raster);
    if (node.has("product")) get(*node.find("product"), value.product.emplace());
    if (node.has("quality")) get(*node.find("quality"), value.quality.emplace());
    value.unit = text_or_none(node, "unit");
    if (node.has("scale")) value.scale = number_or(node, "scale", 1);
    if (node.has("offset")) value.offset = number_or(node, "offset", 0);
    value.time = text_or_none(node, "time");
    if (node.has("covers")) get(*node.find("covers"), value.covers);
}

void Typed::get(const Node& node, PlanSurfaceTemperature& value) const {
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

bool Typed::is_choice(const Node& node, const std::string& key) {
    const auto& choices = plan_key(key).forms.front().choices;
    return std::ranges::find(choices, node.text) != choices.end();
}

PlanPath Typed::path_of(const std::string& given) const {
    // Left alone, so that whoever opens it can say why it is refused.
    if (given.find("://") != std::string::npos) return {given, given};
    return {given, (folder_ / given).lexically_normal()};
}

}  // namespace sunbudget
