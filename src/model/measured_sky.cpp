#include "sunbudget/model/measured_sky.hpp"

#include <fmt/format.h>

#include <algorithm>
#include <array>
#include <map>
#include <utility>

#include "measured_shares.hpp"
#include "station_sky.hpp"
#include "sunbudget/base/error.hpp"

namespace sunbudget {

namespace {

constexpr double hour_s = 3600;

/// From shares of intervals to shares of all the run's days: what is covered, what gaps take.
class Builder {
  public:
    Builder(const WeatherRecord& record, const Station& station, const Sky& clear,
            const TimePlan& times)
        : record_(record), station_(station), times_(times), sky_(station, clear, times) {}

    MeasuredSky build(bool stop_at_gaps) {
        find_days();
        std::vector<TimeSpan> spans;
        for (const auto& day : days_) spans.push_back(day.span);
        pieces_ = MeasuredShares(record_, sky_, report_).of_days(spans);
        for (auto& day : days_) cover(day);
        if (stop_at_gaps) refuse_gaps();
        fill_gaps();
        return finish();
    }

  private:
    struct Day {
        CivilDate date;
        TimeSpan span;
        double clear = 0, covered = 0;             // global of the clear sky, J m-2
        double direct = 0, diffuse = 0;            // of the clear sky where covered
        double real_direct = 0, real_diffuse = 0;  // of the record there
        std::vector<TimeSpan> gaps;
        [[nodiscard]] bool counts() const { return covered >= day_needs * clear; }
    };

    void find_days();
    void cover(Day& day);
    void refuse_gaps() const;
    void fill_gaps();
    [[nodiscard]] std::vector<bool> thin_bands() const;
    MeasuredSky finish();

    const WeatherRecord& record_;
    Station station_;
    const TimePlan& times_;
    StationSky sky_;
    std::vector<Day> days_;
    std::vector<LightShares::Piece> pieces_;
    MeasuredReport report_;
};

void Builder::find_days() {
    std::map<CivilDate, bool> dates;
    if (times_.instant) dates[times_.zone.local(*times_.instant, station_.longitude_rad).date];
    for (const auto& period : times_.periods)
        for (const auto& day : period.days) dates[day.date];
    for (const auto& [date, unused] : dates)
        days_.push_back({date, sky_.span_of_day(date), 0, 0, 0, 0, 0, 0, {}});
}

/// Adds up a day's clear light, as a whole and where the record has it, and notes the sunlit gaps.
void Builder::cover(Day& day) {
    const auto piece_after = [&](UtcSeconds utc) {
        return std::upper_bound(
            pieces_.begin(), pieces_.end(), utc,
            [](UtcSeconds t, const LightShares::Piece& p) { return t < p.span.end; });
    };
    const auto add = [&](const TimeSpan& span, const LightShare* share) {
        sky_.each_piece(span, [&](const StationSky::Piece& piece) {
            const auto [direct, diffuse] = sky_.clear_light(piece);
            day.clear += direct + diffuse;
            if (share == nullptr) return;
            day.covered += direct + diffuse;
            day.direct += direct;
            day.diffuse += diffuse;
            day.real_direct += share->beam * direct;
            day.real_diffuse += share->diffuse * diffuse + share->scattered * direct;
        });
    };
    for (const auto& lit : sky_.sunlit(day.span)) {
        UtcSeconds at = lit.begin;
        for (auto piece = piece_after(at); at < lit.end; ++piece) {
            const bool more = piece != pieces_.end() && piece->span.begin < lit.end;
            const UtcSeconds begin = more ? std::max(at, piece->span.begin) : lit.end;
            if (begin > at + 1) {  // a second: stamps are rounded
                day.gaps.push_back({at, begin});
                add({at, begin}, nullptr);
            }
            if (!more) break;
            at = std::min(lit.end, piece->span.end);
            add({begin, at}, &piece->share);
        }
    }
}

void Builder::refuse_gaps() const {
    for (const auto& day : days_)
        if (!day.gaps.empty())
            throw Error(
                Cause::input,
                fmt::format("no light was measured from {} to {}",
                            format_utc(day.gaps.front().begin), format_utc(day.gaps.front().end)),
                {}, "complete the table, choose other days, or write weather.gaps: report");
}

/// Gaps take the mean of their day where it counts, else of the month's days that do.
void Builder::fill_gaps() {
    const auto share_of = [](double direct, double diffuse, double clear_direct,
                             double clear_diffuse) {
        return LightShare{clear_direct > 0 ? direct / clear_direct : 0,
                          clear_diffuse > 0 ? diffuse / clear_diffuse : 0, 0};
    };
    std::map<std::pair<int, int>, std::array<double, 4>> months;
    for (const auto& day : days_) {
        if (!day.counts()) continue;
        auto& sum = months[{day.date.year, day.date.month}];
        sum[0] += day.real_direct;
        sum[1] += day.real_diffuse;
        sum[2] += day.direct;
        sum[3] += day.diffuse;
    }
    for (const auto& day : days_) {
        if (day.clear > 0) ++report_.days;
        if (day.gaps.empty()) continue;
        ++(day.counts() ? report_.days_with_gaps : report_.days_missing);
        const auto& month = months[{day.date.year, day.date.month}];
        const auto share =
            day.counts() ? share_of(day.real_direct, day.real_diffuse, day.direct, day.diffuse)
                         : share_of(month[0], month[1], month[2], month[3]);
        for (const auto& gap : day.gaps) {
            constexpr std::size_t told = 10;
            if (report_.first_gaps.size() < told) report_.first_gaps.push_back(gap);
            report_.gap_h += (gap.end - gap.begin) / hour_s;
            pieces_.push_back({gap, share});
        }
    }
    std::sort(pieces_.begin(), pieces_.end(),
              [](const auto& a, const auto& b) { return a.span.begin < b.span.begin; });
}

std::vector<bool> Builder::thin_bands() const {
    if (times_.instant) {
        const auto& gaps = days_.front().gaps;
        return {std::any_of(gaps.begin(), gaps.end(), [&](const TimeSpan& gap) {
            return gap.begin <= *times_.instant && *times_.instant < gap.end;
        })};
    }
    std::vector<bool> thin;
    for (const auto& period : times_.periods) {
        std::map<std::pair<int, int>, std::pair<double, double>>
            months;  // days, and those that count
        for (const auto& part : period.days) {
            const auto day =
                std::lower_bound(days_.begin(), days_.end(), part.date,
                                 [](const Day& d, const CivilDate& date) { return d.date < date; });
            auto& [all, counted] = months[{part.date.year, part.date.month}];
            all += 1;
            counted += day->counts() ? 1 : 0;
        }
        thin.push_back(std::any_of(months.begin(), months.end(), [](const auto& m) {
            return m.second.second < month_needs * m.second.first;
        }));
    }
    return thin;
}

MeasuredSky Builder::finish() {
    MeasuredSky sky{nullptr, thin_bands(), report_};
    // A polar night has nothing to share.
    if (pieces_.empty()) pieces_.push_back({{times_.earliest(), times_.latest()}, {}});
    if (std::all_of(sky.thin.begin(), sky.thin.end(), [](bool thin) { return thin; }))
        throw Error(
            Cause::input,
            fmt::format("the table has light for too few of the run's days: {} of {} are missing",
                        report_.days_missing, report_.days),
            {},
            "a day needs 90 % of its light, a month 80 % of its days; choose a period that the "
            "table covers");
    sky.shares = std::make_shared<const LightShares>(std::move(pieces_));
    return sky;
}

}  // namespace

bool has_light(const WeatherRecord& record) {
    return record.has(Weather::global) ||
           (record.has(Weather::beam) && record.has(Weather::diffuse)) ||
           record.has(Weather::cloud);
}

MeasuredSky measured_sky(const WeatherRecord& record, const Station& station, const Sky& clear,
                         const TimePlan& times, bool stop_at_gaps) {
    return Builder(record, station, clear, times).build(stop_at_gaps);
}

}  // namespace sunbudget
