#include "sunbudget/model/air_record.hpp"

#include <algorithm>
#include <cmath>

#include "sunbudget/base/error.hpp"
#include "sunbudget/base/units.hpp"
#include "sunbudget/model/neighbourhood.hpp"
#include "sunbudget/physics/air_mass.hpp"
#include "sunbudget/physics/humidity.hpp"
#include "sunbudget/physics/sun_place.hpp"

namespace sunbudget {

namespace {

constexpr double nan_value = std::numeric_limits<double>::quiet_NaN();
/// Below this the clear sky's light is too little to tell clouds by.
constexpr double lowest_sun_deg = 10;
constexpr double hour_s = 3600;
/// Between two looks at the clear sky inside a long interval.
constexpr double look_s = 600;

/// Global light of the clear sky over a station.
class ClearGlobal {
  public:
    ClearGlobal(const Station& station, const Sky& clear, UtcSeconds begin, UtcSeconds end)
        : station_(station),
          sky_(clear),
          track_(begin - seconds_per_day, end + seconds_per_day),
          up_(up_direction(station.latitude_rad, station.longitude_rad)),
          pressure_(pressure_ratio(station.height_m)) {}

    [[nodiscard]] double sine_at(UtcSeconds utc) const {
        const auto sun = track_.at(utc);
        return with_parallax(dot(sun_direction(sun), up_), sun.distance_au);
    }
    /// The mean over a span, in W m-2.
    [[nodiscard]] double mean(const TimeSpan& span) const {
        const double count = std::max(1.0, std::ceil((span.end - span.begin) / look_s));
        double sum = 0;
        for (double i = 0; i < count; ++i)
            sum += at(span.begin + (i + 0.5) * (span.end - span.begin) / count);
        return sum / count;
    }

  private:
    [[nodiscard]] double at(UtcSeconds utc) const {
        const auto sun = track_.at(utc);
        const double sine = with_parallax(dot(sun_direction(sun), up_), sun.distance_au);
        if (sine <= 0) return 0;
        const int month = Zone().local(utc).date.month;
        const auto light = sky_moment(sky_, {utc, month, extraterrestrial_normal(sun.distance_au),
                                             std::asin(sine), station_.height_m, pressure_});
        return light.beam_normal_w_m2 * sine + light.diffuse_w_m2 +
               albedo_where_unknown * light.thrown_back_w_m2;
    }

    Station station_;
    Sky sky_;
    SunTrack track_;
    EarthVector up_;
    double pressure_;
};

class Builder {
  public:
    Builder(const WeatherRecord& record, const Station& station, const Sky& clear,
            const AirWants& wants)
        : record_(record), station_(station), clear_(clear), wants_(wants) {}

    AirRecord built() {
        refuse_what_is_missing();
        const auto clouds = cloud_terms_of_rows();
        for (std::size_t i = 0; i < record_.intervals.size(); ++i) {
            const auto air = moment(i, clouds[i]);
            if (complete(air))
                found_.rows.push_back({record_.intervals[i], air});
            else
                ++found_.left_out;
        }
        return std::move(found_);
    }

  private:
    [[nodiscard]] bool has(Weather quantity) const { return record_.has(quantity); }
    [[nodiscard]] double value(Weather quantity, std::size_t row) const {
        return has(quantity) ? record_.values(quantity)[row] : nan_value;
    }
    [[nodiscard]] bool measured() const { return wants_.measured && has(Weather::longwave_down); }
    [[nodiscard]] bool has_humidity() const {
        return has(Weather::vapour_pressure) || has(Weather::dew_point) ||
               has(Weather::relative_humidity);
    }

    void refuse_what_is_missing() const;
    [[nodiscard]] double vapour_hpa(std::size_t row) const;
    [[nodiscard]] AirMoment moment(std::size_t row, const CloudTerms& terms) const;
    [[nodiscard]] bool complete(const AirMoment& air) const;
    [[nodiscard]] std::vector<CloudTerms> cloud_terms_of_rows();
    [[nodiscard]] std::vector<double> numbers_by_sun() const;
    void interpolate(std::vector<double>& numbers);

    const WeatherRecord& record_;
    Station station_;
    const Sky& clear_;
    AirWants wants_;
    AirRecord found_;
};

void Builder::refuse_what_is_missing() const {
    const auto refuse = [](const std::string& what) {
        throw Error(
            Cause::input,
            "the weather table has no " + what + ", without which the sky's longwave is not known",
            {}, "name its column in weather.columns");
    };
    if (!measured() && !has(Weather::air_temperature)) refuse("air_temperature");
    if (!measured() && !has_humidity())
        refuse("humidity (relative_humidity, dew_point or vapour_pressure)");
    if (wants_.surface && !has(Weather::surface_temperature)) refuse("surface_temperature");
}

double Builder::vapour_hpa(std::size_t row) const {
    if (const double pressure = value(Weather::vapour_pressure, row); !std::isnan(pressure))
        return pressure;
    if (const double dew = value(Weather::dew_point, row); !std::isnan(dew))
        return saturation_vapour_pressure_hpa(dew);
    return value(Weather::relative_humidity, row) *
           saturation_vapour_pressure_hpa(value(Weather::air_temperature, row));
}

AirMoment Builder::moment(std::size_t row, const CloudTerms& terms) const {
    AirMoment air{value(Weather::air_temperature, row), vapour_hpa(row), terms, nan_value,
                  nan_value};
    if (measured()) air.longwave_down_w_m2 = value(Weather::longwave_down, row);
    if (wants_.surface) air.surface_k = value(Weather::surface_temperature, row);
    return air;
}

bool Builder::complete(const AirMoment& air) const {
    if (wants_.surface && std::isnan(air.surface_k)) return false;
    if (!std::isnan(air.longwave_down_w_m2))
        return !has(Weather::air_temperature) || !std::isnan(air.temperature_k);
    return !std::isnan(air.temperature_k) && !std::isnan(air.vapour_pressure_hpa) &&
           !std::isnan(air.cloud.factor);
}

std::vector<CloudTerms> Builder::cloud_terms_of_rows() {
    std::vector<CloudTerms> terms(record_.intervals.size());
    if (measured())
        found_.cloud_from = weather_names[static_cast<std::size_t>(Weather::longwave_down)];
    if (!wants_.cloud) return terms;
    if (has(Weather::cloud)) {
        if (!measured()) found_.cloud_from = "cloud";
        const auto cloud = record_.values(Weather::cloud);
        std::transform(cloud.begin(), cloud.end(), terms.begin(),
                       [&](double c) { return cloud_terms(wants_.law, c); });
    } else if (has(Weather::global)) {
        if (!measured()) found_.cloud_from = "global";
        auto numbers = numbers_by_sun();
        interpolate(numbers);
        std::transform(numbers.begin(), numbers.end(), terms.begin(),
                       [](double n) { return cloud_terms(LongwaveCloud::crawford_duchon1999, n); });
    }
    return terms;
}

/// The cloud number of each row with a high sun, NaN for the others. Rows shorter than an hour take the sums of
/// the hour around them: a gap between two clouds is not a clear sky.
std::vector<double> Builder::numbers_by_sun() const {
    const auto& spans = record_.intervals;
    const auto global = record_.values(Weather::global);
    std::vector<double> numbers(spans.size(), nan_value), clear(spans.size());
    const ClearGlobal sky(station_, clear_, spans.front().begin, spans.back().end);
    std::transform(spans.begin(), spans.end(), clear.begin(),
                   [&](const TimeSpan& span) { return sky.mean(span); });
    const double lowest_sine = std::sin(rad_from_deg(lowest_sun_deg));
    std::size_t first = 0;
    for (std::size_t i = 0; i < spans.size(); ++i) {
        const double middle = (spans[i].begin + spans[i].end) / 2;
        const double half_s = std::max(hour_s, spans[i].end - spans[i].begin) / 2;
        while (spans[first].end <= middle - half_s) ++first;
        const bool high = spans[i].end - spans[i].begin > 3 * hour_s
                              ? clear[i] > 0
                              : sky.sine_at(middle) > lowest_sine;
        if (!high) continue;
        double sum = 0, clear_sum = 0;
        for (auto k = first; k < spans.size() && spans[k].begin < middle + half_s; ++k) {
            if (std::isnan(global[k])) continue;
            sum += global[k];
            clear_sum += clear[k];
        }
        if (clear_sum > 0) numbers[i] = cloud_number(sum, clear_sum);
    }
    return numbers;
}

/// Straight lines between rows with a number; the first and the last are held outside.
void Builder::interpolate(std::vector<double>& numbers) {
    std::vector<std::size_t> known;
    for (std::size_t i = 0; i < numbers.size(); ++i)
        if (!std::isnan(numbers[i])) known.push_back(i);
    if (known.empty()) return;
    const auto time = [&](std::size_t row) { return record_.intervals[row].begin; };
    auto after = known.begin();
    for (std::size_t i = 0; i < numbers.size(); ++i) {
        if (after != known.end() && *after == i) {
            ++after;
            continue;
        }
        ++found_.night_rows;
        if (after == known.begin() || after == known.end()) {
            ++found_.first_rows;
            numbers[i] = numbers[after == known.end() ? known.back() : known.front()];
            continue;
        }
        const auto from = *(after - 1), to = *after;
        numbers[i] = numbers[from] + (time(i) - time(from)) / (time(to) - time(from)) *
                                         (numbers[to] - numbers[from]);
    }
}

}  // namespace

AirRecord air_record(const WeatherRecord& record, const Station& station, const Sky& clear,
                     const AirWants& wants) {
    return Builder(record, station, clear, wants).built();
}

}  // namespace sunbudget
