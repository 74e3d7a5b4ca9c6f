#include "heat_flow.hpp"

#include <algorithm>
#include <cmath>
#include <functional>
#include <limits>

#include "heat_ground.hpp"
#include "planes.hpp"
#include "sunbudget/physics/humidity.hpp"
#include "sunbudget/physics/surface_balance.hpp"

namespace sunbudget {

namespace {

constexpr float nan_value = std::numeric_limits<float>::quiet_NaN();

/// Vapour pressures from what is known of humidity.
void vapour_row(HumidityAs as, std::span<const float> temperature_k, std::span<const float> humid,
                std::span<float> vapour_hpa) {
    if (as == HumidityAs::dew_point)
        saturation_vapour_pressure(humid, vapour_hpa);
    else if (as == HumidityAs::vapour_pressure)
        std::ranges::copy(humid, vapour_hpa.begin());
    else
        saturation_vapour_pressure(temperature_k, vapour_hpa);
    if (as == HumidityAs::relative)
        std::ranges::transform(vapour_hpa, humid, vapour_hpa.begin(), std::multiplies<>());
}

}  // namespace

struct HeatFlow::State {
    const Run& run;
    const Heat& heat;
    LongwaveField* field;
    int thread;
    std::optional<PointLongwave> point;
    std::optional<Reader> temperature, humidity;
    std::vector<Reader> clouds, downs;  ///< one for all bands, or one a band
    HeatGround ground;
    Window window;
    Plane<float> air_k, humid;  ///< as read
    const Plane<float>* heights_m = nullptr;
    std::vector<LongwaveField::Block> prepared;

    HeatPlanes out;
    Plane<float> sky, air_black, surface_black, band_air_k;

    State(const Run& r, LongwaveField* f, int t)
        : run(r), heat(r.heat), field(f), thread(t), ground(r) {
        if (!heat.longwave) return;
        point.emplace(*run.times, *heat.longwave);
        temperature = reader_of(heat.longwave->temperature_k);
        humidity = reader_of(heat.longwave->humidity);
        for (const auto& raster : heat.longwave->clouds) clouds.emplace_back(raster);
        for (const auto& raster : heat.longwave->down_w_m2) downs.emplace_back(raster);
    }

    void air_from_field(std::size_t band);
    void air_by_pixel(std::size_t band);
    void surface_by_pixel(const AirMoment& numbers);
    void sky_of_rasters(std::size_t band);
    void come_down(const Plane<float>& sky_view);
    void go_up(const Plane<float>& own_emissivity, const Plane<float>& own_dry,
               const Plane<float>& net_shortwave, HeatPlanes& to);
    void take_net(HeatPlanes& to);
};

void keep_dry(std::span<const float> dry, std::span<float> values) noexcept {
    for (std::size_t i = 0; i < values.size(); ++i) values[i] = dry[i] >= 1 ? values[i] : nan_value;
}

/// What the sky sends down, and the air, from a few nodes.
void HeatFlow::State::air_from_field(std::size_t band) {
    using Part = LongwaveField::Part;
    const auto fill = [&](Part part, Plane<float>& plane) {
        fit(plane, window);
        for (const auto& block : prepared)
            LongwaveField::fill(block, band, part, *heights_m, plane);
        if (!heat.thin.empty() && heat.thin[band]) plane.fill(nan_value);
    };
    fill(Part::sky, sky);
    fill(Part::air_black, air_black);
    fill(Part::air_k, band_air_k);
    if (heat.surface != SurfaceFrom::air) return;
    fill(Part::surface_black, surface_black);
    fill(Part::surface_k, out.surface_k);
}

/// The same where temperature or humidity is a raster's.
void HeatFlow::State::air_by_pixel(std::size_t band) {
    const auto& longwave = *heat.longwave;
    const auto numbers = point->mean_numbers(band);
    const auto lapse_k_m = static_cast<float>(longwave.height_m ? point->mean_lapse_k_m(band) : 0);
    for (auto* plane : {&sky, &air_black, &band_air_k}) fit(*plane, window);
    if (!humidity) {
        fit(humid, window);
        humid.fill(static_cast<float>(point->mean_humidity(band)));
    }
    std::vector<float> vapour_hpa(static_cast<std::size_t>(window.width));
    const auto station_m = static_cast<float>(longwave.height_m.value_or(0));
    for (int r = 0; r < window.height; ++r) {
        const auto t = band_air_k.row(r);
        if (temperature)
            std::copy(air_k.row(r).begin(), air_k.row(r).end(), t.begin());
        else
            std::fill(t.begin(), t.end(), static_cast<float>(numbers.temperature_k));
        if (!temperature && lapse_k_m != 0 && run.terrain)
            for (std::size_t i = 0; i < t.size(); ++i)
                t[i] -= lapse_k_m * (heights_m->row(r)[i] - station_m);
        vapour_row(longwave.humidity_as, t, humid.row(r), vapour_hpa);
        clear_longwave(longwave.formula, t, vapour_hpa, sky.row(r));
        cloudy_longwave(t, numbers.cloud, sky.row(r));
        black_body(t, air_black.row(r));
    }
    if (heat.surface == SurfaceFrom::air) surface_by_pixel(numbers);
}

void HeatFlow::State::surface_by_pixel(const AirMoment& numbers) {
    const double above_k = heat.longwave->surface_above_air_k;
    fit(out.surface_k, window);
    fit(surface_black, window);
    for (int r = 0; r < window.height; ++r) {
        const auto t = band_air_k.row(r);
        const auto to = out.surface_k.row(r);
        std::transform(t.begin(), t.end(), to.begin(), [&](float air) {
            return std::isnan(above_k) ? static_cast<float>(numbers.surface_k)
                                       : air + static_cast<float>(above_k);
        });
        black_body(to, surface_black.row(r));
    }
}

/// Clouds, or all that the sky sends down, as rasters have them.
void HeatFlow::State::sky_of_rasters(std::size_t band) {
    const auto read = [&](std::vector<Reader>& readers, Plane<float>& plane) {
        readers[std::min(band, readers.size() - 1)].read(window, plane);
    };
    if (!downs.empty()) {
        constexpr float most_w_m2 = 700;  // as the plan's numbers
        read(downs, sky);
        for (int r = 0; r < window.height; ++r)
            for (auto& flux : sky.row(r)) flux = flux >= 0 && flux <= most_w_m2 ? flux : nan_value;
    }
    if (clouds.empty()) return;
    Plane<float> share;
    read(clouds, share);
    for (int r = 0; r < window.height; ++r)
        cloudy_longwave(heat.longwave->cloud_law, band_air_k.row(r), share.row(r), sky.row(r));
}

/// A daily method's field is of the net already.
void HeatFlow::State::take_net(HeatPlanes& to) {
    fit(to.net, window);
    for (int r = 0; r < window.height; ++r)
        std::copy(sky.row(r).begin(), sky.row(r).end(), to.net.row(r).begin());
}

/// From the sky and the ground in view.
void HeatFlow::State::come_down(const Plane<float>& sky_view) {
    for (auto* plane : {&out.down, &surface_black, &out.surface_k}) fit(*plane, window);
    for (int r = 0; r < window.height; ++r) {
        const auto down = out.down.row(r);
        if (heat.surface == SurfaceFrom::raster) {
            std::copy(ground.surface_k().row(r).begin(), ground.surface_k().row(r).end(),
                      out.surface_k.row(r).begin());
            black_body(ground.surface_k().row(r), surface_black.row(r));
        }
        if (sky_view.empty()) {
            std::copy(sky.row(r).begin(), sky.row(r).end(), down.begin());
        } else {
            // The ground in view is as warm as the pixel's own, where that is known, else as the air.
            auto around = air_black.row(r);
            if (heat.surface == SurfaceFrom::air || heat.surface == SurfaceFrom::raster) {
                const auto own = surface_black.row(r);
                for (std::size_t i = 0; i < around.size(); ++i)
                    around[i] = std::isnan(own[i]) ? around[i] : own[i];
            }
            longwave_on_surface(sky_view.row(r), sky.row(r), around, down);
        }
    }
}

/// From there to what goes up and is left, where the ground's temperature and emissivity are known.
void HeatFlow::State::go_up(const Plane<float>& own_emissivity, const Plane<float>& own_dry,
                            const Plane<float>& net_shortwave, HeatPlanes& to) {
    for (auto* plane : {&to.up, &to.net, &to.surface_k}) fit(*plane, window);
    if (heat.surface == SurfaceFrom::nowhere || !heat.emissivity) return;
    const auto exchange = static_cast<float>(heat_exchange_w_m2_k(heat.wind));
    for (int r = 0; r < window.height; ++r) {
        const std::span<const float> down = out.down.row(r), emits = own_emissivity.row(r);
        if (heat.surface == SurfaceFrom::balance) {
            balanced_temperature(net_shortwave.row(r), emits, down, band_air_k.row(r), exchange,
                                 to.surface_k.row(r));
            keep_dry(own_dry.row(r), to.surface_k.row(r));
            black_body(to.surface_k.row(r), surface_black.row(r));
        }
        longwave_up(emits, surface_black.row(r), down, to.up.row(r));
        net_longwave(emits, surface_black.row(r), down, to.net.row(r));
    }
}

HeatFlow::HeatFlow(const Run& run, LongwaveField* field, int thread)
    : state_(std::make_unique<State>(run, field, thread)) {}
HeatFlow::~HeatFlow() = default;
HeatFlow::HeatFlow(HeatFlow&&) noexcept = default;

void HeatFlow::read(const Window& window, const std::vector<Window>& blocks,
                    const Plane<float>& heights_m, const Plane<std::uint16_t>& flags) {
    auto& s = *state_;
    s.window = window;
    s.heights_m = &heights_m;
    s.ground.read(window, flags);
    if (s.temperature) s.temperature->read(window, s.air_k);
    if (s.humidity) s.humidity->read(window, s.humid);
    s.prepared.clear();
    if (s.field != nullptr)
        for (const auto& block : blocks)
            s.prepared.push_back(s.field->prepare(block, window, heights_m, s.thread));
}

const Plane<float>& HeatFlow::emissivity() const {
    return state_->ground.emissivity();
}
const Plane<float>& HeatFlow::dry() const {
    return state_->ground.dry();
}

const Plane<float>& HeatFlow::air_k() const {
    return state_->band_air_k;
}
const Plane<float>& HeatFlow::sky() const {
    return state_->sky;
}

const HeatPlanes& HeatFlow::band(std::size_t band, const Plane<float>& sky_view,
                                 const Plane<float>& net_shortwave) {
    auto& s = *state_;
    if (!s.heat.longwave) {
        // Only a raster of temperatures needs no air.
        fit(s.out.surface_k, s.window);
        for (int r = 0; r < s.window.height && s.ground.has_surface(); ++r)
            std::copy(s.ground.surface_k().row(r).begin(), s.ground.surface_k().row(r).end(),
                      s.out.surface_k.row(r).begin());
        return s.out;
    }
    if (s.field != nullptr)
        s.air_from_field(band);
    else
        s.air_by_pixel(band);
    if (s.heat.longwave->daily) {
        s.take_net(s.out);
        return s.out;
    }
    s.sky_of_rasters(band);
    s.come_down(sky_view);
    s.go_up(s.ground.emissivity(), s.ground.dry(), net_shortwave, s.out);
    return s.out;
}

void HeatFlow::beside(const Plane<float>& emissivity, const Plane<float>& dry,
                      const Plane<float>& net_shortwave, HeatPlanes& changed) {
    if (state_->heat.longwave->daily)
        state_->take_net(changed);
    else
        state_->go_up(emissivity, dry, net_shortwave, changed);
}

std::uint64_t HeatFlow::infinities() const {
    auto count =
        state_->ground.infinities() + infinities_of({&state_->temperature, &state_->humidity});
    for (const auto* readers : {&state_->clouds, &state_->downs})
        for (const auto& reader : *readers) count += reader.infinities();
    return count;
}

}  // namespace sunbudget
