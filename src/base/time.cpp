#include "sunbudget/base/time.hpp"

#include <fmt/format.h>

#include <cassert>
#include <cmath>

#include "sunbudget/base/text.hpp"
#include "sunbudget/base/units.hpp"
#include "time_internal.hpp"

namespace sunbudget {

namespace {
bool is_leap(int year) noexcept {
    return year % 4 == 0 && (year % 100 != 0 || year % 400 == 0);
}
}  // namespace

int days_in_month(int year, int month) noexcept {
    constexpr int lengths[] = {31, 28, 31, 30, 31, 30, 31, 31, 30, 31, 30, 31};
    assert(month >= 1 && month <= 12);
    return month == 2 && is_leap(year) ? 29 : lengths[month - 1];
}

bool is_valid(const CivilDate& date) noexcept {
    return date.month >= 1 && date.month <= 12 && date.day >= 1 &&
           date.day <= days_in_month(date.year, date.month);
}

// Years are counted from the first of March, so that the leap day comes last and the months'
// lengths follow one line: 153 days in every five months. 400 years have 146097 days.
long days_from_civil(const CivilDate& date) noexcept {
    assert(is_valid(date));
    const long year = date.month > 2 ? date.year : date.year - 1L;
    const long era = (year >= 0 ? year : year - 399) / 400;
    const long year_of_era = year - era * 400;
    const long month = (date.month + 9) % 12;
    const long day = (153 * month + 2) / 5 + date.day - 1;
    return era * 146097 + year_of_era * 365 + year_of_era / 4 - year_of_era / 100 + day - 719468;
}

CivilDate civil_from_days(long days) noexcept {
    days += 719468;
    const long era = (days >= 0 ? days : days - 146096) / 146097;
    const long day_of_era = days - era * 146097;
    const long year_of_era =
        (day_of_era - day_of_era / 1460 + day_of_era / 36524 - day_of_era / 146096) / 365;
    const long day = day_of_era - (365 * year_of_era + year_of_era / 4 - year_of_era / 100);
    const long month = (5 * day + 2) / 153;
    CivilDate date;
    date.day = static_cast<int>(day - (153 * month + 2) / 5 + 1);
    date.month = static_cast<int>(month < 10 ? month + 3 : month - 9);
    date.year = static_cast<int>(year_of_era + era * 400 + (date.month <= 2 ? 1 : 0));
    return date;
}

int day_of_year(const CivilDate& date) noexcept {
    return static_cast<int>(days_from_civil(date) - days_from_civil({date.year, 1, 1})) + 1;
}

CivilDate next_day(const CivilDate& date) noexcept {
    return civil_from_days(days_from_civil(date) + 1);
}

std::optional<CivilDate> parse_date(std::string_view text) noexcept {
    if (text.size() != 10 || text[4] != '-' || text[7] != '-') return std::nullopt;
    const auto year = detail::digits(text.substr(0, 4));
    const auto month = detail::digits(text.substr(5, 2));
    const auto day = detail::digits(text.substr(8, 2));
    if (!year || !month || !day) return std::nullopt;
    const CivilDate date{*year, *month, *day};
    return is_valid(date) ? std::optional(date) : std::nullopt;
}

std::string format_date(const CivilDate& date) {
    return fmt::format("{:04}-{:02}-{:02}", date.year, date.month, date.day);
}

std::string format_utc(UtcSeconds utc) {
    const double whole = std::round(utc);
    const double days = std::floor(whole / seconds_per_day);
    return format_date(civil_from_days(static_cast<long>(days))) + "T" +
           detail::format_clock(whole - days * seconds_per_day) + "Z";
}

namespace detail {

std::optional<int> digits(std::string_view text) noexcept {
    int value = 0;
    for (const char c : text) {
        if (c < '0' || c > '9') return std::nullopt;
        value = value * 10 + (c - '0');
    }
    return text.empty() ? std::nullopt : std::optional(value);
}

std::string format_clock(double seconds_of_day) {
    const auto s = std::lround(seconds_of_day);
    return fmt::format("{:02}:{:02}:{:02}", s / 3600, s / 60 % 60, s % 60);
}

std::string format_offset(double offset_s) {
    const auto minutes = std::lround(std::abs(offset_s) / 60);
    return fmt::format("{}{:02}:{:02}", offset_s < 0 ? '-' : '+', minutes / 60, minutes % 60);
}

std::optional<double> parse_offset(std::string_view text) noexcept {
    constexpr int largest_hours = 14;  // offsets in use run from -12:00 to +14:00
    if (text.size() != 6 || (text[0] != '+' && text[0] != '-') || text[3] != ':')
        return std::nullopt;
    const auto hours = digits(text.substr(1, 2));
    const auto minutes = digits(text.substr(4, 2));
    if (!hours || !minutes || *minutes > 59 || *hours * 60 + *minutes > largest_hours * 60)
        return std::nullopt;
    const double offset_s = *hours * 3600.0 + *minutes * 60.0;
    return text[0] == '-' ? -offset_s : offset_s;
}

}  // namespace detail

}  // namespace sunbudget
