#include "scalars.hpp"

#include <algorithm>
#include <array>
#include <cmath>

#include "sunbudget/base/text.hpp"

namespace sunbudget {

std::span<const Unit> units_of(ValueKind kind) {
    static constexpr std::array lengths{Unit{"m", 1}, Unit{"km", 1000}, Unit{"ft", 0.3048}};
    static constexpr std::array durations{Unit{"s", 1}, Unit{"min", 60}, Unit{"h", 3600}};
    static constexpr std::array temperatures{Unit{"degC", 1, 273.15}, Unit{"K", 1}};
    static constexpr std::array differences{Unit{"K", 1}};
    static constexpr std::array pressures{Unit{"hPa", 1}, Unit{"kPa", 10}, Unit{"Pa", 0.01}};
    static constexpr std::array lapses{Unit{"K/km", 1}};
    static constexpr std::array speeds{Unit{"m/s", 1}, Unit{"km/h", 1 / 3.6},
                                       Unit{"kn", 1852.0 / 3600}};
    switch (kind) {
        case ValueKind::length:
            return lengths;
        case ValueKind::duration:
            return durations;
        case ValueKind::temperature:
            return temperatures;
        case ValueKind::difference:
            return differences;
        case ValueKind::pressure:
            return pressures;
        case ValueKind::lapse:
            return lapses;
        case ValueKind::speed:
            return speeds;
        default:
            return {};
    }
}

std::optional<double> read_number(const Node& node) {
    if (node.shape != Node::Shape::scalar || node.quoted) return std::nullopt;
    return parse_number(node.text);
}

std::optional<double> read_integer(const Node& node) {
    const auto value = read_number(node);
    return value && std::trunc(*value) == *value ? value : std::nullopt;
}

std::optional<bool> read_boolean(const Node& node) {
    if (node.shape != Node::Shape::scalar || node.quoted || plain_kind(node.text) != Plain::boolean)
        return std::nullopt;
    return node.text.front() == 't' || node.text.front() == 'T';
}

std::optional<std::string> read_text(const Node& node) {
    if (node.shape != Node::Shape::scalar || node.text.empty()) return std::nullopt;
    if (!node.quoted && plain_kind(node.text) != Plain::text) return std::nullopt;
    return node.text;
}

std::optional<double> read_quantity(const Node& node, ValueKind kind) {
    const std::string_view text = node.text;
    const auto end = text.find_first_not_of("+-.0123456789");
    if (node.shape != Node::Shape::scalar || end == text.npos) return std::nullopt;
    const auto number = parse_number(text.substr(0, end));
    const auto name = text.substr(text[end] == ' ' ? end + 1 : end);
    const auto unit = std::ranges::find(units_of(kind), name, &Unit::name);
    if (!number || unit == units_of(kind).end()) return std::nullopt;
    return *number * unit->factor + unit->offset;
}

namespace {
// "6" or "18:30" in hours.
std::optional<double> clock_h(std::string_view text) {
    const auto colon = text.find(':');
    const auto hours = text.substr(0, colon);
    const auto minutes = colon == text.npos ? std::string_view("00") : text.substr(colon + 1);
    const auto is_digits = [](std::string_view part) {
        return part.find_first_not_of("0123456789") == part.npos;
    };
    if (hours.empty() || hours.size() > 2 || minutes.size() != 2) return std::nullopt;
    if (!is_digits(hours) || !is_digits(minutes)) return std::nullopt;
    const double value_h = *parse_number(hours) + *parse_number(minutes) / 60;
    return value_h <= 24 && minutes[0] < '6' ? std::optional(value_h) : std::nullopt;
}

bool has_control(std::string_view text) {
    return std::ranges::any_of(text, [](char c) {
        return static_cast<unsigned char>(c) < 0x20 || static_cast<unsigned char>(c) == 0x7f;
    });
}
}  // namespace

std::optional<HourWindow> read_hours(const Node& node) {
    const auto parts = split(node.text, '-');
    if (node.shape != Node::Shape::scalar || parts.size() != 2) return std::nullopt;
    const auto begin_h = clock_h(parts[0]);
    const auto end_h = clock_h(parts[1]);
    if (!begin_h || !end_h || *begin_h >= *end_h) return std::nullopt;
    return HourWindow{*begin_h, *end_h};
}

std::optional<PlanRaster> read_raster(const Node& node) {
    const auto text = read_text(node);
    if (!text) return std::nullopt;
    const auto colon = text->rfind(':');
    if (colon == text->npos || text->find('/', colon) != text->npos)
        return PlanRaster{{*text, {}}, {}};
    PlanRaster raster{{text->substr(0, colon), {}}, text->substr(colon + 1)};
    const auto first = raster.band.find_first_not_of('0');
    if (raster.path.given.empty() || first == std::string::npos) return std::nullopt;
    return raster;
}

namespace {

using Found = std::optional<Mismatch>;

Mismatch other(const Node& node, const Form& form, std::string todo = {}) {
    return {"found " + described(node) + ", expected " + expected(form), std::move(todo)};
}

Found number_mismatch(const Node& node, const Form& form) {
    const bool whole = form.kind == ValueKind::integer;
    const auto value = whole ? read_integer(node) : read_number(node);
    if (!value) {
        const bool is_odd = !node.quoted && plain_kind(node.text) == Plain::number;
        if (node.quoted && parse_number(node.text)) return other(node, form, "remove the quotes");
        if (is_odd && !read_number(node)) return other(node, form, "write it as a decimal number");
        return other(node, form);
    }
    const auto is_value = [&](const auto& text) { return parse_number(text) == value; };
    if (!form.choices.empty() && std::ranges::none_of(form.choices, is_value))
        return other(node, form);
    if (form.min && (form.above_min ? *value <= *form.min : *value < *form.min))
        return other(node, form);
    if (form.max && *value > *form.max) return other(node, form);
    return std::nullopt;
}

Found quantity_mismatch(const Node& node, const Form& form) {
    const auto value = read_quantity(node, form.kind);
    if (!value && !node.quoted && parse_number(node.text)) {
        std::vector<std::string> names;
        for (const auto& unit : units_of(form.kind)) names.emplace_back(unit.name);
        return other(node, form, "add its unit: " + joined(names, ", "));
    }
    if (!value || *value < *form.min || *value > *form.max) return other(node, form);
    // 0.1 h is 360 s but for the last bit.
    if (form.kind == ValueKind::duration && std::abs(*value - std::round(*value)) > 1e-6)
        return other(node, form, "write it in whole seconds");
    return std::nullopt;
}

Found text_mismatch(const Node& node, const Form& form) {
    const auto text = read_text(node);
    if (!text && !node.quoted && !node.text.empty())
        return other(node, form, "put it in quotes if it is meant as a text");
    if (!text) return other(node, form);
    if (has_control(*text)) return other(node, form, "keep it in one line, without tabs");
    if (form.kind == ValueKind::raster && !read_raster(node))
        return other(node, form, "bands count from 1: PATH:1");
    // Else a slip in a number would be reported as a missing file.
    if (form.beside_names && node.text.find_first_of("./") == std::string::npos)
        return other(node, form, "a file without a dot in its name is written ./NAME");
    return std::nullopt;
}

Found choice_mismatch(const Node& node, const Form& form) {
    const auto text = read_text(node);
    if (text && std::ranges::find(form.choices, *text) != form.choices.end()) return std::nullopt;
    const auto near = nearest_name(node.text, form.choices);
    return other(node, form, near ? "did you mean \"" + *near + "\"?" : "");
}

Found boolean_mismatch(const Node& node, const Form& form) {
    if (read_boolean(node)) return std::nullopt;
    const bool quoted = node.quoted && plain_kind(node.text) == Plain::boolean;
    return other(node, form, quoted ? "remove the quotes" : "");
}

Found path_mismatch(const Node& node, const Form& form) {
    return text_mismatch(node, form);
}

Found date_mismatch(const Node& node, const Form& form) {
    if (parse_date(node.text)) return std::nullopt;
    const bool has_form = node.text.size() == 10 && node.text[4] == '-' && node.text[7] == '-';
    return other(node, form, has_form ? "the calendar has no such day" : "");
}

template <class Parser>
Found parser_mismatch(const Node& node, const Form& form, const Parser& parse) {
    if (!read_text(node)) return other(node, form);
    try {
        (void)parse(node.text);
        return std::nullopt;
    } catch (const Error& error) {
        if (error.cause() != Cause::usage) throw;
        return Mismatch{error.problems().front().what, error.problems().front().todo};
    }
}

}  // namespace

Found mismatch(const Node& scalar, const Form& form) {
    switch (form.kind) {
        case ValueKind::number:
        case ValueKind::integer:
            return number_mismatch(scalar, form);
        case ValueKind::boolean:
            return boolean_mismatch(scalar, form);
        case ValueKind::length:
        case ValueKind::duration:
        case ValueKind::temperature:
        case ValueKind::difference:
        case ValueKind::pressure:
        case ValueKind::lapse:
        case ValueKind::speed:
            return quantity_mismatch(scalar, form);
        case ValueKind::text:
        case ValueKind::raster:
            return text_mismatch(scalar, form);
        case ValueKind::path:
            return path_mismatch(scalar, form);
        case ValueKind::choice:
            return choice_mismatch(scalar, form);
        case ValueKind::date:
            return date_mismatch(scalar, form);
        case ValueKind::instant:
            return parser_mismatch(scalar, form, parse_instant);
        case ValueKind::zone:
            return parser_mismatch(scalar, form, Zone::parse);
        case ValueKind::hours:
            return read_hours(scalar) ? Found{} : Found{other(scalar, form)};
        case ValueKind::map:
        case ValueKind::list:
            break;
    }
    return other(scalar, form);
}

}  // namespace sunbudget
