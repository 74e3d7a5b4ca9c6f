#pragma once

#include <cstdint>
#include <map>
#include <span>

#include "sunbudget/base/plane.hpp"

namespace sunbudget {

/// Adds a flag where there is no value, unless another flag says why already. Without branches.
void flag_nan(std::span<const float> values, std::span<std::uint16_t> flags, std::uint16_t flag,
              std::uint16_t unless) noexcept;

/// Adds the flag to the row's pixels that say yes.
template <typename IsFlagged>
void flag_where(std::span<std::uint16_t> flags, std::uint16_t flag, IsFlagged&& is_flagged) {
    for (std::size_t i = 0; i < flags.size(); ++i)
        flags[i] = static_cast<std::uint16_t>(flags[i] | (is_flagged(i) ? flag : 0));
}

/// Pixels by the value of their flags.
class FlagCounts {
  public:
    void add(const Plane<std::uint16_t>& flags);
    [[nodiscard]] const std::map<std::uint16_t, std::uint64_t>& counts() const { return counts_; }

  private:
    std::map<std::uint16_t, std::uint64_t> counts_;
};

}  // namespace sunbudget
