#pragma once

#include <span>
#include <vector>

#include "sunbudget/model/light.hpp"
#include "sunbudget/physics/beam_table.hpp"

namespace sunbudget {

/// Two kinds of light come with the sun and are shaded with it: the beam, and the sky's light around it.
inline constexpr std::size_t sun_kinds = 2;

/// What a band's suns give in all where nothing stands before them: east, north and up parts of
/// irradiance times direction, and hours a day.
struct WholeSun {
    float east = 0, north = 0;
    float up = 0, hours = 0;  ///< added up as the shaded sums are: equal to the bit on open level ground
};

/// The suns of some bands over one place, sorted by the direction their shadows are looked for in.
/// Accumulators go by band and kind: index = sun_kinds * band + kind (0 beam, 1 circumsolar).
class SunSectors {
  public:
    /// The suns between two neighbouring directions. For every accumulator a table or, where that is
    /// cheaper, suns one by one.
    struct Sector {
        std::vector<BeamTable> tables;
        std::vector<std::vector<PlacedSun>> lists;
        bool empty = true;

        void add_to(const HorizonPair& horizon, const NormalRow& normal, std::span<const BeamSums> sums) const noexcept;
    };

    /// Bands from first_band on, around a circle of `directions` azimuths; the first is north.
    SunSectors(const PointLight& light, const Geodetic& place, double height_m, std::size_t first_band,
               std::size_t bands, int directions);

    [[nodiscard]] const Sector& after(int direction) const { return sectors_[static_cast<std::size_t>(direction)]; }
    [[nodiscard]] const WholeSun& whole(std::size_t accumulator) const { return whole_[accumulator]; }

  private:
    std::vector<Sector> sectors_;
    std::vector<WholeSun> whole_;
};

/// Few suns, each with the azimuth it stands in: shadows are looked for along that.
struct OwnSun {
    double azimuth_rad = 0;
    std::size_t band = 0;
    PlacedSun beam, circumsolar;
};

/// The suns of the bands one by one: for an instant, or where there are fewer suns than directions.
struct FewSuns {
    std::vector<OwnSun> suns;
    std::vector<WholeSun> whole;  ///< by accumulator
};
[[nodiscard]] FewSuns few_suns(const PointLight& light, const Geodetic& place, double height_m, std::size_t first_band,
                               std::size_t bands);

}  // namespace sunbudget
