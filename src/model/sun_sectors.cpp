#include "sunbudget/model/sun_sectors.hpp"

#include <cmath>
#include <numbers>

namespace sunbudget {

namespace {

/// Suns a sector and band below which taking them one by one costs less than a look-up in a table (twice
/// 0.26 against about 2 ns a pixel).
constexpr std::size_t list_up_to = 4;

/// An open level pixel for each band, taken through the kernels like any other.
struct FlatPixels {
    std::array<float, 1> zero{0}, one{1};
    std::vector<std::array<float, 1>> beam, hours, around;

    explicit FlatPixels(std::size_t bands) : beam(bands), hours(bands), around(bands) {}
    [[nodiscard]] HorizonPair horizon() const { return {zero, zero}; }
    [[nodiscard]] NormalRow normal() const { return {zero, zero, one}; }
    [[nodiscard]] std::vector<BeamSums> sums() {
        std::vector<BeamSums> all;
        for (std::size_t band = 0; band < beam.size(); ++band)
            all.push_back({beam[band], hours[band], around[band]});
        return all;
    }
    void take_over(std::vector<WholeSun>& whole) const {
        for (std::size_t band = 0; band < whole.size(); ++band) {
            whole[band].beam[2] = beam[band][0];
            whole[band].around[2] = around[band][0];
            whole[band].hours = hours[band][0];
        }
    }
};

/// Adds the level parts of a sun; the others come from the flat pixels.
void add_level(WholeSun& whole, const SunStep& sun) {
    for (std::size_t i = 0; i < 2; ++i) {
        whole.beam[i] += static_cast<float>(sun.beam[i]);
        whole.around[i] += static_cast<float>(sun.around[i]);
    }
}

}  // namespace

void SunSectors::Sector::add_to(const HorizonPair& horizon, const NormalRow& normal,
                                std::span<const BeamSums> sums) const noexcept {
    add_beams(tables, horizon, normal, sums);
    for (std::size_t band = 0; band < lists.size(); ++band)
        if (!lists[band].empty()) add_suns(lists[band], horizon, normal, sums[band]);
}

SunSectors::SunSectors(const PointLight& light, const Geodetic& place, double height_m,
                       std::size_t first_band, std::size_t bands, int directions)
    : sectors_(static_cast<std::size_t>(directions)), whole_(bands) {
    for (auto& sector : sectors_) {
        sector.tables.resize(bands);
        sector.lists.resize(bands);
    }
    for (std::size_t band = 0; band < bands; ++band)
        for (const auto& sun :
             light.path(first_band + band, place.latitude_rad, place.longitude_rad, height_m)) {
            const double turn = sun.azimuth_rad / (2 * std::numbers::pi) * directions;
            const double before = std::floor(turn);
            auto& sector = sectors_[static_cast<std::size_t>(before) % sectors_.size()];
            sector.lists[band].push_back({sun, turn - before});
            sector.empty = false;
            add_level(whole_[band], sun);
        }
    FlatPixels flat(bands);
    const auto sums = flat.sums();
    for (auto& sector : sectors_) {
        for (std::size_t band = 0; band < bands; ++band) {
            if (sector.lists[band].size() > list_up_to) {
                for (const auto& placed : sector.lists[band])
                    sector.tables[band].add(placed.sun, placed.share);
                std::vector<PlacedSun>().swap(sector.lists[band]);  // = {} would keep the memory
            }
            sector.tables[band].finish();
        }
        if (!sector.empty) sector.add_to(flat.horizon(), flat.normal(), sums);
    }
    flat.take_over(whole_);
}

std::size_t SunSectors::bytes() const {
    std::size_t bytes = sizeof *this;
    for (const auto& sector : sectors_) {
        bytes += sizeof sector + sector.tables.size() * sizeof(BeamTable) +
                 sector.lists.size() * sizeof(std::vector<PlacedSun>);
        for (const auto& table : sector.tables) bytes += table.bytes();
        for (const auto& list : sector.lists) bytes += list.capacity() * sizeof(PlacedSun);
    }
    return bytes;
}

FewSuns few_suns(const PointLight& light, const Geodetic& place, double height_m,
                 std::size_t first_band, std::size_t bands) {
    FewSuns found;
    found.whole.resize(bands);
    FlatPixels flat(bands);
    const auto sums = flat.sums();
    for (std::size_t band = 0; band < bands; ++band)
        for (const auto& sun :
             light.path(first_band + band, place.latitude_rad, place.longitude_rad, height_m)) {
            found.suns.push_back({band, {sun, 0}});
            add_level(found.whole[band], sun);
            add_suns({&found.suns.back().placed, 1}, flat.horizon(), flat.normal(), sums[band]);
        }
    flat.take_over(found.whole);
    return found;
}

}  // namespace sunbudget
