#include "sunbudget/model/surface.hpp"

#include <algorithm>
#include <cmath>
#include <limits>
#include <optional>

#include "sunbudget/tables/quality.hpp"

namespace sunbudget {

namespace {

constexpr float nan_value = std::numeric_limits<float>::quiet_NaN();

template <typename T>
void resize(Plane<T>& plane, const Window& window) {
    if (plane.width() != window.width || plane.height() != window.height)
        plane = Plane<T>(window.width, window.height);
}

}  // namespace

struct SurfaceReader::State {
    const Run& run;
    std::optional<Reader> reader;
    Plane<std::int32_t> codes;

    explicit State(const Run& r) : run(r) {
        if (const auto* cover = std::get_if<CoverSurface>(&run.surface)) reader.emplace(cover->codes);
        if (const auto* given = std::get_if<GivenSurface>(&run.surface))
            if (const auto* raster = std::get_if<Source>(&given->albedo)) reader.emplace(*raster);
    }

    void read_cover(const CoverSurface& cover, const Window& window, Plane<float>& albedo, Plane<std::uint16_t>& flags);
    void read_given(const GivenSurface& given, const Window& window, Plane<float>& albedo, Plane<std::uint16_t>& flags);
};

void SurfaceReader::State::read_cover(const CoverSurface& cover, const Window& window, Plane<float>& albedo,
                                      Plane<std::uint16_t>& flags) {
    if (cover.averaged) {
        reader->read_values(window, cover.albedo, albedo);
        for (int r = 0; r < window.height; ++r)
            std::transform(albedo.row(r).begin(), albedo.row(r).end(), flags.row(r).begin(), [](float a) {
                return std::isnan(a) ? quality::no_surface : quality::class_table;
            });
        return;
    }
    reader->read_codes(window, codes);
    for (int r = 0; r < window.height; ++r) {
        const auto code = codes.row(r);
        const auto a = albedo.row(r);
        const auto flag = flags.row(r);
        for (std::size_t i = 0; i < code.size(); ++i) {
            a[i] = cover.albedo.of(code[i]);
            const float source = cover.quality.of(code[i]);
            flag[i] = std::isnan(source) ? quality::no_surface : static_cast<std::uint16_t>(source);
        }
    }
}

void SurfaceReader::State::read_given(const GivenSurface& given, const Window& window, Plane<float>& albedo,
                                      Plane<std::uint16_t>& flags) {
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

SurfaceReader::SurfaceReader(const Run& run) : state_(std::make_unique<State>(run)) {}
SurfaceReader::~SurfaceReader() = default;
SurfaceReader::SurfaceReader(SurfaceReader&&) noexcept = default;

void SurfaceReader::read(const Window& window, Plane<float>& albedo, Plane<std::uint16_t>& flags) {
    resize(albedo, window);
    resize(flags, window);
    albedo.fill(nan_value);
    flags.fill(quality::no_surface);
    const auto& surface = state_->run.surface;
    if (const auto* cover = std::get_if<CoverSurface>(&surface)) state_->read_cover(*cover, window, albedo, flags);
    if (const auto* given = std::get_if<GivenSurface>(&surface)) state_->read_given(*given, window, albedo, flags);
}

std::uint64_t SurfaceReader::infinities() const { return state_->reader ? state_->reader->infinities() : 0; }

}  // namespace sunbudget
