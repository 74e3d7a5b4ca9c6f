#include "sunbudget/physics/cloudy_sky.hpp"

#include <algorithm>
#include <cmath>

#include "sunbudget/base/units.hpp"

namespace sunbudget {

namespace {

/// Where the daily and monthly relations change, Erbs, Klein & Duffie 1982.
constexpr double short_day_rad = rad_from_deg(81.4);

double clearness_of(const SplitInput& known) {
    return known.extraterrestrial_w_m2 > 0 ? known.global_w_m2 / known.extraterrestrial_w_m2 : 0;
}

/// Sky light that leaves no more beam than the cleanest air lets through.
double at_least(double diffuse_w_m2, const SplitInput& known) {
    return std::clamp(diffuse_w_m2, std::max(0.0, known.global_w_m2 - known.clean_direct_w_m2),
                      std::max(0.0, known.global_w_m2));
}

}  // namespace

double kasten_czeplak1980_index(double cloud) noexcept {
    return 1 - 0.75 * std::pow(cloud, 3.4);
}

double kasten_czeplak1980_diffuse_share(double cloud) noexcept {
    return 0.3 + 0.7 * cloud * cloud;
}

LightShare cloud_at_an_hour(double cloud) noexcept {
    const double index = kasten_czeplak1980_index(cloud);
    return {index * (1 - cloud * cloud), index, index * cloud * cloud};
}

LightShare cloud_over_a_period(double cloud, double overcast) noexcept {
    return {1 - cloud, 1 - cloud + overcast * cloud, overcast * cloud};
}

LightShare clear_sky_index(double index, double overcast) noexcept {
    if (!(index < 1)) return {index, index, 0};  // NaN too
    if (index <= overcast) return {0, index, index};
    return cloud_over_a_period((1 - index) / (1 - overcast), overcast);
}

void dim_row(const CloudyRow& row, double overcast) noexcept {
    for (std::size_t i = 0; i < row.index.size(); ++i) {
        const auto share = clear_sky_index(static_cast<double>(row.index[i]), overcast);
        const double direct = static_cast<double>(row.open_direct_w_m2[i]),
                     diffuse = static_cast<double>(row.open_diffuse_w_m2[i]);
        const double view = row.sky_view.empty() ? 1 : static_cast<double>(row.sky_view[i]);
        const double even = (share.diffuse - share.beam) * diffuse + share.scattered * direct;
        const double global = direct + diffuse, dimmed = share.beam * global + even;
        row.direct_w_m2[i] =
            static_cast<float>(share.beam * static_cast<double>(row.direct_w_m2[i]));
        row.diffuse_w_m2[i] =
            static_cast<float>(share.beam * static_cast<double>(row.diffuse_w_m2[i]) + view * even);
        if (!row.reflected_w_m2.empty() && global > 0)
            row.reflected_w_m2[i] =
                static_cast<float>(static_cast<double>(row.reflected_w_m2[i]) * dimmed / global);
    }
}

double erbs1982_hourly(double clearness) noexcept {
    const double k = clearness;
    if (k <= 0.22) return 1 - 0.09 * k;
    if (k <= 0.80) return 0.9511 + k * (-0.1604 + k * (4.388 + k * (-16.638 + k * 12.336)));
    return 0.165;
}

double erbs1982_daily(double clearness, double sunset_hour_angle_rad) noexcept {
    const double k = clearness;
    if (sunset_hour_angle_rad <= short_day_rad)
        return k < 0.715 ? 1 + k * (-0.2727 + k * (2.4495 + k * (-11.9514 + k * 9.3879))) : 0.143;
    return k < 0.722 ? 1 + k * (0.2832 + k * (-2.5557 + k * 0.8448)) : 0.175;
}

double erbs1982_monthly(double clearness, double sunset_hour_angle_rad) noexcept {
    const double k = std::clamp(clearness, 0.3, 0.8);
    if (sunset_hour_angle_rad <= short_day_rad)
        return 1.391 + k * (-3.560 + k * (4.189 - k * 2.137));
    return 1.311 + k * (-3.022 + k * (3.427 - k * 1.821));
}

double hourly_diffuse_w_m2(const SplitInput& known) noexcept {
    constexpr double cloudy_below = 0.90, clear_above = 1.00;
    const double clear_w_m2 = known.clear_direct_w_m2 + known.clear_diffuse_w_m2;
    const double share = erbs1982_hourly(clearness_of(known));
    if (!(clear_w_m2 > 0)) return at_least(known.global_w_m2 * share, known);
    const double clear = std::clamp(
        (known.global_w_m2 / clear_w_m2 - cloudy_below) / (clear_above - cloudy_below), 0.0, 1.0);
    const double mixed = clear * known.clear_diffuse_w_m2 / clear_w_m2 + (1 - clear) * share;
    return at_least(known.global_w_m2 * mixed, known);
}

double daily_diffuse_w_m2(const SplitInput& known, double sunset_hour_angle_rad) noexcept {
    return at_least(known.global_w_m2 * erbs1982_daily(clearness_of(known), sunset_hour_angle_rad),
                    known);
}

}  // namespace sunbudget
