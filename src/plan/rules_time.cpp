#include <algorithm>
#include <tuple>

#include "rules_parts.hpp"

namespace sunbudget {

namespace {

/// The instant or the days, and the periods they are cut into.
class TimeRules : Rules {
  public:
    using Rules::Rules;
    void all() const {
        instant_zone();
        dates();
        named_periods();
    }

  private:
    void instant_zone() const;
    void dates() const;
    void named_periods() const;
    void named_period(const NamedPeriod& period) const;
};

void TimeRules::instant_zone() const {
    if (!plan_.time.at) return;
    const bool has_offset = plan_.time.at->value.written.offset_s.has_value();
    if (!has_offset && !written("time.zone"))
        mistakes_.add(plan_.time.at->place, "the instant has neither an offset nor a zone",
                      "add its offset from UTC (2025-06-21T12:00-07:00, or Z), or time.zone");
    if (has_offset && plan_.time.zone)
        mistakes_.add(plan_.time.zone->place, "the instant has an offset, so the zone says nothing",
                      "remove the zone or the offset");
}

void TimeRules::dates() const {
    const auto& [from, to] = std::tie(plan_.time.from, plan_.time.to);
    if (from && to && **to < **from)
        mistakes_.add(to->place, format_date(**to) + " lies before from, " + format_date(**from),
                      "both days belong to the period: to is the last");
    constexpr long most_days = 31;  // 744 bands
    const auto* totals = plan_.time.totals ? std::get_if<Totals>(&**plan_.time.totals) : nullptr;
    if (from && to && totals != nullptr && *totals == Totals::hour &&
        days_from_civil(**to) - days_from_civil(**from) >= most_days)
        mistakes_.add(plan_.time.totals->place, "a band for each hour of more than 31 days",
                      "take fewer days, or totals: day");
}

void TimeRules::named_periods() const {
    if (!plan_.time.totals) return;
    const auto* periods = std::get_if<std::vector<NamedPeriod>>(&**plan_.time.totals);
    if (periods == nullptr) return;
    for (const auto& period : *periods) {
        const auto first = std::ranges::find(*periods, period.name, &NamedPeriod::name);
        if (&*first != &period)
            mistakes_.add(period.name.place, "two periods are named \"" + *period.name + "\"",
                          "give each its own name");
        named_period(period);
    }
}

void TimeRules::named_period(const NamedPeriod& period) const {
    if (*period.to < *period.from)
        mistakes_.add(period.to.place,
                      format_date(*period.to) + " lies before from, " + format_date(*period.from),
                      "both days belong to the period: to is the last");
    const auto& [from, to] = std::tie(plan_.time.from, plan_.time.to);
    if (from && *period.from < **from)
        mistakes_.add(period.from.place,
                      "the period starts before time.from, " + format_date(**from),
                      "named periods lie inside the plan's own");
    if (to && *period.to > **to)
        mistakes_.add(period.to.place, "the period ends after time.to, " + format_date(**to),
                      "named periods lie inside the plan's own");
}

}  // namespace

void check_time(const Plan& plan, const Node& root, Mistakes& mistakes) {
    TimeRules(plan, root, mistakes).all();
}

}  // namespace sunbudget
