#include <date/tz.h>
#include <fmt/format.h>

#include <chrono>
#include <cmath>
#include <numbers>
#include <stdexcept>
#include <vector>

#include "sunbudget/base/error.hpp"
#include "sunbudget/base/text.hpp"
#include "sunbudget/base/time.hpp"
#include "sunbudget/base/units.hpp"
#include "time_internal.hpp"

namespace sunbudget {

struct Zone::Iana {
    const date::time_zone* zone;

    // Offsets change at whole seconds, so the fraction plays no part.
    [[nodiscard]] date::local_info at_local(double local_s) const {
        return zone->get_info(
            date::local_seconds{std::chrono::seconds(std::llround(std::floor(local_s)))});
    }
    [[nodiscard]] double offset_s(UtcSeconds utc) const {
        const date::sys_seconds instant{std::chrono::seconds(std::llround(std::floor(utc)))};
        return static_cast<double>(zone->get_info(instant).offset.count());
    }
};

namespace {

constexpr const char* forms =
    "write UTC, an offset such as +02:00, an IANA name such as Europe/Paris, solar-mean or "
    "solar-true";

double local_seconds(const CivilDate& date, double seconds_of_day) {
    return static_cast<double>(days_from_civil(date)) * seconds_per_day + seconds_of_day;
}

LocalTime local_from_seconds(double local_s) {
    double days = std::floor(local_s / seconds_per_day);
    double rest = local_s - days * seconds_per_day;
    if (rest >= seconds_per_day) {  // rounding of an instant just below midnight
        days += 1;
        rest = 0;
    }
    return {civil_from_days(static_cast<long>(days)), rest};
}

double mean_sun_offset_s(double longitude_rad) {
    return longitude_rad / (2 * std::numbers::pi) * seconds_per_day;
}

const date::tzdb& zone_database() {
    try {
        return date::get_tzdb();
    } catch (const std::exception& failure) {
        throw Error(
            Cause::input,
            std::string("the system's time zone database cannot be read: ") + failure.what(), {},
            "install the package tzdata, or write the zone as an offset such as +02:00");
    }
}

const date::time_zone* find_zone(const std::string& name) {
    const auto& database = zone_database();
    std::vector<std::string> names{"UTC", "solar-mean", "solar-true"};
    for (const auto& zone : database.zones) {
        if (zone.name() == name) return &zone;
        names.push_back(zone.name());
    }
    const auto near = nearest_name(name, names);
    throw Error(Cause::usage, "no time zone is called \"" + name + "\"", {},
                near ? "did you mean \"" + *near + "\"?" : forms);
}

double first_offset_s(const date::local_info& info) {
    return static_cast<double>(info.first.offset.count());
}

[[noreturn]] void refuse_local(const date::local_info& info, const std::string& zone,
                               const CivilDate& date, double seconds_of_day) {
    const auto written = format_date(date) + "T" + detail::format_clock(seconds_of_day);
    const auto first = written + detail::format_offset(first_offset_s(info));
    const auto second =
        written + detail::format_offset(static_cast<double>(info.second.offset.count()));
    if (info.result == date::local_info::nonexistent)
        throw Error(Cause::usage,
                    fmt::format("{} does not exist in {}: clocks skip it", written, zone), {},
                    fmt::format("write it with an offset, {} or {}", first, second));
    throw Error(
        Cause::usage, fmt::format("{} happens twice in {}", written, zone), {},
        fmt::format("write it with an offset: {} is the first, {} the second", first, second));
}

}  // namespace

Zone::Zone() : name_("UTC") {}

Zone Zone::parse(std::string_view text) {
    Zone zone;
    zone.name_ = text;
    if (lower_case(text) == "utc" || text == "Z") {
        zone.name_ = "UTC";
    } else if (text == "solar-mean") {
        zone.kind_ = ZoneKind::solar_mean;
    } else if (text == "solar-true") {
        zone.kind_ = ZoneKind::solar_true;
    } else if (const auto offset_s = detail::parse_offset(text)) {
        zone.kind_ = ZoneKind::offset;
        zone.offset_s_ = *offset_s;
    } else if (text.starts_with('+') || text.starts_with('-')) {
        throw Error(Cause::usage, "\"" + zone.name_ + "\" is no offset from UTC", {},
                    "write hours and minutes from -14:00 to +14:00, such as +02:00 or -07:00");
    } else {
        zone.kind_ = ZoneKind::iana;
        zone.iana_ = std::make_shared<const Iana>(Iana{find_zone(zone.name_)});
    }
    return zone;
}

UtcSeconds Zone::to_utc(const CivilDate& date, double seconds_of_day, double longitude_rad) const {
    const double local_s = local_seconds(date, seconds_of_day);
    if (is_solar()) return local_s - mean_sun_offset_s(longitude_rad);
    if (kind_ != ZoneKind::iana) return local_s - offset_s_;
    const auto info = iana_->at_local(local_s);
    if (info.result != date::local_info::unique) refuse_local(info, name_, date, seconds_of_day);
    return local_s - first_offset_s(info);
}

UtcSeconds Zone::day_start(const CivilDate& date, double longitude_rad) const {
    if (kind_ != ZoneKind::iana) return to_utc(date, 0, longitude_rad);
    const double local_s = local_seconds(date, 0);
    const auto info = iana_->at_local(local_s);
    if (info.result == date::local_info::nonexistent)
        return static_cast<double>(info.first.end.time_since_epoch().count());
    return local_s - first_offset_s(info);
}

LocalTime Zone::local(UtcSeconds utc, double longitude_rad) const {
    if (is_solar()) return local_from_seconds(utc + mean_sun_offset_s(longitude_rad));
    return local_from_seconds(utc + (iana_ ? iana_->offset_s(utc) : offset_s_));
}

}  // namespace sunbudget
