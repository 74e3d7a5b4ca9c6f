#include <algorithm>
#include <cmath>

#include "rules_parts.hpp"
#include "sunbudget/base/text.hpp"

namespace sunbudget {

namespace {

/// What the weather itself has to have.
class WeatherRules : Rules {
  public:
    using Rules::Rules;
    void all() const {
        if (plan_.weather) weather(*plan_.weather);
    }

  private:
    void weather(const PlanWeather& weather) const;
};

void WeatherRules::weather(const PlanWeather& weather) const {
    const bool has_numbers = has_humidity() || written("weather.air_temperature") ||
                             written("weather.air_temperature_max") || written("weather.wind") ||
                             written("weather.pressure");
    if (!weather.table && !written("weather.table") && !has_numbers)
        mistakes_.add(weather.place, "the weather has no table and no numbers",
                      "add table: FILE, or air_temperature and a humidity, or remove weather");
    if (weather.pressure_at && !written("weather.table") && !written("weather.pressure"))
        mistakes_.add(weather.pressure_at->place, "there is no pressure",
                      "give pressure, or a table with a column of it");
    if (weather.station && std::abs((**weather.station)[0]) > 90)
        mistakes_.add(weather.station->place,
                      "no place has the latitude " + shortest((**weather.station)[0]),
                      "write [latitude, longitude], such as [52.5, 13.4]");
}

}  // namespace

void check_weather(const Plan& plan, const Node& root, Mistakes& mistakes) {
    WeatherRules(plan, root, mistakes).all();
}

}  // namespace sunbudget
