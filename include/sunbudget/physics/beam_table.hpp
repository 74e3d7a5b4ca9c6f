#pragma once

#include <array>
#include <span>
#include <vector>

#include "sunbudget/physics/sky_view.hpp"

namespace sunbudget {

/// The sun's beam during one step of time, at one place.
struct SunStep {
    double azimuth_rad = 0;  ///< clockwise from true north
    /// Sine of its apparent elevation (with refraction: it meets a horizon) at the step's lowest and
    /// highest; in between it counts as rising evenly, so that shadow comes and goes within the step.
    double sine_low = 0;
    double sine_high = 0;
    /// Beam normal irradiance times the unit vector to the sun (east, north, up), times the step's
    /// length for sums: W m-2 or J m-2.
    std::array<double, 3> beam{};
    double hours = 0;
    /// The same of the sky light that comes from around the sun and is shaded with it.
    std::array<double, 3> around{};
};

/// Sines of the horizons' elevation from their tangents: what the suns are compared with.
/// nodata  NaN goes through
void horizon_sines(std::span<const float> tangent, std::span<float> sine) noexcept;

/// Beam of a pixel, hours in the sun and the light from around the sun, accumulated over directions:
/// rows of one length; without a row for the last it is left out. A plane that the sun only grazes may end a hair below 0: take max(0, sum) after the last direction.
struct BeamSums {
    std::span<float> beam;
    std::span<float> hours;
    std::span<float> around{};
};

/// The horizons of a row of pixels at the two directions that enclose some suns: sines of elevation.
struct HorizonPair {
    std::span<const float> before;
    std::span<const float> after;
};

/// Many suns between two neighbouring directions, for one output period: the beam vector and the hours
/// of all suns above a horizon, tabulated over the sine of the horizon's elevation for each half of
/// the sector, whose horizon is interpolated at the half's middle.
///
/// Why a sum of vectors is enough: the horizon is nowhere below the pixel's own plane, so a sun above
/// it stands in front of the plane, max(0, n.s) = n.s, and sum(n.s B) = n.sum(s B). Within a sector the
/// sun may be a quarter of the sector off the azimuth whose horizon it is compared with, so that a sun
/// just behind a plane counts with n.s down to -sin S sin(sector / 4) (-0.024 at 64 directions on a
/// vertical plane) and one just in front is missed as often: they cancel over the sector.
///
/// accuracy against suns taken one by one: that of the table's step, 1/256 in the sine (0.22 degrees
///          at the horizon), linear between
class BeamTable {
  public:
    static constexpr int bins = 256;

    /// Adds a sun; `share` in [0, 1) of the way from the direction before to the one after.
    void add(const SunStep& sun, double share);
    /// After the last sun, before the first look-up. No sun may follow.
    void finish();
    /// No sun was added: the table need not be looked up.
    [[nodiscard]] bool empty() const noexcept { return suns_ == 0; }

    [[nodiscard]] std::size_t bytes() const noexcept { return entries_.size() * sizeof(Entry); }

    /// Beam east, north, up; hours; from around the sun east, north, up; unused: one wide vector.
    struct alignas(32) Entry {
        std::array<float, 8> lane{};
    };
    /// bins + 1 entries of the first (0) or second (1) half.
    [[nodiscard]] const Entry* half(int which) const noexcept {
        return entries_.data() + static_cast<std::size_t>(which) * (bins + 1);
    }

  private:
    using Sum = std::array<double, 7>;
    std::vector<Sum>
        part_;  ///< suns that rise within the bins next to an entry, for that entry alone
    std::vector<Sum> whole_;  ///< suns that stand above an entry and all before it
    std::vector<Entry> entries_;
    int suns_ = 0;
};

/// Adds what a row of pixels gets from the suns of a sector, for several output periods at once.
///
/// shape   tables and sums of one length, one for each period; empty tables are passed over; rows of
///         one length
/// nodata  NaN in a horizon or a normal gives NaN
void add_beams(std::span<const BeamTable> tables, const HorizonPair& horizon,
               const NormalRow& normal, std::span<const BeamSums> sums) noexcept;

/// A sun `share` in [0, 1] of the way from the direction before to the one after.
struct PlacedSun {
    SunStep sun;
    double share = 0;
};

/// Adds what a row of pixels gets from suns taken one by one: for few suns, and with share 0 for one
/// along whose own azimuth the horizon was cast. Here max(0, n.s) is taken for each sun itself.
///
/// shape   rows of one length
/// nodata  NaN in a horizon or a normal gives NaN
/// accuracy that of single precision: 1e-6 of the beam
void add_suns(std::span<const PlacedSun> suns, const HorizonPair& horizon, const NormalRow& normal,
              const BeamSums& sums) noexcept;

}  // namespace sunbudget
