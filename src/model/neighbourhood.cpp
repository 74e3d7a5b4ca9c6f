#include "sunbudget/model/neighbourhood.hpp"

#include <cmath>
#include <vector>

namespace sunbudget {

namespace {

/// Sum and count of the valid values of a square.
struct Sums {
    std::vector<double> sum, count;
    explicit Sums(std::size_t size) : sum(size), count(size) {}
};

void add(Sums& columns, std::span<const float> row, double sign) {
    for (std::size_t i = 0; i < row.size(); ++i) {
        const bool valid = !std::isnan(row[i]);
        columns.sum[i] += valid ? sign * static_cast<double>(row[i]) : 0.0;
        columns.count[i] += valid ? sign : 0.0;
    }
}

}  // namespace

Plane<float> mean_around(const Plane<float>& values, int radius) {
    const int side = 2 * radius + 1;
    Plane<float> out(values.width() - 2 * radius, values.height() - 2 * radius);
    Sums columns(static_cast<std::size_t>(values.width()));
    for (int r = 0; r < side - 1; ++r) add(columns, values.row(r), 1);
    for (int r = 0; r < out.height(); ++r) {
        add(columns, values.row(r + side - 1), 1);
        double sum = 0, count = 0;
        for (int c = 0; c < side - 1; ++c) {
            sum += columns.sum[static_cast<std::size_t>(c)];
            count += columns.count[static_cast<std::size_t>(c)];
        }
        for (int c = 0; c < out.width(); ++c) {
            sum += columns.sum[static_cast<std::size_t>(c + side - 1)];
            count += columns.count[static_cast<std::size_t>(c + side - 1)];
            out.at(c, r) = static_cast<float>(count > 0.5 ? sum / count : albedo_where_unknown);
            sum -= columns.sum[static_cast<std::size_t>(c)];
            count -= columns.count[static_cast<std::size_t>(c)];
        }
        add(columns, values.row(r), -1);
    }
    return out;
}

}  // namespace sunbudget
