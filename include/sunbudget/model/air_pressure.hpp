#pragma once

#include <array>
#include <vector>

#include "sunbudget/base/time.hpp"

namespace sunbudget {

/// Air pressure over the standard atmosphere's at the same height, the same everywhere at one time: what was
/// measured at one place, taken to other heights.
class AirPressure {
  public:
    /// From the row's begin on until the next row's.
    struct Row {
        UtcSeconds begin = 0;
        double factor = 1;
    };
    /// A factor for each month, January first.
    explicit AirPressure(const std::array<double, 12>& months);
    /// Of a record, rows in order, one at least. The first also holds before its begin, the last without end.
    explicit AirPressure(std::vector<Row> rows);

    [[nodiscard]] double factor(UtcSeconds utc, int month) const;
    [[nodiscard]] double mean_factor() const;

  private:
    std::array<double, 12> months_{};
    std::vector<Row> rows_;
};

/// The standard's pressure at a height, 1013.25 hPa at sea level.
[[nodiscard]] double standard_pressure_hpa(double height_m);

}  // namespace sunbudget
