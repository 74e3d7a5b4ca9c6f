#pragma once

#include <cstdint>
#include <filesystem>
#include <string>

#include "sunbudget/plan/plan.hpp"

namespace sunbudget {

/// How a plan's table is laid out; the plan has its defaults. A typical year is laid over nothing yet, and a
/// solar clock has no longitude.
[[nodiscard]] WeatherFormat weather_format(const PlanWeather& weather);

/// The text of a table. Throws Error(input) when it cannot be read or is longer than may be.
[[nodiscard]] std::string weather_text(const std::filesystem::path& file, std::uint64_t most_bytes);

}  // namespace sunbudget
