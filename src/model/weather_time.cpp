#include <cmath>

#include "sunbudget/base/text.hpp"
#include "sunbudget/base/units.hpp"
#include "weather_table.hpp"

namespace sunbudget {

namespace {

[[noreturn]] void refuse(std::string_view text, const std::string& todo) {
    throw Error(Cause::input, "\"" + std::string(text) + "\" is no time", {}, todo);
}

/// A whole number off the front, of one digit at least and `most` at most.
std::optional<int> take_digits(std::string_view& rest, std::size_t most, bool all) {
    std::size_t count = 0;
    int value = 0;
    while (count < most && count < rest.size() && rest[count] >= '0' && rest[count] <= '9')
        value = value * 10 + (rest[count++] - '0');
    if (count == 0 || (all && count < most)) return std::nullopt;
    rest.remove_prefix(count);
    return value;
}

/// The parts of a time as they are found.
struct Parts {
    std::optional<int> year, month, day, day_of_year, hour, minute, second;
};

std::optional<CivilDate> date_of(const Parts& parts) {
    if (!parts.year) return std::nullopt;
    if (parts.day_of_year) {
        const long first = days_from_civil({*parts.year, 1, 1});
        const auto date = civil_from_days(first + *parts.day_of_year - 1);
        return *parts.day_of_year >= 1 && date.year == *parts.year ? std::optional(date)
                                                                   : std::nullopt;
    }
    if (!parts.month || !parts.day) return std::nullopt;
    const CivilDate date{*parts.year, *parts.month, *parts.day};
    return is_valid(date) ? std::optional(date) : std::nullopt;
}

std::optional<WeatherTime> time_of(const Parts& parts) {
    const auto date = date_of(parts);
    if (!date) return std::nullopt;
    WeatherTime time{*date, std::nullopt, std::nullopt};
    if (!parts.hour) return time;
    const int minute = parts.minute.value_or(0), second = parts.second.value_or(0);
    const double seconds = *parts.hour * 3600.0 + minute * 60.0 + second;
    if (minute > 59 || second > 59 || seconds > seconds_per_day) return std::nullopt;
    time.seconds_of_day = seconds;
    return time;
}

struct Token {
    std::string_view letters;
    std::optional<int> Parts::*part;
};
constexpr std::array tokens{Token{"YYYY", &Parts::year},       Token{"MM", &Parts::month},
                            Token{"DDD", &Parts::day_of_year}, Token{"DD", &Parts::day},
                            Token{"hh", &Parts::hour},         Token{"mm", &Parts::minute},
                            Token{"ss", &Parts::second}};

const Token* token_at(std::string_view form) {
    for (const auto& token : tokens)
        if (form.starts_with(token.letters)) return &token;
    return nullptr;
}

/// What follows a form's end stays in `text`. False when the text is otherwise.
bool take_form(std::string_view& text, std::string_view form, Parts& parts) {
    while (!form.empty()) {
        const auto* token = token_at(form);
        if (token == nullptr) {
            if (text.empty() || text.front() != form.front()) return false;
            text.remove_prefix(1);
            form.remove_prefix(1);
            continue;
        }
        form.remove_prefix(token->letters.size());
        const bool closed_up = token_at(form) != nullptr;
        const auto value = take_digits(text, token->letters.size(), closed_up);
        if (!value) return false;
        parts.*(token->part) = value;
    }
    return true;
}

/// "", "Z", "+02:00", ":30", ".5" after hours and minutes.
bool take_rest(std::string_view rest, WeatherTime& time) {
    if (rest.starts_with(':')) {
        const auto end = rest.find_first_not_of("0123456789.", 1);
        const auto seconds = parse_number(rest.substr(1, end == rest.npos ? rest.npos : end - 1));
        if (!seconds || *seconds < 0 || *seconds >= 60) return false;
        *time.seconds_of_day += *seconds;
        rest.remove_prefix(std::min(end, rest.size()));
    }
    if (rest.empty()) return *time.seconds_of_day <= seconds_per_day;
    if (rest == "Z") {
        time.offset_s = 0;
        return true;
    }
    const double sign = rest.front() == '-' ? -1 : 1;
    if (rest.front() != '+' && rest.front() != '-') return false;
    rest.remove_prefix(1);
    Parts parts;
    if (!take_form(rest, "hh:mm", parts) || !rest.empty()) return false;
    time.offset_s = sign * (*parts.hour * 3600.0 + *parts.minute * 60.0);
    return *parts.hour <= 14 && *parts.minute < 60;
}

}  // namespace

WeatherTime weather_time(std::string_view text, std::string_view form) {
    Parts parts;
    auto rest = text;
    const bool fits = take_form(rest, form, parts) && rest.empty();
    const auto time = fits ? time_of(parts) : std::nullopt;
    if (!time) refuse(text, "weather.time_form says " + std::string(form));
    return *time;
}

WeatherTime weather_time(std::string_view text) {
    for (const auto* form :
         {"YYYY-MM-DDThh:mm", "YYYY-MM-DD hh:mm", "YYYY-MM-DD", "YYYYMMDDhhmm", "YYYYMMDD"}) {
        Parts parts;
        auto rest = text;
        if (!take_form(rest, form, parts)) continue;
        auto time = time_of(parts);
        if (!time) break;
        if (rest.empty() || (time->seconds_of_day && take_rest(rest, *time))) return *time;
    }
    refuse(text,
           "write 2025-06-21T12:00, or say how times are written: weather.time_form: \"DD/MM/YYYY "
           "hh:mm\"");
}

WeatherClock::WeatherClock(const WeatherTable& table, const WeatherFormat& format)
    : format_(format) {
    bool declared = false;
    for (std::size_t i = 0; i < index_.size(); ++i) {
        if (!format.time_columns[i]) continue;
        declared = true;
        index_[i] = table.index_of(*format.time_columns[i]);
        if (!index_[i])
            throw Error(Cause::input,
                        "the table has no column \"" + format.time_columns[i]->name + "\"",
                        format.file, suggestion(format.time_columns[i]->name, table.header()));
    }
    if (!declared)
        for (std::size_t i = 0; i < index_.size(); ++i)
            index_[i] = table.index_of({weather_time_names[i], 0});
    const bool has_day = index_[3] ? index_[2].has_value() : index_[4].has_value();
    if (!index_[0] && !(has_day && (index_[1] || format.typical)))
        throw Error(Cause::input, "no column of the table is known to hold its time", format.file,
                    "say weather.columns: {time: NAME}, or year, month, day (or day_of_year), "
                    "hour, minute");
}

WeatherTime WeatherClock::at(const WeatherCells& cells) const {
    if (!index_[0]) return from_parts(cells);
    if (*index_[0] >= cells.size())
        throw Error(Cause::input, "the row has no time", {}, "it has too few cells");
    const auto text = trimmed(cells[*index_[0]]);
    return format_.time_form.empty() ? weather_time(text) : weather_time(text, format_.time_form);
}

WeatherTime WeatherClock::from_parts(const WeatherCells& cells) const {
    const auto number = [&](std::size_t part) -> std::optional<double> {
        if (!index_[part]) return std::nullopt;
        const auto text = *index_[part] < cells.size() ? cells[*index_[part]] : std::string_view();
        const auto value = parse_number(text);
        if (!value)
            throw Error(Cause::input,
                        "\"" + std::string(text) + "\" is no " + weather_time_names[part], {}, {});
        return value;
    };
    const auto whole = [&](std::size_t part) -> std::optional<int> {
        const auto value = number(part);
        if (!value) return std::nullopt;
        if (std::abs(*value) > 9999 || std::trunc(*value) != *value)
            throw Error(Cause::input, shortest(*value) + " is no " + weather_time_names[part], {},
                        {});
        return static_cast<int>(*value);
    };
    Parts parts;
    constexpr int leap_year = 2000;  // a typical year without a year of its own may have any day
    parts.year = index_[1] ? whole(1) : leap_year;
    parts.month = whole(2);
    parts.day = whole(3);
    if (!parts.day) parts.day_of_year = whole(4);
    auto time = time_of(parts);
    if (!time)
        throw Error(Cause::input, "the row's day is on no calendar", {},
                    "look at the columns of year, month and day");
    const auto hour = number(5), minute = number(6);
    if (!hour) return *time;
    time->seconds_of_day = *hour * 3600 + minute.value_or(0) * 60;
    if (!(*time->seconds_of_day >= 0 && *time->seconds_of_day <= seconds_per_day))
        throw Error(Cause::input,
                    "the row's time of day is " + shortest(*hour) + " h " +
                        shortest(minute.value_or(0)) + " min",
                    {}, "a day has hours 0 to 24");
    return *time;
}

}  // namespace sunbudget
