#include "sunbudget/model/air_pressure.hpp"

#include <algorithm>
#include <cassert>
#include <numeric>

#include "sunbudget/physics/air_mass.hpp"

namespace sunbudget {

AirPressure::AirPressure(const std::array<double, 12>& months) : months_(months) {}

AirPressure::AirPressure(std::vector<Row> rows) : rows_(std::move(rows)) {
    assert(!rows_.empty());
}

double AirPressure::factor(UtcSeconds utc, int month) const {
    if (rows_.empty()) return months_[static_cast<std::size_t>(month - 1)];
    const auto next = std::upper_bound(rows_.begin(), rows_.end(), utc,
                                       [](UtcSeconds t, const Row& row) { return t < row.begin; });
    return next == rows_.begin() ? next->factor : (next - 1)->factor;
}

double AirPressure::mean_factor() const {
    if (rows_.empty())
        return std::accumulate(months_.begin(), months_.end(), 0.0) /
               static_cast<double>(months_.size());
    return std::accumulate(rows_.begin(), rows_.end(), 0.0,
                           [](double sum, const Row& row) { return sum + row.factor; }) /
           static_cast<double>(rows_.size());
}

double standard_pressure_hpa(double height_m) {
    constexpr double sea_level_hpa = 1013.25;
    return sea_level_hpa * pressure_ratio(height_m);
}

}  // namespace sunbudget
