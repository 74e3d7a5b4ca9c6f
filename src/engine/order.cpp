#include "sunbudget/engine/order.hpp"

#include <algorithm>
#include <cassert>

namespace sunbudget {

namespace {

/// Column and row of the n-th square of a Z-curve: the even bits and the odd bits of n.
int every_other_bit(int n) {
    int value = 0;
    for (int bit = 0; n > 0; ++bit, n >>= 2) value |= (n & 1) << bit;
    return value;
}

}  // namespace

std::vector<Window> units_in_order(int width, int height, int unit, int band) {
    assert(band > 0 && (band & (band - 1)) == 0);
    const int columns = (width + unit - 1) / unit;
    const int rows = (height + unit - 1) / unit;
    std::vector<Window> windows;
    windows.reserve(static_cast<std::size_t>(columns) * static_cast<std::size_t>(rows));
    for (int top = 0; top < rows; top += band)
        for (int left = 0; left < columns; left += band)
            for (int n = 0; n < band * band; ++n) {
                const int column = left + every_other_bit(n), row = top + every_other_bit(n >> 1);
                if (column >= columns || row >= rows) continue;
                windows.push_back({static_cast<long>(column) * unit, static_cast<long>(row) * unit,
                                   std::min(unit, width - column * unit),
                                   std::min(unit, height - row * unit)});
            }
    return windows;
}

}  // namespace sunbudget
