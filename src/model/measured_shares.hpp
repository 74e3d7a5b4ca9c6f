#pragma once

#include <cstddef>
#include <limits>
#include <vector>

#include "station_sky.hpp"
#include "sunbudget/model/light_shares.hpp"
#include "sunbudget/model/measured_sky.hpp"

namespace sunbudget {

/// A record's sunlit rows, interval by interval, as shares of the clear sky's light.
class MeasuredShares {
  public:
    /// Everything given outlives it; what it finds is put into the report too.
    MeasuredShares(const WeatherRecord& record, const StationSky& sky, MeasuredReport& report)
        : record_(record), sky_(sky), report_(report) {}

    /// Rows that touch the days, which are in order. Rows without a value give no piece.
    [[nodiscard]] std::vector<LightShares::Piece> of_days(const std::vector<TimeSpan>& days);

  private:
    /// One interval of the record while it becomes a share. Energies on the horizontal, J m-2.
    struct Lit {
        std::size_t row;
        ClearSums clear;
        double global = std::numeric_limits<double>::quiet_NaN(),
               direct = std::numeric_limits<double>::quiet_NaN(),
               diffuse = std::numeric_limits<double>::quiet_NaN();
        /// Knows its global only.
        [[nodiscard]] bool alone() const;
    };

    void light_rows(const std::vector<TimeSpan>& days);
    [[nodiscard]] bool by_cloud() const;
    void take_cloud();
    void take_light();
    void take_parts(Lit& lit, double global, double beam, double diffuse);
    void split_alone();
    [[nodiscard]] std::size_t split_hour(std::size_t first);
    void split_daily(Lit& lit);
    void add_share(const Lit& lit);
    void add_closure(const Lit& lit);
    void report_sums();

    [[nodiscard]] const TimeSpan& span_of(const Lit& lit) const {
        return record_.intervals[lit.row];
    }

    const WeatherRecord& record_;
    const StationSky& sky_;
    MeasuredReport& report_;
    std::vector<Lit> lit_;
    std::vector<LightShares::Piece> pieces_;
    double closure_sum_ = 0, closure_squares_ = 0, closure_global_ = 0;
    double measured_j_m2_ = 0, left_out_j_m2_ = 0;
};

}  // namespace sunbudget
