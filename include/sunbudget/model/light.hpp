#pragma once

#include <array>
#include <memory>
#include <optional>
#include <vector>

#include "sunbudget/model/sky.hpp"
#include "sunbudget/model/smooth_field.hpp"
#include "sunbudget/model/time_plan.hpp"
#include "sunbudget/physics/beam_table.hpp"
#include "sunbudget/raster/grid.hpp"
#include "sunbudget/raster/locator.hpp"

namespace sunbudget {

/// Light on open ground: of an instant, or the mean over a period, night included. Vectors are sums of
/// irradiance normal to the sun times the unit vector to the sun (east, north, up): their product with
/// a plane's normal is the light on the plane, as long as no sun stands behind it.
struct OpenLight {
    std::array<double, 3> beam_w_m2{};
    std::array<double, 3> circumsolar_w_m2{};  ///< sky light that comes with the sun
    double diffuse_w_m2 = 0;                   ///< all sky light, on the horizontal
    double horizon_w_m2 = 0;                   ///< sky light from the rim of the sky, see SkyParts
    double sunlit_h_a_day = 0;                 ///< hours with the sun up for each 24 h of the period; 24 or 0 at an instant

    /// Of the beam, on the horizontal.
    [[nodiscard]] double direct_w_m2() const { return beam_w_m2[2]; }
    static constexpr std::size_t values = 9;
};

/// The light of every band at one place, computed without any table: what LightField interpolates
/// and what the tests hold it to. Safe to call from several threads.
class PointLight {
  public:
    PointLight(const TimePlan& times, const Sky& sky);
    ~PointLight();
    PointLight(PointLight&&) noexcept;

    [[nodiscard]] std::size_t bands() const;
    [[nodiscard]] OpenLight at(std::size_t band, double latitude_rad, double longitude_rad, double height_m) const;
    /// About how many suns the paths of some bands hold, anywhere on Earth: known without looking.
    [[nodiscard]] std::size_t most_suns(std::size_t first_band, std::size_t bands) const;
    /// The sun's way over the place in one band: what the shadows are worked out with. Beam, light from
    /// around the sun and hours (for each 24 h of the period) add up to those of at().
    [[nodiscard]] std::vector<SunStep> path(std::size_t band, double latitude_rad, double longitude_rad,
                                            double height_m) const;

  private:
    struct Work;
    std::unique_ptr<Work> work_;
};

/// The light of every band at every pixel of a grid, open ground. Within 1/256 W m-2 (and 1/256 h a day) of
/// PointLight at the pixel's own centre.
class LightField {
  public:
    enum class Part {
        beam_east, beam_north, beam_up,
        circumsolar_east, circumsolar_north, circumsolar_up,
        diffuse, horizon, sunlit_h_a_day,
    };

    /// `constant_height_m` is set where no elevation raster is read. Without `vectors` only beam_up and
    /// diffuse are there to be asked for, at less cost.
    LightField(const TimePlan& times, const Sky& sky, const Grid& grid, int threads,
               std::optional<double> constant_height_m, bool vectors);
    ~LightField();

    using Block = SmoothField::Block;
    /// As SmoothField::prepare. NaN where the projection has no answer.
    [[nodiscard]] Block prepare(const Window& window, const Window& frame, const Plane<float>& heights_m, int thread);
    void fill(const Block& block, std::size_t band, Part part, const Plane<float>& heights_m, Plane<float>& out) const;

    [[nodiscard]] const PointLight& point() const;
    /// The calling thread's own.
    [[nodiscard]] const Locator& locator(int thread) const;

  private:
    struct Work;
    std::unique_ptr<Work> work_;
};

}  // namespace sunbudget
