#include <algorithm>

#include "keys.hpp"
#include "scalars.hpp"
#include "sunbudget/base/text.hpp"

namespace sunbudget {

namespace {

std::string with_or(const std::vector<std::string>& parts) {
    if (parts.size() < 2) return joined(parts, "");
    const std::vector<std::string> front(parts.begin(), parts.end() - 1);
    return joined(front, ", ") + " or " + parts.back();
}

// " from 1 to 9", " above 0", in a quantity's own units.
std::string range_of(const Form& form) {
    std::string unit = form.kind == ValueKind::length ? " m" : "";
    double per_unit = 1;
    if (form.kind == ValueKind::temperature || form.kind == ValueKind::difference) unit = " K";
    if (form.kind == ValueKind::pressure) unit = " hPa";
    if (form.kind == ValueKind::lapse) unit = " K/km";
    if (form.kind == ValueKind::speed) unit = " m/s";
    if (form.kind == ValueKind::duration) {
        unit = " min";
        per_unit = 60;
    }
    const auto number = [&](double value) { return shortest(value / per_unit) + unit; };
    if (form.min && form.max && !form.above_min)
        return " from " + number(*form.min) + " to " + number(*form.max);
    std::string text;
    if (form.min) text += (form.above_min ? " above " : " of at least ") + number(*form.min);
    if (form.max) text += (form.min ? " and up to " : " up to ") + number(*form.max);
    return text;
}

std::string list_of(const Form& form) {
    const auto& item = form.items.front();
    if (item.kind == ValueKind::map)
        return "a list of maps with " + joined(names_of(item.keys), ", ");
    if (!form.max) return "a list of " + expected(form.items);
    return "a list of " + shortest(*form.max) + ", each " + expected(form.items);
}

}  // namespace

std::string expected(const Form& form) {
    switch (form.kind) {
        case ValueKind::map:
            return "a map with " + joined(names_of(form.keys), ", ");
        case ValueKind::list:
            return list_of(form);
        case ValueKind::text:
            return "a text";
        case ValueKind::choice:
            return with_or(form.choices);
        case ValueKind::path:
            return "a path";
        case ValueKind::raster:
            return "a raster (PATH, PATH:BAND)";
        case ValueKind::number:
            return "a number" + range_of(form);
        case ValueKind::integer:
            if (!form.choices.empty()) return with_or(form.choices);
            if (form.min && form.min == form.max) return shortest(*form.min);
            return "a whole number" + range_of(form);
        case ValueKind::boolean:
            return "true or false";
        case ValueKind::length:
            return "a length (250 m, 20 km, 800 ft)" + range_of(form);
        case ValueKind::duration:
            return "a duration (10 min, 1 h)" + range_of(form);
        case ValueKind::temperature:
            return "a temperature (25 degC, 298 K)" + range_of(form);
        case ValueKind::difference:
            return "a difference of temperatures (4 K)" + range_of(form);
        case ValueKind::pressure:
            return "a pressure (14 hPa, 1.4 kPa)" + range_of(form);
        case ValueKind::lapse:
            return "a lapse (6.5 K/km)" + range_of(form);
        case ValueKind::speed:
            return "a speed (3.4 m/s, 12 km/h, 7 kn)" + range_of(form);
        case ValueKind::date:
            return "a date (2025-06-21)";
        case ValueKind::instant:
            return "an instant (2025-06-21T12:00-07:00)";
        case ValueKind::hours:
            return "the hours of a day (12-17, 6:30-18:00)";
        case ValueKind::zone:
            return "UTC, an offset (+02:00), a zone (Europe/Berlin), solar-mean or solar-true";
    }
    return {};
}

std::string expected(const std::vector<Form>& forms) {
    std::vector<std::string> parts;
    for (const auto& form : forms) {
        const bool is_list_of_first =
            form.kind == ValueKind::list && !parts.empty() && expected(form.items) == parts.front();
        if (form.kind == ValueKind::choice)
            parts.insert(parts.end(), form.choices.begin(), form.choices.end());
        else if (is_list_of_first && form.max)
            parts.push_back("a list of " + shortest(*form.max) + " such");
        else
            parts.push_back(expected(form));
    }
    return with_or(parts);
}

}  // namespace sunbudget
