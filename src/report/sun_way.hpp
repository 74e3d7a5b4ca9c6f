#pragma once

#include <optional>
#include <string>
#include <vector>

#include "sunbudget/engine/pixel.hpp"
#include "sunbudget/model/sun_table.hpp"

namespace sunbudget {

/// The sun's way over a pixel on one day, seen past the terrain.
struct SunWay {
    std::size_t band = 0;
    SunDayRow day;
    std::vector<SunMoment> moments;         ///< every ten minutes with the sun up
    std::vector<std::optional<bool>> seen;  ///< by moment; nothing where no horizon is known
    std::optional<SunMoment> instant;       ///< of a run that looks at one
};

/// The day in the middle of each of the first periods; none where the place is not known.
[[nodiscard]] std::vector<SunWay> sun_ways(const Run& run, const PixelAccount& account,
                                           std::size_t most);

/// Elevation angle of the horizon; nothing where the run did not look.
[[nodiscard]] std::optional<double> horizon_at(const PixelAccount& account, double azimuth_rad);

/// Horizon and one day's sun over azimuth and elevation, in characters.
[[nodiscard]] std::string sky_plot(const PixelAccount& account, const SunWay& way);

}  // namespace sunbudget
