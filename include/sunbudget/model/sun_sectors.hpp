#pragma once

#include <array>
#include <span>
#include <vector>

#include "sunbudget/model/light.hpp"
#include "sunbudget/physics/beam_table.hpp"

namespace sunbudget {

/// What a band's suns give in all where nothing stands before them, over the place they were sorted for.
struct WholeSun {
    /// Sums of irradiance times direction (east, north, up), of the beam and of the light around the sun.
    /// The parts upward, and the hours, are added up as the shaded sums are: equal to the bit on open
    /// level ground.
    std::array<float, 3> beam{}, around{};
    float hours = 0;
};

/// The suns of some bands over one place, sorted by the direction their shadows are looked for in.
class SunSectors {
  public:
    /// The suns between two neighbouring directions: for each band a table or, where that is cheaper, suns
    /// one by one.
    struct Sector {
        std::vector<BeamTable> tables;
        std::vector<std::vector<PlacedSun>> lists;
        bool empty = true;

        /// shape   sums by band
        void add_to(const HorizonPair& horizon, const NormalRow& normal,
                    std::span<const BeamSums> sums) const noexcept;
    };

    /// Bands from first_band on, around a circle of `directions` azimuths; the first is north.
    SunSectors(const PointLight& light, const Geodetic& place, double height_m,
               std::size_t first_band, std::size_t bands, int directions);

    [[nodiscard]] const Sector& after(int direction) const {
        return sectors_[static_cast<std::size_t>(direction)];
    }
    /// About what it takes in memory.
    [[nodiscard]] std::size_t bytes() const;
    [[nodiscard]] const std::vector<WholeSun>& whole() const { return whole_; }

  private:
    std::vector<Sector> sectors_;
    std::vector<WholeSun> whole_;
};

/// Few suns, each with the azimuth it stands in: shadows are looked for along that.
struct OwnSun {
    std::size_t band = 0;
    PlacedSun placed;
};

/// The suns of the bands one by one: for an instant, or where there are fewer suns than directions.
struct FewSuns {
    std::vector<OwnSun> suns;
    std::vector<WholeSun> whole;  ///< by band
};
[[nodiscard]] FewSuns few_suns(const PointLight& light, const Geodetic& place, double height_m,
                               std::size_t first_band, std::size_t bands);

}  // namespace sunbudget
