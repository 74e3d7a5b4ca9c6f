#include "sunbudget/model/longwave.hpp"

#include <algorithm>
#include <cmath>

#include "sunbudget/physics/humidity.hpp"
#include "sunbudget/raster/locator.hpp"

namespace sunbudget {

namespace {

constexpr double nan_value = std::numeric_limits<double>::quiet_NaN();
constexpr double zero_celsius_k = 273.15;
/// Far below the quantum of stored fluxes (1/16 W m-2).
constexpr double tolerance_w_m2 = 1.0 / 256;

OpenLongwave none() {
    return {nan_value, nan_value, nan_value, nan_value, nan_value};
}

void add_scaled(OpenLongwave& sum, const OpenLongwave& one, double weight) {
    sum.sky_w_m2 += one.sky_w_m2 * weight;
    sum.air_black_w_m2 += one.air_black_w_m2 * weight;
    sum.surface_black_w_m2 += one.surface_black_w_m2 * weight;
    sum.air_k += one.air_k * weight;
    sum.surface_k += one.surface_k * weight;
}

/// What was measured at one height, at another: in the proportion of the clear skies over both.
double moved(double measured_w_m2, double clear_there_w_m2, double clear_here_w_m2) {
    const double share = clear_there_w_m2 / clear_here_w_m2;
    return std::isnan(share) ? measured_w_m2 : measured_w_m2 * share;
}

OpenLongwave longwave_of(const Longwave& longwave, const AirMoment& here, double lapse_k_m,
                         double height_m) {
    const double rise_m = longwave.height_m ? height_m - *longwave.height_m : 0;
    const auto there =
        air_at_height({here.temperature_k, here.vapour_pressure_hpa}, rise_m, lapse_k_m);
    const double clear =
        clear_longwave_w_m2(longwave.formula, there.temperature_k, there.vapour_pressure_hpa);
    OpenLongwave open;
    if (std::isnan(here.longwave_down_w_m2))
        open.sky_w_m2 = cloudy_longwave_w_m2(clear, there.temperature_k, here.cloud);
    else
        open.sky_w_m2 = moved(
            here.longwave_down_w_m2, clear,
            clear_longwave_w_m2(longwave.formula, here.temperature_k, here.vapour_pressure_hpa));
    open.air_k = there.temperature_k;
    open.air_black_w_m2 = black_body_w_m2(open.air_k);
    open.surface_k = std::isnan(longwave.surface_above_air_k)
                         ? here.surface_k
                         : open.air_k + longwave.surface_above_air_k;
    open.surface_black_w_m2 = black_body_w_m2(open.surface_k);
    return open;
}

}  // namespace

PointLongwave::PointLongwave(const TimePlan& times, const Longwave& longwave)
    : times_(times), longwave_(longwave) {}

void PointLongwave::add(Weighted& to, const AirMoment& air, int month, double weight,
                        double height_m) const {
    const auto open = longwave_of(
        longwave_, air, longwave_.lapse_k_m[static_cast<std::size_t>(month - 1)], height_m);
    if (std::isnan(open.sky_w_m2)) return;
    add_scaled(to.sum, open, weight);
    to.weight += weight;
}

void PointLongwave::add_daily(Weighted& to, const CivilDate& date, double height_m) const {
    const auto* day = longwave_.daily->on(date);
    if (day == nullptr) return;
    const double lapse_k_m = longwave_.lapse_k_m[static_cast<std::size_t>(date.month - 1)],
                 rise_m = height_m - *longwave_.height_m;
    OpenLongwave open;
    open.sky_w_m2 = daily_net_longwave_w_m2(longwave_.daily->method, *day, rise_m, lapse_k_m);
    open.air_k = (day->min_celsius + day->max_celsius) / 2 + zero_celsius_k - lapse_k_m * rise_m;
    if (std::isnan(open.sky_w_m2)) return;
    add_scaled(to.sum, open, 1);
    to.weight += 1;
}

/// The mean over the part of a day that is covered; the weight is the covered share.
PointLongwave::Weighted PointLongwave::of_day(const DayPart& day, double longitude_rad,
                                              double height_m) const {
    Weighted mean;
    if (longwave_.daily) {
        add_daily(mean, day.date, height_m);
        return mean;
    }
    if (longwave_.rows.empty()) {
        add(mean, longwave_.months[static_cast<std::size_t>(day.date.month - 1)], day.date.month, 1,
            height_m);
        return mean;
    }
    const auto span = span_of(day, times_.zone, longitude_rad);
    const auto& rows = longwave_.rows;
    auto row = std::partition_point(rows.begin(), rows.end(),
                                    [&](const AirRow& r) { return r.span.end <= span.begin; });
    for (; row != rows.end() && row->span.begin < span.end; ++row) {
        const double overlap_s =
            std::min(span.end, row->span.end) - std::max(span.begin, row->span.begin);
        add(mean, row->air, day.date.month, overlap_s / (span.end - span.begin), height_m);
    }
    return mean;
}

OpenLongwave PointLongwave::at(std::size_t band, double longitude_rad, double height_m) const {
    const auto mean = covered(band, longitude_rad, height_m);
    return mean.weight > 0 && mean.weight >= air_band_needs ? mean.sum : none();
}

OpenLongwave PointLongwave::of_what_there_is(std::size_t band, double longitude_rad,
                                             double height_m) const {
    return covered(band, longitude_rad, height_m).sum;
}

PointLongwave::Weighted PointLongwave::covered(std::size_t band, double longitude_rad,
                                               double height_m) const {
    Weighted all;
    if (times_.instant) {
        const int month = times_.zone.local(*times_.instant, longitude_rad).date.month;
        const auto& rows = longwave_.rows;
        const auto row = std::partition_point(rows.begin(), rows.end(), [&](const AirRow& r) {
            return r.span.end <= *times_.instant;
        });
        if (rows.empty())
            add(all, longwave_.months[static_cast<std::size_t>(month - 1)], month, 1, height_m);
        else if (row != rows.end() && row->span.begin <= *times_.instant)
            add(all, row->air, month, 1, height_m);
        return all;
    }
    double whole = 0;
    for (const auto& day : times_.periods[band].days) {
        const double weight = day.weight * (day.end_s - day.begin_s);
        const auto mean = of_day(day, longitude_rad, height_m);
        whole += weight;
        if (mean.weight < air_day_needs) continue;
        add_scaled(all.sum, mean.sum, weight / mean.weight);
        all.weight += weight;
    }
    Weighted mean;
    mean.weight = all.weight / whole;
    if (all.weight > 0) add_scaled(mean.sum, all.sum, 1 / all.weight);
    return mean;
}

template <class Visit>
void PointLongwave::each_month(std::size_t band, Visit&& visit) const {
    if (times_.instant)
        return visit(static_cast<std::size_t>(times_.zone.local(*times_.instant, 0).date.month - 1),
                     1.0);
    double whole = 0;
    for (const auto& day : times_.periods[band].days) whole += day.weight;
    for (const auto& day : times_.periods[band].days)
        visit(static_cast<std::size_t>(day.date.month - 1), day.weight / whole);
}

AirMoment PointLongwave::mean_numbers(std::size_t band) const {
    AirMoment mean{0, 0, {0, 0}, nan_value, 0};
    each_month(band, [&](std::size_t month, double weight) {
        const auto& air = longwave_.months[month];
        mean.temperature_k += air.temperature_k * weight;
        mean.vapour_pressure_hpa += air.vapour_pressure_hpa * weight;
        mean.cloud.factor += air.cloud.factor * weight;
        mean.cloud.added += air.cloud.added * weight;
        mean.surface_k += air.surface_k * weight;
    });
    return mean;
}

double PointLongwave::mean_lapse_k_m(std::size_t band) const {
    double mean = 0;
    each_month(band, [&](std::size_t month, double weight) {
        mean += longwave_.lapse_k_m[month] * weight;
    });
    return mean;
}

double PointLongwave::mean_humidity(std::size_t band) const {
    double mean = 0;
    each_month(band, [&](std::size_t month, double weight) {
        mean += longwave_.humidity_numbers[month] * weight;
    });
    return mean;
}

struct LongwaveField::Work {
    PointLongwave point;
    std::size_t bands;
    std::vector<Locator> locators;  // one a thread
    SmoothField field;

    Work(const TimePlan& times, const Longwave& longwave, const Grid& grid, int threads,
         std::optional<double> height_m)
        : point(times, longwave),
          bands(times.bands()),
          field({grid.width, grid.height, OpenLongwave::values * times.bands(), tolerance_w_m2,
                 height_m},
                [this](double column, double row, double h, int thread, std::span<double> values) {
                    at_node(column, row, h, thread, values);
                }) {
        locators.emplace_back(grid);
        for (int i = 1; i < threads; ++i) locators.push_back(locators.front().clone());
    }

    void at_node(double column, double row, double height_m, int thread,
                 std::span<double> values) const {
        const auto place = locators[static_cast<std::size_t>(thread)].at(column + 0.5, row + 0.5);
        if (!place) {
            std::fill(values.begin(), values.end(), nan_value);
            return;
        }
        for (std::size_t band = 0; band < bands; ++band) {
            const auto open = point.of_what_there_is(band, place->longitude_rad, height_m);
            double* to = values.data() + band * OpenLongwave::values;
            to[0] = open.sky_w_m2;
            to[1] = open.air_black_w_m2;
            to[2] = open.surface_black_w_m2;
            to[3] = open.air_k;
            to[4] = open.surface_k;
            // A NaN would be looked into down to single pixels; what is not known is not asked for either.
            std::replace_if(
                to, to + OpenLongwave::values, [](double v) { return std::isnan(v); }, 0.0);
        }
    }
};

LongwaveField::LongwaveField(const TimePlan& times, const Longwave& longwave, const Grid& grid,
                             int threads, std::optional<double> constant_height_m)
    : work_(std::make_unique<Work>(times, longwave, grid, threads, constant_height_m)) {}
LongwaveField::~LongwaveField() = default;

LongwaveField::Block LongwaveField::prepare(const Window& window, const Window& frame,
                                            const Plane<float>& heights_m, int thread) {
    return work_->field.prepare(window, frame, heights_m, thread);
}

void LongwaveField::fill(const Block& block, std::size_t band, Part part,
                         const Plane<float>& heights_m, Plane<float>& out) {
    block.fill(band * OpenLongwave::values + static_cast<std::size_t>(part), heights_m, out);
}

const PointLongwave& LongwaveField::point() const {
    return work_->point;
}

}  // namespace sunbudget
