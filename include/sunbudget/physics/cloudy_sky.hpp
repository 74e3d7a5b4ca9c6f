#pragma once

#include <span>

namespace sunbudget {

/// What clouds leave of a clear sky's light: beam = beam * clear beam; sky light on the horizontal =
/// diffuse * clear sky light + scattered * clear beam on the horizontal.
struct LightShare {
    double beam = 1;
    double diffuse = 1;
    double scattered = 0;
    friend bool operator==(const LightShare&, const LightShare&) = default;
};

/// Global light under clouds over that of the clear sky, at one hour.
///
/// in      cloud cover [0, 1] (oktas / 8)
/// out     1 down to 0.25
/// errors  none; NaN in gives NaN out
/// source  Kasten & Czeplak 1980, Solar Energy 24, 177-189: 1 - 0.75 N^3.4 -> cloud_split.csv
[[nodiscard]] double kasten_czeplak1980_index(double cloud) noexcept;

/// Sky light's share of the global under clouds, the authors' own with 0.3 under a clear sky.
/// source  as above: 0.3 + 0.7 N^2
[[nodiscard]] double kasten_czeplak1980_diffuse_share(double cloud) noexcept;

/// The two together on any clear sky: global by the index, sky light's share rising with N^2 from the clear
/// sky's own to all of it.
[[nodiscard]] LightShare cloud_at_an_hour(double cloud) noexcept;

/// Mean cloud of a period: skies are mostly clear or mostly overcast, so the mean light is a mixture of the
/// two by their share of the time (the hourly law above would give 27 % too much at N = 0.3).
///
/// in      mean cloud [0, 1]; overcast: global light under a closed cover over the clear sky's
/// out     global = 1 - (1 - overcast) N of the clear sky's
/// source  linear mixture; 0.25 under overcast from Kasten & Czeplak 1980
[[nodiscard]] LightShare cloud_over_a_period(double cloud, double overcast = 0.25) noexcept;

/// A clear-sky index (global over the clear sky's) as the same mixture: what cloud_over_a_period would need
/// to come to it; under the overcast's all light comes from the sky, above 1 both parts grow alike.
///
/// in      index, 0 and above
[[nodiscard]] LightShare clear_sky_index(double index, double overcast = 0.25) noexcept;

/// Light of a row of pixels under a clear sky, to be dimmed.
struct CloudyRow {
    std::span<const float> index;  ///< clear-sky index
    std::span<const float> open_direct_w_m2,
        open_diffuse_w_m2;                       ///< on open level ground, clear sky
    std::span<const float> sky_view;             ///< empty: all of the sky is in view
    std::span<float> direct_w_m2, diffuse_w_m2;  ///< on the ground, in and out
    std::span<float> reflected_w_m2;             ///< in and out; may be empty
};

/// Dims a row as clear_sky_index() says: beam and the clear sky's own light by their share of the time, the
/// overcast's light from the whole sky alike, light from the ground with the global.
///
/// shape   rows of one length
/// nodata  NaN in the index gives NaN out
/// errors  none
void dim_row(const CloudyRow& row, double overcast) noexcept;

/// Global over extraterrestrial light on the horizontal from hours of sunshine.
///
/// in      sunshine over possible sunshine [0, 1]; the two coefficients
/// source  Angstrom-Prescott as in FAO-56 eq. 35: a + b n/N, 0.25 and 0.50 where nothing is known
[[nodiscard]] constexpr double angstrom_prescott(double sunshine_share, double a = 0.25,
                                                 double b = 0.50) noexcept {
    return a + b * sunshine_share;
}

/// Sky light's share of an hour's global light.
///
/// in      clearness: global over extraterrestrial on the horizontal, 0 and above
/// out     1 down to 0.165
/// source  Erbs, Klein & Duffie 1982, Solar Energy 28, 293-302 -> cloud_split.csv
[[nodiscard]] double erbs1982_hourly(double clearness) noexcept;

/// The same of a day's sum; the relation differs where the sunset hour angle is below 81.4 degrees.
/// source  Erbs, Klein & Duffie 1982, daily relation (from memory, as in Duffie & Beckman eq. 2.11.1)
[[nodiscard]] double erbs1982_daily(double clearness, double sunset_hour_angle_rad) noexcept;

/// The same of a month's mean day.
/// source  Erbs, Klein & Duffie 1982, monthly relation (from memory, as in Duffie & Beckman eq. 2.12.1),
///         published for clearness 0.3 to 0.8; held at the ends beyond
[[nodiscard]] double erbs1982_monthly(double clearness, double sunset_hour_angle_rad) noexcept;

/// What is known of an interval's sunlit part, means on the horizontal.
struct SplitInput {
    double global_w_m2 = 0;
    double extraterrestrial_w_m2 = 0;
    double clear_direct_w_m2 = 0;
    double clear_diffuse_w_m2 = 0;
    double clean_direct_w_m2 = 0;  ///< under a very clean clear sky: more beam there cannot be
};

/// Sky light of an hour of which the global is known: the clear sky's own share where global comes up to
/// the clear sky's, Erbs et al. below 0.90 of it, a mixture between (a change at 0.95 without a jump); never
/// less than what the cleanest beam leaves.
///
/// errors  none; without extraterrestrial light everything is sky light
/// source  our combination; measured in tests/model/measured_day_test.cpp
[[nodiscard]] double hourly_diffuse_w_m2(const SplitInput& known) noexcept;
/// The same of a day: Erbs et al. daily.
[[nodiscard]] double daily_diffuse_w_m2(const SplitInput& known,
                                        double sunset_hour_angle_rad) noexcept;

}  // namespace sunbudget
