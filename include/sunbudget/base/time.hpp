#pragma once

#include <compare>
#include <memory>
#include <optional>
#include <string>
#include <string_view>

namespace sunbudget {

/// Seconds since 1970-01-01T00:00Z without leap seconds (POSIX). Every instant is one of these.
using UtcSeconds = double;

/// A day of the Gregorian calendar, astronomical year numbers.
struct CivilDate {
    int year = 1970;
    int month = 1;
    int day = 1;

    friend auto operator<=>(const CivilDate&, const CivilDate&) = default;
};

/// Days in a month of 1..12.
[[nodiscard]] int days_in_month(int year, int month) noexcept;
[[nodiscard]] bool is_valid(const CivilDate& date) noexcept;
/// Days since 1970-01-01; the date must be valid.
[[nodiscard]] long days_from_civil(const CivilDate& date) noexcept;
[[nodiscard]] CivilDate civil_from_days(long days) noexcept;
/// 1 on the first of January.
[[nodiscard]] int day_of_year(const CivilDate& date) noexcept;
[[nodiscard]] CivilDate next_day(const CivilDate& date) noexcept;
/// "2025-06-21"; nothing for any other form and for a day that no calendar has (2025-02-29).
[[nodiscard]] std::optional<CivilDate> parse_date(std::string_view text) noexcept;
[[nodiscard]] std::string format_date(const CivilDate& date);

/// A day and a time of day on some clock, `seconds_of_day` in [0, 86400].
struct LocalTime {
    CivilDate date;
    double seconds_of_day = 0;
};

enum class ZoneKind { utc, offset, iana, solar_mean, solar_true };

/// What turns a day and a time of day into an instant. Copies are cheap; safe to share by threads.
class Zone {
  public:
    /// UTC.
    Zone();
    /// "UTC", an offset ("+02:00"), an IANA name ("Europe/Berlin"), "solar-mean" or "solar-true".
    /// Throws Error(usage) with the nearest name for anything else, Error(input) when the system
    /// has no time zone database.
    [[nodiscard]] static Zone parse(std::string_view text);

    [[nodiscard]] ZoneKind kind() const noexcept { return kind_; }
    /// As it would be written in a plan.
    [[nodiscard]] const std::string& name() const noexcept { return name_; }
    /// Depends on the place's longitude.
    [[nodiscard]] bool is_solar() const noexcept {
        return kind_ == ZoneKind::solar_mean || kind_ == ZoneKind::solar_true;
    }

    /// The instant of a local time. `longitude_rad`, east positive, matters in the solar zones
    /// only. For solar-true this is the instant at which the *mean* sun shows that time; physics'
    /// utc_from_true_solar takes it on from there.
    /// Throws Error(usage) for a local time that the zone's clocks skip or show twice, saying how
    /// to write it with an offset.
    [[nodiscard]] UtcSeconds to_utc(const CivilDate& date, double seconds_of_day,
                                    double longitude_rad = 0) const;
    /// The first instant of a day, which lasts to the next day's: 23 or 25 h where clocks change.
    /// Where midnight is skipped the day starts at the change, where it is shown twice at the
    /// first.
    [[nodiscard]] UtcSeconds day_start(const CivilDate& date, double longitude_rad = 0) const;
    /// What the zone's clock shows, seconds_of_day in [0, 86400); mean sun for solar-true.
    [[nodiscard]] LocalTime local(UtcSeconds utc, double longitude_rad = 0) const;

  private:
    struct Iana;
    ZoneKind kind_ = ZoneKind::utc;
    std::string name_;
    double offset_s_ = 0;
    std::shared_ptr<const Iana> iana_;
};

/// An instant as written: without an offset it needs a zone, and a longitude if that is solar.
struct WrittenInstant {
    LocalTime local;
    std::optional<double> offset_s;
};

/// "2025-06-21T12:00", seconds (with a decimal fraction) optional, a blank allowed for the T, and
/// an optional "Z" or offset "-07:00". 24:00 is the next day's 00:00. Throws Error(usage) for any
/// other form and for impossible days and times, leap seconds included.
[[nodiscard]] WrittenInstant parse_instant(std::string_view text);
/// By its own offset, else by the zone as Zone::to_utc does.
[[nodiscard]] UtcSeconds resolve(const WrittenInstant& written, const Zone& zone,
                                 double longitude_rad);

/// "2025-06-21T19:00:00Z", to the nearest second.
[[nodiscard]] std::string format_utc(UtcSeconds utc);

}  // namespace sunbudget
