#include "flags.hpp"

#include <algorithm>
#include <cstddef>

namespace sunbudget {

void flag_nan(std::span<const float> values, std::span<std::uint16_t> flags, std::uint16_t flag,
              std::uint16_t unless) noexcept {
    for (std::size_t i = 0; i < values.size(); ++i) {
        const bool missing = (values[i] != values[i]) & ((flags[i] & unless) == 0);
        flags[i] = static_cast<std::uint16_t>(flags[i] | (missing ? flag : 0));
    }
}

/// Flags come in runs, often of whole rows: the map is asked once a run, not once a pixel.
void FlagCounts::add(const Plane<std::uint16_t>& flags) {
    for (int r = 0; r < flags.height(); ++r) {
        const auto row = flags.row(r);
        if (std::count(row.begin(), row.end(), row.front()) ==
            static_cast<std::ptrdiff_t>(row.size())) {
            counts_[row.front()] += row.size();
            continue;
        }
        for (auto first = row.begin(); first != row.end();) {
            const auto last =
                std::find_if(first, row.end(), [&](auto flag) { return flag != *first; });
            counts_[*first] += static_cast<std::uint64_t>(last - first);
            first = last;
        }
    }
}

}  // namespace sunbudget
