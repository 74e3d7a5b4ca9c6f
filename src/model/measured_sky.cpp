#include "sunbudget/model/measured_sky.hpp"

#include <fmt/format.h>

#include <algorithm>
#include <array>
#include <cmath>
#include <limits>
#include <map>
#include <numbers>
#include <optional>
#include <utility>

#include "sunbudget/base/error.hpp"
#include "sunbudget/physics/air_mass.hpp"
#include "sunbudget/physics/integrate.hpp"

namespace sunbudget {

namespace {

constexpr double no_value = std::numeric_limits<double>::quiet_NaN();
constexpr double piece_s = 300;  // the clear sky is smooth: finer changes no share by 0.1 %
constexpr double hour_s = 3600;
constexpr double daily_from_s = 12 * hour_s;
constexpr double hourly_cloud_to_s = 3 * hour_s;
constexpr double clean_turbidity =
    2;  // the lower end of what is usual: the cleanest beam of a split
constexpr double air_alone =
    1;  // turbidity of air without water and dust: no measured beam is above
constexpr double most_diffuse = 10;  // of the clear sky's: a bright cover comes to 5 or 6

/// The clear sky's light on the station over the sunlit part of an interval, J m-2.
struct ClearSums {
    double lit_s = 0, extraterrestrial = 0, direct = 0, diffuse = 0, clean_direct = 0,
           most_direct = 0;
    double beam = 0;       // facing the sun
    double low_sun_s = 0;  // below 5 degrees
};

/// One interval of the record while it becomes a share. Energies on the horizontal, J m-2.
struct Lit {
    std::size_t row;
    ClearSums clear;
    double global = no_value, direct = no_value, diffuse = no_value;
};

class Builder {
  public:
    Builder(const WeatherRecord& record, const Station& station, const Sky& clear,
            const TimePlan& times)
        : record_(record),
          station_(station),
          clear_(clear),
          clean_(ClearModel::esra2000),
          air_(ClearModel::esra2000),
          times_(times),
          track_(times.earliest() - 2 * seconds_per_day, times.latest() + 2 * seconds_per_day),
          pressure_(pressure_ratio(station.height_m)) {
        clean_[SkyParameter::turbidity].fill(clean_turbidity);
        air_[SkyParameter::turbidity].fill(air_alone);
        clean_.pressure = air_.pressure = clear.pressure;
        clear_.diffuse = DiffuseModel::liu_jordan1963;  // the parts are not asked for
    }

    MeasuredSky build(bool stop_at_gaps) {
        find_days();
        light_rows();
        by_cloud_ ? take_cloud() : take_light();
        cover_days();
        if (stop_at_gaps) refuse_gaps();
        fill_gaps();
        return finish();
    }

  private:
    const WeatherRecord& record_;
    Station station_;
    Sky clear_, clean_, air_;
    const TimePlan& times_;
    SunTrack track_;
    double pressure_;
    bool by_cloud_ = false;

    struct Day {
        CivilDate date;
        TimeSpan span;
        double clear = 0, covered = 0;             // global of the clear sky, J m-2
        double direct = 0, diffuse = 0;            // of the clear sky where covered
        double real_direct = 0, real_diffuse = 0;  // of the record there
        std::vector<TimeSpan> gaps;
        [[nodiscard]] bool counts() const { return covered >= day_needs * clear; }
    };
    std::vector<Day> days_;
    std::vector<Lit> lit_;
    std::vector<LightShares::Piece> pieces_;
    MeasuredReport report_;

    [[nodiscard]] SkyMoment light(const Sky& sky, UtcSeconds utc, const SunState& sun,
                                  double sine) const {
        const int month = times_.zone.local(utc, station_.longitude_rad).date.month;
        return sky_moment(sky, {utc, month, extraterrestrial_normal(sun.distance_au),
                                std::asin(sine), station_.height_m, pressure_});
    }
    template <typename Visit>
    void each_piece(const TimeSpan& span, Visit&& visit) const;

    void find_days();
    void light_rows();
    [[nodiscard]] ClearSums clear_sums(const TimeSpan& span) const;
    void take_cloud();
    void take_light();
    void take_parts(Lit& lit, double global, double beam, double diffuse);
    void split_alone();
    void split_daily(Lit& lit);
    void add_share(const Lit& lit);
    void add_closure(const Lit& lit, double global);
    void cover_days();
    void cover(Day& day);
    void refuse_gaps() const;
    void fill_gaps();
    [[nodiscard]] std::vector<bool> thin_bands() const;
    MeasuredSky finish();

    double closure_sum_ = 0, closure_squares_ = 0, closure_global_ = 0;
    double measured_j_m2_ = 0, left_out_j_m2_ = 0;
};

/// Sunlit pieces of a span: visit(middle, seconds, sun, sine of elevation).
template <typename Visit>
void Builder::each_piece(const TimeSpan& span, Visit&& visit) const {
    const auto up = up_direction(station_.latitude_rad, station_.longitude_rad);
    const auto sine_at = [&](UtcSeconds utc) {
        return sin_elevation(track_.at(utc), station_.latitude_rad, station_.longitude_rad);
    };
    const auto add = [&](const TimeSpan& lit) {
        const double count = std::max(1.0, std::ceil((lit.end - lit.begin) / piece_s));
        const double step_s = (lit.end - lit.begin) / count;
        for (double i = 0; i < count; ++i) {
            const UtcSeconds middle = lit.begin + (i + 0.5) * step_s;
            const auto sun = track_.at(middle);
            const double sine = with_parallax(dot(sun_direction(sun), up), sun.distance_au);
            if (sine > 0) visit(middle, step_s, sun, sine);
        }
    };
    // Most intervals are day or night all through: the costly search is for the others.
    const bool is_short = span.end - span.begin <= hour_s;
    const double first = sine_at(span.begin), last = sine_at(span.end);
    constexpr double far_from_horizon = 0.2;  // the sine changes by 0.26 an hour at most
    if (is_short && first > far_from_horizon && last > far_from_horizon) return add(span);
    if (is_short && first < -far_from_horizon && last < -far_from_horizon) return;
    for (const auto& lit :
         sunlit_spans(track_, span.begin, span.end, station_.latitude_rad, station_.longitude_rad))
        add(lit);
}

void Builder::find_days() {
    std::map<CivilDate, bool> dates;
    if (times_.instant) dates[times_.zone.local(*times_.instant, station_.longitude_rad).date];
    for (const auto& period : times_.periods)
        for (const auto& day : period.days) dates[day.date];
    for (const auto& [date, unused] : dates) days_.push_back({date, {}, 0, 0, 0, 0, 0, 0, {}});
    for (auto& day : days_) {
        const auto span = span_of(DayPart{day.date}, times_.zone, station_.longitude_rad);
        day.span = {span.begin, span.end};
    }
}

ClearSums Builder::clear_sums(const TimeSpan& span) const {
    ClearSums sums;
    each_piece(span, [&](UtcSeconds utc, double s, const SunState& sun, double sine) {
        const auto clear = light(clear_, utc, sun, sine);
        const double e0 = extraterrestrial_normal(sun.distance_au);
        sums.lit_s += s;
        sums.extraterrestrial += e0 * sine * s;
        sums.direct += clear.beam_normal_w_m2 * sine * s;
        sums.diffuse += clear.diffuse_w_m2 * s;
        sums.beam += clear.beam_normal_w_m2 * s;
        sums.clean_direct += light(clean_, utc, sun, sine).beam_normal_w_m2 * sine * s;
        sums.most_direct += light(air_, utc, sun, sine).beam_normal_w_m2 * sine * s;
        constexpr double low_sine = 0.08716;  // sin 5 deg
        if (sine < low_sine) sums.low_sun_s += s;
    });
    return sums;
}

/// Rows of the record with the sun over the station, on the run's days.
void Builder::light_rows() {
    const auto& spans = record_.intervals;
    std::size_t row = 0;
    for (const auto& day : days_) {
        while (row < spans.size() && spans[row].end <= day.span.begin) ++row;
        for (; row < spans.size() && spans[row].begin < day.span.end; ++row) {
            const auto clear = clear_sums(spans[row]);
            if (clear.lit_s > 0) lit_.push_back({row, clear});
        }
    }
    by_cloud_ = !record_.has(Weather::global) &&
                !(record_.has(Weather::beam) && record_.has(Weather::diffuse));
}

void Builder::take_cloud() {
    const auto cloud = record_.values(Weather::cloud);
    report_.from = "cloud";
    for (const auto& lit : lit_) {
        const auto& span = record_.intervals[lit.row];
        const double n = cloud[lit.row];
        if (std::isnan(n)) continue;
        const bool hourly = span.end - span.begin <= hourly_cloud_to_s;
        pieces_.push_back({span, hourly ? cloud_at_an_hour(n) : cloud_over_a_period(n)});
    }
}

void Builder::take_light() {
    const auto column = [&](Weather quantity, std::size_t row) {
        return record_.has(quantity) ? record_.values(quantity)[row] : no_value;
    };
    for (const auto quantity : {Weather::global, Weather::beam, Weather::diffuse})
        if (record_.has(quantity))
            report_.from += (report_.from.empty() ? "" : ", ") +
                            std::string(weather_names[static_cast<std::size_t>(quantity)]);
    for (auto& lit : lit_)
        take_parts(lit, column(Weather::global, lit.row), column(Weather::beam, lit.row),
                   column(Weather::diffuse, lit.row));
    split_alone();
    for (const auto& lit : lit_)
        if (!std::isnan(lit.direct) && !std::isnan(lit.diffuse)) add_share(lit);
}

/// What the three say together; global alone waits for split_alone().
void Builder::take_parts(Lit& lit, double global, double beam, double diffuse) {
    const auto& span = record_.intervals[lit.row];
    const double length_s = span.end - span.begin;
    const auto& clear = lit.clear;
    const auto energy = [&](double w_m2) {
        return std::isnan(w_m2) ? no_value : std::max(0.0, w_m2) * length_s;
    };
    lit.global = energy(global);
    lit.diffuse = energy(diffuse);
    // Onto the horizontal as the clear sky's beam goes there over the sunlit part.
    if (!std::isnan(beam))
        lit.direct = clear.beam > 0 ? energy(beam) * clear.direct / clear.beam : 0;
    if (!std::isnan(global) && !std::isnan(beam) && !std::isnan(diffuse))
        add_closure(lit, lit.global);
    if (std::isnan(lit.direct) && !std::isnan(lit.global) && !std::isnan(lit.diffuse))
        lit.direct = std::clamp(lit.global - lit.diffuse, 0.0, clear.most_direct);
    if (std::isnan(lit.diffuse) && !std::isnan(lit.global) && !std::isnan(lit.direct))
        lit.diffuse = std::max(0.0, lit.global - lit.direct);
}

void Builder::add_closure(const Lit& lit, double global) {
    if (lit.clear.low_sun_s > 0) return;
    const auto& span = record_.intervals[lit.row];
    const double difference = (global - lit.direct - lit.diffuse) / (span.end - span.begin);
    ++report_.closure.intervals;
    closure_sum_ += difference;
    closure_squares_ += difference * difference;
    closure_global_ += global / (span.end - span.begin);
}

void Builder::split_daily(Lit& lit) {
    const auto& span = record_.intervals[lit.row];
    const auto sun = track_.at((span.begin + span.end) / 2);
    const double s = lit.clear.lit_s;
    const SplitInput known{lit.global / s, lit.clear.extraterrestrial / s, lit.clear.direct / s,
                           lit.clear.diffuse / s, lit.clear.clean_direct / s};
    lit.diffuse = daily_diffuse_w_m2(
                      known, sunset_hour_angle_rad(station_.latitude_rad, sun.declination_rad)) *
                  s;
    lit.direct = lit.global - lit.diffuse;
    ++report_.split_intervals;
}

/// Rows that know their global only: by the hour, or by the row where that is longer.
void Builder::split_alone() {
    const auto alone = [&](const Lit& lit) {
        return !std::isnan(lit.global) && std::isnan(lit.direct) && std::isnan(lit.diffuse);
    };
    const auto hour_of = [&](const Lit& lit) {
        const auto& span = record_.intervals[lit.row];
        return std::floor((span.begin + span.end) / 2 / hour_s);
    };
    for (std::size_t first = 0; first < lit_.size();) {
        if (!alone(lit_[first])) {
            ++first;
            continue;
        }
        const auto& span = record_.intervals[lit_[first].row];
        if (span.end - span.begin >= daily_from_s) {
            split_daily(lit_[first++]);
            continue;
        }
        std::size_t last = first;
        ClearSums sum;
        double global = 0;
        for (; last < lit_.size() && (last == first || hour_of(lit_[last]) == hour_of(lit_[first]));
             ++last) {
            const auto& lit = lit_[last];
            if (!alone(lit)) continue;
            global += lit.global;
            sum.lit_s += lit.clear.lit_s;
            sum.extraterrestrial += lit.clear.extraterrestrial;
            sum.direct += lit.clear.direct;
            sum.diffuse += lit.clear.diffuse;
            sum.clean_direct += lit.clear.clean_direct;
        }
        const double s = sum.lit_s;
        const double diffuse =
            hourly_diffuse_w_m2({global / s, sum.extraterrestrial / s, sum.direct / s,
                                 sum.diffuse / s, sum.clean_direct / s}) *
            s;
        const double share = global > 0 ? diffuse / global : 1;
        for (; first < last; ++first) {
            auto& lit = lit_[first];
            if (!alone(lit)) continue;
            lit.diffuse = lit.global * share;
            lit.direct = lit.global - lit.diffuse;
            ++report_.split_intervals;
        }
    }
}

void Builder::add_share(const Lit& lit) {
    const double direct = std::min(lit.direct, lit.clear.most_direct);
    const double diffuse = std::min(lit.diffuse, most_diffuse * lit.clear.diffuse);
    measured_j_m2_ += lit.direct + lit.diffuse;
    left_out_j_m2_ += lit.direct - direct + lit.diffuse - diffuse;
    const double beam_share = lit.clear.direct > 0 ? direct / lit.clear.direct : 0;
    const double diffuse_share = lit.clear.diffuse > 0 ? diffuse / lit.clear.diffuse : 0;
    pieces_.push_back({record_.intervals[lit.row], {beam_share, diffuse_share, 0}});
}

void Builder::cover_days() {
    for (auto& day : days_) cover(day);
}

/// Adds up a day's clear light, as a whole and where the record has it, and notes the sunlit gaps.
void Builder::cover(Day& day) {
    const auto piece_after = [&](UtcSeconds utc) {
        return std::upper_bound(
            pieces_.begin(), pieces_.end(), utc,
            [](UtcSeconds t, const LightShares::Piece& p) { return t < p.span.end; });
    };
    const auto add = [&](const TimeSpan& span, const LightShare* share) {
        each_piece(span, [&](UtcSeconds utc, double s, const SunState& sun, double sine) {
            const auto clear = light(clear_, utc, sun, sine);
            const double direct = clear.beam_normal_w_m2 * sine * s,
                         diffuse = clear.diffuse_w_m2 * s;
            day.clear += direct + diffuse;
            if (share == nullptr) return;
            day.covered += direct + diffuse;
            day.direct += direct;
            day.diffuse += diffuse;
            day.real_direct += share->beam * direct;
            day.real_diffuse += share->diffuse * diffuse + share->scattered * direct;
        });
    };
    for (const auto& lit : sunlit_spans(track_, day.span.begin, day.span.end, station_.latitude_rad,
                                        station_.longitude_rad)) {
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
    auto& closure = report_.closure;
    if (closure.intervals > 0) {
        const auto n = static_cast<double>(closure.intervals);
        closure.global_mean_w_m2 = closure_global_ / n;
        closure.difference_mean_w_m2 = closure_sum_ / n;
        closure.difference_rms_w_m2 = std::sqrt(closure_squares_ / n);
    }
    report_.left_out_share = measured_j_m2_ > 0 ? left_out_j_m2_ / measured_j_m2_ : 0;
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
