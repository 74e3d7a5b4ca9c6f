#pragma once

#include <array>
#include <filesystem>
#include <string>

#include "sunbudget/base/error.hpp"
#include "sunbudget/model/sun_table.hpp"
#include "sunbudget/model/weather_record.hpp"
#include "terminal.hpp"

namespace sunbudget {

/// What the flags of `sun` say, as given.
struct SunFlags {
    std::string at, time, from, to, step, zone = "UTC", height, model = "esra2000",
                                          diffuse = "hay-davies1980";
    std::string slope, azimuth, albedo, fit;
    std::array<std::string, sky_parameter_count> sky;
    bool csv = false, json = false, plot = false;
};

/// What `read` returns; its errors name the flag.
template <class Read>
auto from_flag(const char* flag, const Read& read) {
    try {
        return read();
    } catch (const Error& error) {
        throw error.at(flag);
    }
}

/// "turbidity_coefficient" as a flag: "--turbidity-coefficient".
[[nodiscard]] std::string flag_of(SkyParameter parameter);

// What they mean; each throws Error(usage) that names its flag.
[[nodiscard]] SunPlace place_of(const SunFlags& flags, Terminal& terminal);
[[nodiscard]] Zone zone_of(const SunFlags& flags);
/// Of --time, which is given.
[[nodiscard]] UtcSeconds instant_of(const SunFlags& flags, const Zone& zone, double longitude_rad);
[[nodiscard]] CivilDate date_of(const std::string& text, const char* flag);
/// Of --step, in seconds; a day where it is not given.
[[nodiscard]] double step_of(const SunFlags& flags);
/// How the table of --fit is laid out: by a plan's weather, which may tell the place's height, or by its own header.
[[nodiscard]] WeatherFormat table_format(const SunFlags& flags, std::filesystem::path& table,
                                         SunPlace& place);

}  // namespace sunbudget
