#pragma once

#include <array>
#include <functional>
#include <memory>
#include <optional>
#include <span>
#include <vector>

#include "sunbudget/model/sky_raster.hpp"
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
    double sunlit_h_a_day =
        0;  ///< hours with the sun up for each 24 h of the period; 24 or 0 at an instant
    double thrown_back_w_m2 = 0;  ///< what waits for the ground's albedo, see SkyMoment
    double thrown_back_twice_w_m2 = 0;

    /// Of the beam, on the horizontal.
    [[nodiscard]] double direct_w_m2() const { return beam_w_m2[2]; }
    static constexpr std::size_t values = 11;
};

/// The light of every band at one place, computed without any table: what LightField interpolates
/// and what the tests hold it to. Safe to call from several threads.
class PointLight {
  public:
    PointLight(const TimePlan& times, const Sky& sky);
    ~PointLight();
    PointLight(PointLight&&) noexcept;

    [[nodiscard]] std::size_t bands() const;
    [[nodiscard]] OpenLight at(std::size_t band, double latitude_rad, double longitude_rad,
                               double height_m) const;
    /// The share that one month (0: all of them) has in the band's light, under another sky.
    [[nodiscard]] OpenLight at(std::size_t band, int month, const Sky& sky, double latitude_rad,
                               double longitude_rad, double height_m) const;
    [[nodiscard]] const Sky& sky() const;
    /// The months that a band has days in, in order; 0 alone for an instant, whose month hangs on the place.
    [[nodiscard]] std::vector<int> months_of(std::size_t band) const;
    /// About how many suns the paths of some bands hold, anywhere on Earth: known without looking.
    [[nodiscard]] std::size_t most_suns(std::size_t first_band, std::size_t bands) const;
    /// The sun's way over the place in one band: what the shadows are worked out with. Beam, light from
    /// around the sun and hours (for each 24 h of the period) add up to those of at().
    [[nodiscard]] std::vector<SunStep> path(std::size_t band, double latitude_rad,
                                            double longitude_rad, double height_m) const;

  private:
    struct Work;
    std::unique_ptr<Work> work_;
};

/// The light of every band at every pixel of a grid, open ground. Within 1/256 W m-2 (and 1/256 h a day) of
/// PointLight at the pixel's own centre.
class LightField {
  public:
    enum class Part {
        beam_east,
        beam_north,
        beam_up,
        circumsolar_east,
        circumsolar_north,
        circumsolar_up,
        diffuse,
        horizon,
        sunlit_h_a_day,
        thrown_back,
        thrown_back_twice,
    };

    /// `constant_height_m` is set where no elevation raster is read. Without `vectors` only beam_up and
    /// diffuse are there to be asked for, at less cost. With `varied` one parameter of the sky comes from a
    /// raster, which outlives the field; `sky` has its mean.
    LightField(const TimePlan& times, const Sky& sky, const Grid& grid, int threads,
               std::optional<double> constant_height_m, bool vectors,
               const SkyRaster* varied = nullptr);
    ~LightField();

    /// One window's share.
    class Block {
      public:
        Block();
        ~Block();
        Block(Block&&) noexcept;
        Block& operator=(Block&&) noexcept;

        /// Calls visit(row of the window, values) for every row of the raster that the sky varies by.
        void each_sky_row(const std::function<void(int, std::span<const float>)>& visit) const;
        [[nodiscard]] const Window& window() const;

      private:
        friend class LightField;
        struct Parts;
        std::unique_ptr<Parts> parts_;
    };
    /// As SmoothField::prepare. NaN where the projection has no answer, or the sky's raster no value.
    [[nodiscard]] Block prepare(const Window& window, const Window& frame,
                                const Plane<float>& heights_m, int thread);
    /// A block is filled by one thread at a time.
    void fill(const Block& block, std::size_t band, Part part, const Plane<float>& heights_m,
              Plane<float>& out) const;
    /// Whether the part is there to be asked for.
    [[nodiscard]] bool has(Part part) const;

    [[nodiscard]] const PointLight& point() const;
    /// The calling thread's own.
    [[nodiscard]] const Locator& locator(int thread) const;

  private:
    struct Work;
    std::unique_ptr<Work> work_;
};

}  // namespace sunbudget
