#include "sunbudget/model/surface.hpp"

#include <algorithm>
#include <cmath>
#include <limits>
#include <optional>

#include "planes.hpp"
#include "reflectance.hpp"
#include "sunbudget/tables/quality.hpp"

namespace sunbudget {

namespace {

constexpr float nan_value = std::numeric_limits<float>::quiet_NaN();

}  // namespace

struct SurfaceReader::State {
    const Run& run;
    std::optional<Reader> reader;
    std::optional<ReflectanceReader> image;
    std::optional<ChangeReader> change;
    Plane<std::int32_t> codes;
    Plane<float> fill_albedo;
    Plane<std::uint16_t> fill_flags;
    std::vector<float> sources;  // scratch: a row of the quality layer's source numbers

    explicit State(const Run& r) : run(r) {
        if (run.carried_out) change.emplace(*run.carried_out);
        if (const auto* cover = std::get_if<CoverSurface>(&run.surface))
            reader.emplace(cover->codes);
        if (const auto* surface = std::get_if<ReflectanceSurface>(&run.surface)) {
            image.emplace(*surface);
            if (surface->fill) reader.emplace(surface->fill->codes);
        }
        if (const auto* given = std::get_if<GivenSurface>(&run.surface))
            if (const auto* raster = std::get_if<Source>(&given->albedo)) reader.emplace(*raster);
    }

    void read_cover(const CoverSurface& cover, const Window& window, Plane<float>& albedo,
                    Plane<std::uint16_t>& flags);
    void read_given(const GivenSurface& given, const Window& window, Plane<float>& albedo,
                    Plane<std::uint16_t>& flags);
    void fill_from(const CoverSurface& cover, const Window& window, Plane<float>& albedo,
                   Plane<std::uint16_t>& flags);
};

void SurfaceReader::State::read_cover(const CoverSurface& cover, const Window& window,
                                      Plane<float>& albedo, Plane<std::uint16_t>& flags) {
    if (cover.averaged) {
        reader->read_values(window, cover.albedo, albedo);
        for (int r = 0; r < window.height; ++r)
            std::transform(
                albedo.row(r).begin(), albedo.row(r).end(), flags.row(r).begin(),
                [](float a) { return std::isnan(a) ? quality::no_surface : quality::class_table; });
        return;
    }
    reader->read_codes(window, codes);
    sources.resize(static_cast<std::size_t>(window.width));
    for (int r = 0; r < window.height; ++r) {
        cover.albedo.of_row(codes.row(r), albedo.row(r));
        cover.quality.of_row(codes.row(r), sources);
        std::transform(sources.begin(), sources.end(), flags.row(r).begin(), [](float source) {
            return std::isnan(source) ? quality::no_surface : static_cast<std::uint16_t>(source);
        });
    }
}

void SurfaceReader::State::read_given(const GivenSurface& given, const Window& window,
                                      Plane<float>& albedo, Plane<std::uint16_t>& flags) {
    if (const auto* value = std::get_if<double>(&given.albedo))
        albedo.fill(static_cast<float>(*value));
    else
        reader->read(window, albedo);
    for (int r = 0; r < window.height; ++r) {
        const auto a = albedo.row(r);
        const auto flag = flags.row(r);
        for (std::size_t i = 0; i < a.size(); ++i) {
            if (std::isnan(a[i])) continue;
            flag[i] = quality::given_albedo;
            if (a[i] >= 0.0f && a[i] <= 1.0f) continue;
            // No surface reflects less than nothing or more than all: not a value, and said so.
            a[i] = nan_value;
            flag[i] = quality::no_surface | quality::out_of_range;
        }
    }
}

/// Where the image gives no albedo the land cover does; the flags keep the reason.
void SurfaceReader::State::fill_from(const CoverSurface& cover, const Window& window,
                                     Plane<float>& albedo, Plane<std::uint16_t>& flags) {
    fit(fill_albedo, window);
    fit(fill_flags, window);
    fill_albedo.fill(nan_value);
    read_cover(cover, window, fill_albedo, fill_flags);
    for (int r = 0; r < window.height; ++r) {
        const auto a = albedo.row(r), filling = fill_albedo.row(r);
        const auto flag = flags.row(r);
        for (std::size_t i = 0; i < a.size(); ++i) {
            if (!std::isnan(a[i]) || std::isnan(filling[i])) continue;
            a[i] = filling[i];
            flag[i] |= quality::filled;
        }
    }
}

SurfaceReader::SurfaceReader(const Run& run) : state_(std::make_unique<State>(run)) {}
SurfaceReader::~SurfaceReader() = default;
SurfaceReader::SurfaceReader(SurfaceReader&&) noexcept = default;

void SurfaceReader::read(const Window& window, Plane<float>& albedo, Plane<std::uint16_t>& flags) {
    fit(albedo, window);
    fit(flags, window);
    albedo.fill(nan_value);
    flags.fill(quality::no_surface);
    const auto& surface = state_->run.surface;
    if (const auto* cover = std::get_if<CoverSurface>(&surface))
        state_->read_cover(*cover, window, albedo, flags);
    if (const auto* given = std::get_if<GivenSurface>(&surface))
        state_->read_given(*given, window, albedo, flags);
    if (const auto* image = std::get_if<ReflectanceSurface>(&surface)) {
        state_->image->read(window, albedo, flags);
        if (image->fill) state_->fill_from(*image->fill, window, albedo, flags);
    }
    if (state_->change) state_->change->albedo(window, albedo);
}

void SurfaceReader::uncertainty(const Window& window, const Plane<float>& albedo,
                                const Plane<std::uint16_t>& flags, Plane<float>& uncertainty) {
    auto& s = *state_;
    fit(uncertainty, window);
    uncertainty.fill(nan_value);
    const auto* image = std::get_if<ReflectanceSurface>(&s.run.surface);
    const auto* given = std::get_if<GivenSurface>(&s.run.surface);
    if (const auto* cover = std::get_if<CoverSurface>(&s.run.surface))
        s.reader->read_values(window, cover->albedo_uncertainty, uncertainty);
    if (image != nullptr && image->fill)
        s.reader->read_values(window, image->fill->albedo_uncertainty, uncertainty);
    if (given != nullptr && given->uncertainty)
        uncertainty.fill(static_cast<float>(*given->uncertainty));
    for (int r = 0; r < window.height; ++r) {
        const auto row = uncertainty.row(r);
        const auto a = albedo.row(r);
        const auto flag = flags.row(r);
        for (std::size_t i = 0; i < row.size(); ++i) {
            if (image != nullptr && (flag[i] & quality::source_mask) == quality::reflectance)
                row[i] = static_cast<float>(image->weights.fit_error);
            if (std::isnan(a[i])) row[i] = nan_value;
        }
    }
}

std::uint64_t SurfaceReader::infinities() const {
    return (state_->reader ? state_->reader->infinities() : 0) +
           (state_->image ? state_->image->infinities() : 0);
}

}  // namespace sunbudget
