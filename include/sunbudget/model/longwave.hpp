#pragma once

#include <array>
#include <limits>
#include <memory>
#include <optional>
#include <vector>

#include "sunbudget/model/daily_air.hpp"
#include "sunbudget/model/smooth_field.hpp"
#include "sunbudget/model/time_plan.hpp"
#include "sunbudget/physics/longwave.hpp"
#include "sunbudget/physics/sun_day.hpp"
#include "sunbudget/raster/grid.hpp"
#include "sunbudget/raster/source.hpp"

namespace sunbudget {

/// Air, cloud and ground of one moment at the height they were measured. NaN: not known.
struct AirMoment {
    double temperature_k = std::numeric_limits<double>::quiet_NaN();
    double vapour_pressure_hpa = std::numeric_limits<double>::quiet_NaN();
    CloudTerms cloud;
    double longwave_down_w_m2 =
        std::numeric_limits<double>::quiet_NaN();  ///< measured: stands for the formula
    double surface_k = std::numeric_limits<double>::quiet_NaN();  ///< of the ground
};

struct AirRow {
    TimeSpan span;
    AirMoment air;
};

/// How the humidity of a raster is told.
enum class HumidityAs { relative, dew_point, vapour_pressure };

/// What a run knows of the air, and what its sky sends down by.
struct Longwave {
    LongwaveFormula formula = LongwaveFormula::dilley_obrien1998;
    std::array<AirMoment, 12> months{};  ///< where there are no rows
    std::vector<AirRow> rows;            ///< of a weather table, in order
    std::optional<double> height_m;      ///< where both hold; nothing: at every height
    std::array<double, 12> lapse_k_m{};
    double surface_above_air_k =
        std::numeric_limits<double>::quiet_NaN();  ///< set: the ground follows the air
    // In the place of the numbers, as the pixels have them.
    std::optional<Source> temperature_k;
    std::optional<Source> humidity;
    HumidityAs humidity_as = HumidityAs::relative;
    std::array<double, 12>
        humidity_numbers{};  ///< told that way, beside a raster of the temperature alone
    // In the place of all that: the net of whole days.
    std::optional<DailyNet> daily;

    /// Share of the sky, and what it sends down: one raster for all bands or one a band; the second stands for
    /// formula and clouds.
    std::vector<Source> clouds{};
    LongwaveCloud cloud_law = LongwaveCloud::unsworth_monteith1975;
    std::vector<Source> down_w_m2{};

    [[nodiscard]] bool by_pixel() const { return temperature_k || humidity; }
};

/// A band's longwave over level open ground: of an instant, or means over a period.
struct OpenLongwave {
    double sky_w_m2 = 0;  ///< under a daily method the net longwave, and the others but air_k are 0
    double air_black_w_m2 = 0;  ///< sigma T^4 of the air
    double surface_black_w_m2 =
        0;  ///< of the ground, where the run knows its temperature without looking at pixels
    double air_k = 0;
    double surface_k = 0;
    static constexpr std::size_t values = 5;
};

/// A day whose record covers less than the first share is left out; a band with less than the second of its
/// days is nodata. What is left stands for the rest.
inline constexpr double air_day_needs = 0.9;
inline constexpr double air_band_needs = 0.8;

/// The longwave of every band at one place, computed without any table. Safe to call from several threads.
class PointLongwave {
  public:
    PointLongwave(const TimePlan& times, const Longwave& longwave);

    /// NaN where the record has too little.
    [[nodiscard]] OpenLongwave at(std::size_t band, double longitude_rad, double height_m) const;
    /// Of the part of the band that is covered, however small; 0 where none is.
    [[nodiscard]] OpenLongwave of_what_there_is(std::size_t band, double longitude_rad,
                                                double height_m) const;
    /// The numbers that hold for a band as a whole, their means by the days of each month in it.
    [[nodiscard]] AirMoment mean_numbers(std::size_t band) const;
    [[nodiscard]] double mean_humidity(std::size_t band) const;
    [[nodiscard]] double mean_lapse_k_m(std::size_t band) const;

  private:
    struct Weighted {
        OpenLongwave sum;
        double weight = 0;
    };
    [[nodiscard]] Weighted covered(std::size_t band, double longitude_rad, double height_m) const;
    void add(Weighted& to, const AirMoment& air, int month, double weight, double height_m) const;
    void add_daily(Weighted& to, const CivilDate& date, double height_m) const;
    [[nodiscard]] Weighted of_day(const DayPart& day, double longitude_rad, double height_m) const;
    template <class Visit>
    void each_month(std::size_t band, Visit&& visit) const;

    const TimePlan& times_;
    const Longwave& longwave_;
};

/// The same at every pixel of a grid, within 1/256 W m-2 and K of PointLongwave::of_what_there_is.
class LongwaveField {
  public:
    enum class Part { sky, air_black, surface_black, air_k, surface_k };

    LongwaveField(const TimePlan& times, const Longwave& longwave, const Grid& grid, int threads,
                  std::optional<double> constant_height_m);
    ~LongwaveField();

    using Block = SmoothField::Block;
    [[nodiscard]] Block prepare(const Window& window, const Window& frame,
                                const Plane<float>& heights_m, int thread);
    static void fill(const Block& block, std::size_t band, Part part, const Plane<float>& heights_m,
                     Plane<float>& out);
    [[nodiscard]] const PointLongwave& point() const;

  private:
    struct Work;
    std::unique_ptr<Work> work_;
};

}  // namespace sunbudget
