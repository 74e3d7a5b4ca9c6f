#pragma once

#include <string>

#include "sunbudget/model/sun_table.hpp"

namespace sunbudget {

/// The light of one day as letters: 72 columns, hours of the zone below.
[[nodiscard]] std::string day_plot(const SunPlace& place, const Zone& zone, CivilDate date);

}  // namespace sunbudget
