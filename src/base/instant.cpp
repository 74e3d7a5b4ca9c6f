#include <cmath>

#include "sunbudget/base/error.hpp"
#include "sunbudget/base/text.hpp"
#include "sunbudget/base/time.hpp"
#include "sunbudget/base/units.hpp"
#include "time_internal.hpp"

namespace sunbudget {

namespace {

[[noreturn]] void refuse(std::string_view text, const char* why) {
    throw Error(
        Cause::usage, "\"" + std::string(text) + "\" is no instant: " + why, {},
        "write it as 2025-06-21T12:00-07:00, 2025-06-21T19:00:00Z, or without an offset for "
        "the time in the zone");
}

// Takes "HH:MM", "HH:MM:SS" or "HH:MM:SS.fff" off the front of `rest`.
std::optional<double> take_clock(std::string_view& rest) {
    if (rest.size() < 5 || rest[2] != ':') return std::nullopt;
    const auto hours = detail::digits(rest.substr(0, 2));
    const auto minutes = detail::digits(rest.substr(3, 2));
    if (!hours || !minutes || *minutes > 59) return std::nullopt;
    rest.remove_prefix(5);
    double seconds = 0;
    if (rest.starts_with(':')) {
        const auto end = rest.find_first_not_of("0123456789.", 1);
        const auto written = rest.substr(1, end == rest.npos ? rest.npos : end - 1);
        const auto value = parse_number(written);
        if (!value || *value >= 60 || written.find('.') != (written.size() == 2 ? written.npos : 2))
            return std::nullopt;
        seconds = *value;
        rest.remove_prefix(1 + written.size());
    }
    const double of_day = *hours * 3600.0 + *minutes * 60.0 + seconds;
    return of_day <= seconds_per_day ? std::optional(of_day) : std::nullopt;
}

}  // namespace

WrittenInstant parse_instant(std::string_view text) {
    if (text.size() < 16 || (text[10] != 'T' && text[10] != ' '))
        refuse(text, "a date and a time of day are needed");
    const auto date = parse_date(text.substr(0, 10));
    if (!date) refuse(text, "the calendar has no such day");
    auto rest = text.substr(11);
    const auto clock_s = take_clock(rest);
    if (!clock_s) refuse(text, "the time of day must lie between 00:00 and 24:00");
    WrittenInstant written{{*date, *clock_s}, std::nullopt};
    if (*clock_s == seconds_per_day) written.local = {next_day(*date), 0};
    if (rest == "Z")
        written.offset_s = 0;
    else if (!rest.empty() && !(written.offset_s = detail::parse_offset(rest)))
        refuse(text, "what follows the time of day is no offset");
    return written;
}

UtcSeconds resolve(const WrittenInstant& written, const Zone& zone, double longitude_rad) {
    const auto& [date, seconds_of_day] = written.local;
    if (!written.offset_s) return zone.to_utc(date, seconds_of_day, longitude_rad);
    return Zone().to_utc(date, seconds_of_day) - *written.offset_s;
}

}  // namespace sunbudget
