#pragma once

#include <cstddef>
#include <optional>
#include <string>
#include <vector>

#include "sunbudget/model/longwave.hpp"
#include "sunbudget/model/sky.hpp"
#include "sunbudget/model/weather_record.hpp"

namespace sunbudget {

/// What is wanted of a weather table for a run's longwave.
struct AirWants {
    bool measured = false;  ///< the table's own longwave, where it has it
    bool cloud = true;      ///< clouds from the table; else none
    LongwaveCloud law = LongwaveCloud::unsworth_monteith1975;  ///< for a column of cloud
    bool surface = false;                                      ///< the ground's temperature
};

/// Air of a weather table, a row for each interval that has all that is wanted of it.
struct AirRecord {
    std::vector<AirRow> rows;
    std::string cloud_from;    ///< "cloud", "global", "longwave_down" or "" for none
    std::size_t left_out = 0;  ///< intervals that lack something
    std::size_t night_rows =
        0;  ///< whose cloud was interpolated between hours of sun above 10 degrees
    std::size_t first_rows = 0;  ///< of those, rows before the first or after the last such hour
};

/// Takes temperature and humidity (vapour pressure, else dew point, else relative humidity with the air's
/// temperature), longwave, cloud and the ground's temperature from a record. Without a column of cloud the
/// sunlight tells it after Crawford & Duchon (1999): its hourly sums over the clear sky's at the station while
/// the sun stands above 10 degrees, interpolated through the night.
///
/// errors  Error(input) when a column that is wanted is not in the table
[[nodiscard]] AirRecord air_record(const WeatherRecord& record, const Station& station,
                                   const Sky& clear, const AirWants& wants);

}  // namespace sunbudget
