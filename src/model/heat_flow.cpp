#include "heat_flow.hpp"

#include <algorithm>
#include <cmath>
#include <functional>
#include <limits>

#include "sunbudget/physics/humidity.hpp"
#include "sunbudget/physics/surface_balance.hpp"
#include "sunbudget/tables/quality.hpp"

namespace sunbudget {

namespace {

constexpr float nan_value = std::numeric_limits<float>::quiet_NaN();

void fit(Plane<float>& plane, const Window& window) {
    if (plane.width() != window.width || plane.height() != window.height)
        plane = Plane<float>(window.width, window.height);
}

const CoverSurface* cover_of(const Run& run) {
    if (const auto* cover = std::get_if<CoverSurface>(&run.surface)) return cover;
    const auto* image = std::get_if<ReflectanceSurface>(&run.surface);
    return image != nullptr && image->fill ? &*image->fill : nullptr;
}

/// Of snow, whose NDVI is that of bare soil. Fresh and old snow 0.98 to 0.99, broadband (from memory of Warren,
/// Rev. Geophys. 20, 1982, 67-89, and Dozier & Warren, Water Resour. Res. 18, 1982, 1424-1434).
constexpr float snow_emissivity = 0.985F;

/// Temperatures no ground has (a scene's clamped numbers under cloud) are no data.
void keep_possible(std::span<float> kelvin) noexcept {
    constexpr float coldest_k = 180, hottest_k = 380;
    for (auto& value : kelvin) value = value >= coldest_k && value <= hottest_k ? value : nan_value;
}

/// A reader where there is a source.
std::optional<Reader> reader_of(const std::optional<Source>& source) {
    std::optional<Reader> reader;
    if (source) reader.emplace(*source);
    return reader;
}

}  // namespace

struct HeatFlow::State {
    const Run& run;
    const Heat& heat;
    LongwaveField* field;
    int thread;
    std::optional<PointLongwave> point;
    std::optional<ChangeReader> change;  ///< one that has been carried out

    std::optional<Reader> cover, emissivity_raster, red, nir, surface, surface_quality, temperature,
        humidity;
    Window window;
    Plane<float> emissivity, dry, built, class_emissivity;
    Plane<float> red_plane, nir_plane, surface_k, air_k, humid;
    const Plane<float>* heights_m = nullptr;
    std::vector<Window> blocks;
    std::vector<LongwaveField::Block> prepared;

    HeatPlanes out;
    Plane<float> sky, air_black, surface_black, band_air_k;

    State(const Run& r, LongwaveField* f, int t) : run(r), heat(r.heat), field(f), thread(t) {
        if (const auto* classes = cover_of(run)) cover.emplace(classes->codes);
        if (heat.emissivity) {
            if (const auto* raster = std::get_if<Source>(&*heat.emissivity))
                emissivity_raster.emplace(*raster);
            if (const auto* ndvi = std::get_if<NdviEmissivity>(&*heat.emissivity)) {
                red.emplace(ndvi->red);
                nir.emplace(ndvi->nir);
            }
        }
        surface = reader_of(heat.surface_k);
        if (heat.surface_quality) surface_quality.emplace(heat.surface_quality->codes);
        if (run.carried_out) change.emplace(*run.carried_out);
        if (!heat.longwave) return;
        point.emplace(*run.times, *heat.longwave);
        temperature = reader_of(heat.longwave->temperature_k);
        humidity = reader_of(heat.longwave->humidity);
    }

    void read_emissivity(const Plane<std::uint16_t>& flags);
    void read_dry();
    void read_surface();
    void air_from_field(std::size_t band);
    void air_by_pixel(std::size_t band);
    void surface_by_pixel(const AirMoment& numbers);
    void come_down(const Plane<float>& sky_view);
    void go_up(const Plane<float>& own_emissivity, const Plane<float>& own_dry,
               const Plane<float>& net_shortwave, HeatPlanes& to);
    void take_net(HeatPlanes& to);
};

void keep_dry(std::span<const float> dry, std::span<float> values) noexcept {
    for (std::size_t i = 0; i < values.size(); ++i) values[i] = dry[i] >= 1 ? values[i] : nan_value;
}

void HeatFlow::State::read_emissivity(const Plane<std::uint16_t>& flags) {
    if (!heat.emissivity) return;
    fit(emissivity, window);
    if (const auto* number = std::get_if<double>(&*heat.emissivity))
        emissivity.fill(static_cast<float>(*number));
    if (emissivity_raster) {
        emissivity_raster->read(window, emissivity);
        for (int r = 0; r < window.height; ++r)
            for (auto& value : emissivity.row(r))
                value = value >= 0 && value <= 1 ? value : nan_value;
    }
    if (std::holds_alternative<ClassEmissivity>(*heat.emissivity))
        cover->read_values(window, cover_of(run)->emissivity, emissivity);
    if (!red) return;
    red->read(window, red_plane);
    nir->read(window, nir_plane);
    if (cover) {
        cover->read_values(window, cover_of(run)->built_emissivity, built);
        cover->read_values(window, cover_of(run)->emissivity, class_emissivity);
    }
    for (int r = 0; r < window.height; ++r) {
        emissivity_from_ndvi(red_plane.row(r), nir_plane.row(r), emissivity.row(r));
        const auto row = emissivity.row(r);
        const auto flag = flags.row(r);
        for (std::size_t i = 0; i < row.size(); ++i) {
            // A cloud's NDVI says nothing of the ground below.
            const bool seen = (flag[i] & quality::source_mask) == quality::reflectance;
            if (!seen) row[i] = cover ? class_emissivity.row(r)[i] : nan_value;
            if (seen && cover && !std::isnan(built.row(r)[i])) row[i] = built.row(r)[i];
            if (seen && (flag[i] & quality::snow) != 0) row[i] = snow_emissivity;
        }
    }
}

void HeatFlow::State::read_dry() {
    fit(dry, window);
    if (cover)
        cover->read_values(window, cover_of(run)->dry, dry);
    else
        dry.fill(nan_value);
}

/// A raster of the ground's temperature, without what clouds hide.
void HeatFlow::State::read_surface() {
    if (!surface) return;
    surface->read(window, surface_k);
    for (int r = 0; r < window.height; ++r) keep_possible(surface_k.row(r));
    if (!surface_quality) return;
    Plane<std::int32_t> codes;
    surface_quality->read_codes(window, codes);
    std::vector<RejectReason> reasons(static_cast<std::size_t>(window.width));
    std::vector<std::uint16_t> flags(
        reasons.size());  // those of the albedo's image are the layer quality's
    for (int r = 0; r < window.height; ++r) {
        std::ranges::fill(reasons, not_rejected);
        apply_quality(codes.row(r), heat.surface_quality->tests, heat.surface_quality->missing,
                      flags, reasons);
        drop_rejected(reasons, surface_k.row(r));
    }
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
        const auto h = humid.row(r);
        if (longwave.humidity_as == HumidityAs::dew_point)
            saturation_vapour_pressure(h, vapour_hpa);
        else if (longwave.humidity_as == HumidityAs::vapour_pressure)
            std::copy(h.begin(), h.end(), vapour_hpa.begin());
        else
            saturation_vapour_pressure(t, vapour_hpa);
        if (longwave.humidity_as == HumidityAs::relative)
            std::transform(vapour_hpa.begin(), vapour_hpa.end(), h.begin(), vapour_hpa.begin(),
                           std::multiplies<>());
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
            std::copy(surface_k.row(r).begin(), surface_k.row(r).end(),
                      out.surface_k.row(r).begin());
            black_body(surface_k.row(r), surface_black.row(r));
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
    s.read_emissivity(flags);
    s.read_dry();
    if (s.change) {
        if (!s.emissivity.empty()) s.change->emissivity(window, s.emissivity);
        s.change->dry(window, s.dry);
    }
    s.read_surface();
    if (s.temperature) s.temperature->read(window, s.air_k);
    if (s.humidity) s.humidity->read(window, s.humid);
    s.prepared.clear();
    if (s.field != nullptr)
        for (const auto& block : blocks)
            s.prepared.push_back(s.field->prepare(block, window, heights_m, s.thread));
}

const Plane<float>& HeatFlow::emissivity() const {
    return state_->emissivity;
}
const Plane<float>& HeatFlow::dry() const {
    return state_->dry;
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
        for (int r = 0; r < s.window.height && s.surface; ++r)
            std::copy(s.surface_k.row(r).begin(), s.surface_k.row(r).end(),
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
    s.come_down(sky_view);
    s.go_up(s.emissivity, s.dry, net_shortwave, s.out);
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
    std::uint64_t count = 0;
    for (const auto* reader :
         {&state_->emissivity_raster, &state_->surface, &state_->temperature, &state_->humidity})
        if (*reader) count += (*reader)->infinities();
    return count;
}

}  // namespace sunbudget
