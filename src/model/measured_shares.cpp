#include "measured_shares.hpp"

#include <algorithm>
#include <cmath>
#include <string>

namespace sunbudget {

namespace {

constexpr double no_value = std::numeric_limits<double>::quiet_NaN();
constexpr double hour_s = 3600;
constexpr double daily_from_s = 12 * hour_s;
constexpr double hourly_cloud_to_s = 3 * hour_s;
constexpr double most_diffuse = 10;  // of the clear sky's: a bright cover comes to 5 or 6

}  // namespace

bool MeasuredShares::Lit::alone() const {
    return !std::isnan(global) && std::isnan(direct) && std::isnan(diffuse);
}

std::vector<LightShares::Piece> MeasuredShares::of_days(const std::vector<TimeSpan>& days) {
    light_rows(days);
    by_cloud() ? take_cloud() : take_light();
    report_sums();
    return std::move(pieces_);
}

/// Rows of the record with the sun over the station, on the run's days.
void MeasuredShares::light_rows(const std::vector<TimeSpan>& days) {
    const auto& spans = record_.intervals;
    std::size_t row = 0;
    for (const auto& day : days) {
        while (row < spans.size() && spans[row].end <= day.begin) ++row;
        for (; row < spans.size() && spans[row].begin < day.end; ++row) {
            const auto clear = sky_.clear_sums(spans[row]);
            if (clear.lit_s > 0) lit_.push_back({row, clear});
        }
    }
}

bool MeasuredShares::by_cloud() const {
    return !record_.has(Weather::global) &&
           !(record_.has(Weather::beam) && record_.has(Weather::diffuse));
}

void MeasuredShares::take_cloud() {
    const auto cloud = record_.values(Weather::cloud);
    report_.from = "cloud";
    for (const auto& lit : lit_) {
        const auto& span = span_of(lit);
        const double n = cloud[lit.row];
        if (std::isnan(n)) continue;
        const bool hourly = span.end - span.begin <= hourly_cloud_to_s;
        pieces_.push_back({span, hourly ? cloud_at_an_hour(n) : cloud_over_a_period(n)});
    }
}

void MeasuredShares::take_light() {
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
void MeasuredShares::take_parts(Lit& lit, double global, double beam, double diffuse) {
    const auto& span = span_of(lit);
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
    if (!std::isnan(global) && !std::isnan(beam) && !std::isnan(diffuse)) add_closure(lit);
    if (std::isnan(lit.direct) && !std::isnan(lit.global) && !std::isnan(lit.diffuse))
        lit.direct = std::clamp(lit.global - lit.diffuse, 0.0, clear.most_direct);
    if (std::isnan(lit.diffuse) && !std::isnan(lit.global) && !std::isnan(lit.direct))
        lit.diffuse = std::max(0.0, lit.global - lit.direct);
}

void MeasuredShares::add_closure(const Lit& lit) {
    if (lit.clear.low_sun_s > 0) return;
    const auto& span = span_of(lit);
    const double difference = (lit.global - lit.direct - lit.diffuse) / (span.end - span.begin);
    ++report_.closure.intervals;
    closure_sum_ += difference;
    closure_squares_ += difference * difference;
    closure_global_ += lit.global / (span.end - span.begin);
}

void MeasuredShares::split_daily(Lit& lit) {
    const auto& span = span_of(lit);
    const double s = lit.clear.lit_s;
    const SplitInput known{lit.global / s, lit.clear.extraterrestrial / s, lit.clear.direct / s,
                           lit.clear.diffuse / s, lit.clear.clean_direct / s};
    lit.diffuse = daily_diffuse_w_m2(known, sky_.sunset_angle_rad((span.begin + span.end) / 2)) * s;
    lit.direct = lit.global - lit.diffuse;
    ++report_.split_intervals;
}

/// Rows that know their global only: by the hour, or by the row where that is longer.
void MeasuredShares::split_alone() {
    for (std::size_t i = 0; i < lit_.size();) {
        if (!lit_[i].alone())
            ++i;
        else if (const auto& span = span_of(lit_[i]); span.end - span.begin >= daily_from_s)
            split_daily(lit_[i++]);
        else
            i = split_hour(i);
    }
}

/// Rows alone from the first on that lie in its hour; returns the first beyond.
std::size_t MeasuredShares::split_hour(std::size_t first) {
    const auto hour_of = [&](const Lit& lit) {
        const auto& span = span_of(lit);
        return std::floor((span.begin + span.end) / 2 / hour_s);
    };
    std::size_t last = first;
    ClearSums sum;
    double global = 0;
    for (; last < lit_.size() && (last == first || hour_of(lit_[last]) == hour_of(lit_[first]));
         ++last) {
        const auto& lit = lit_[last];
        if (!lit.alone()) continue;
        global += lit.global;
        sum.lit_s += lit.clear.lit_s;
        sum.extraterrestrial += lit.clear.extraterrestrial;
        sum.direct += lit.clear.direct;
        sum.diffuse += lit.clear.diffuse;
        sum.clean_direct += lit.clear.clean_direct;
    }
    const double s = sum.lit_s;
    const double diffuse =
        hourly_diffuse_w_m2({global / s, sum.extraterrestrial / s, sum.direct / s, sum.diffuse / s,
                             sum.clean_direct / s}) *
        s;
    const double share = global > 0 ? diffuse / global : 1;
    for (auto i = first; i < last; ++i) {
        auto& lit = lit_[i];
        if (!lit.alone()) continue;
        lit.diffuse = lit.global * share;
        lit.direct = lit.global - lit.diffuse;
        ++report_.split_intervals;
    }
    return last;
}

void MeasuredShares::add_share(const Lit& lit) {
    const double direct = std::min(lit.direct, lit.clear.most_direct);
    const double diffuse = std::min(lit.diffuse, most_diffuse * lit.clear.diffuse);
    measured_j_m2_ += lit.direct + lit.diffuse;
    left_out_j_m2_ += lit.direct - direct + lit.diffuse - diffuse;
    const double beam_share = lit.clear.direct > 0 ? direct / lit.clear.direct : 0;
    const double diffuse_share = lit.clear.diffuse > 0 ? diffuse / lit.clear.diffuse : 0;
    pieces_.push_back({span_of(lit), {beam_share, diffuse_share, 0}});
}

void MeasuredShares::report_sums() {
    auto& closure = report_.closure;
    if (closure.intervals > 0) {
        const auto n = static_cast<double>(closure.intervals);
        closure.global_mean_w_m2 = closure_global_ / n;
        closure.difference_mean_w_m2 = closure_sum_ / n;
        closure.difference_rms_w_m2 = std::sqrt(closure_squares_ / n);
    }
    report_.left_out_share = measured_j_m2_ > 0 ? left_out_j_m2_ / measured_j_m2_ : 0;
}

}  // namespace sunbudget
