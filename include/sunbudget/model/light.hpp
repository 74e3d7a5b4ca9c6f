#pragma once

#include <array>
#include <functional>
#include <memory>
#include <optional>

#include "sunbudget/base/plane.hpp"
#include "sunbudget/model/smooth_field.hpp"
#include "sunbudget/model/time_plan.hpp"
#include "sunbudget/raster/grid.hpp"

namespace sunbudget {

/// The sky of a run.
struct Sky {
    std::array<double, 12> turbidity{3, 3, 3, 3, 3, 3, 3, 3, 3, 3, 3, 3};  ///< Linke, by month

    [[nodiscard]] double turbidity_of(int month) const { return turbidity[static_cast<std::size_t>(month - 1)]; }
};

/// Light on flat open ground: of an instant, or the mean over a period, night included.
struct FlatLight {
    double direct_w_m2 = 0;   ///< of the beam, on the horizontal
    double diffuse_w_m2 = 0;
};

/// The light of every band at one place, computed without any table: what LightField interpolates
/// and what the tests hold it to.
class PointLight {
  public:
    PointLight(const TimePlan& times, const Sky& sky);
    ~PointLight();
    PointLight(PointLight&&) noexcept;

    [[nodiscard]] std::size_t bands() const;
    /// Light of one band. Safe to call from several threads.
    [[nodiscard]] FlatLight at(std::size_t band, double latitude_rad, double longitude_rad,
                               double height_m) const;

  private:
    struct Work;
    std::unique_ptr<Work> work_;
};

/// The light of every band at every pixel of a grid, ground taken as flat and open; height counts
/// through the pressure alone. Within 1/256 W m-2 of PointLight at the pixel's own centre.
class LightField {
  public:
    /// `constant_height_m` is set where no elevation raster is read.
    LightField(const TimePlan& times, const Sky& sky, const Grid& grid, int threads,
               std::optional<double> constant_height_m);
    ~LightField();

    using Block = SmoothField::Block;
    /// As SmoothField::prepare. NaN where the projection has no answer.
    [[nodiscard]] Block prepare(const Window& window, const Window& frame, const Plane<float>& heights_m,
                                int thread);
    static void fill_direct(const Block& block, std::size_t band, const Plane<float>& heights_m,
                            Plane<float>& out) {
        block.fill(2 * band, heights_m, out);
    }
    static void fill_diffuse(const Block& block, std::size_t band, const Plane<float>& heights_m,
                             Plane<float>& out) {
        block.fill(2 * band + 1, heights_m, out);
    }

  private:
    struct Work;
    std::unique_ptr<Work> work_;
};

}  // namespace sunbudget
