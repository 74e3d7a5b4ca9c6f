#include "sunbudget/model/sun_sectors.hpp"

#include <array>
#include <cmath>
#include <numbers>

namespace sunbudget {

namespace {

/// Suns a sector and band below which taking them one by one costs less than two look-ups in a table
/// (0.26 against 1.5 ns a pixel).
constexpr std::size_t list_up_to = 5;

/// An open level pixel, taken through the kernels like any other.
struct FlatPixel {
    std::array<float, 1> zero{0}, one{1};
    std::vector<std::array<float, 1>> light, hours;

    explicit FlatPixel(std::size_t accumulators) : light(accumulators), hours(accumulators) {}
    [[nodiscard]] HorizonPair horizon() const { return {zero, zero}; }
    [[nodiscard]] NormalRow normal() const { return {zero, zero, one}; }
    [[nodiscard]] std::vector<BeamSums> sums() {
        std::vector<BeamSums> all;
        for (std::size_t i = 0; i < light.size(); ++i) all.push_back({light[i], hours[i]});
        return all;
    }
};

/// Adds the level parts of all suns, and takes the others from the flat pixel.
void add_level(WholeSun& whole, const SunStep& sun) {
    whole.east += static_cast<float>(sun.beam[0]);
    whole.north += static_cast<float>(sun.beam[1]);
}

void take_flat(std::vector<WholeSun>& whole, const FlatPixel& flat) {
    for (std::size_t i = 0; i < whole.size(); ++i) {
        whole[i].up = flat.light[i][0];
        whole[i].hours = flat.hours[i][0];
    }
}

}  // namespace

void SunSectors::Sector::add_to(const HorizonPair& horizon, const NormalRow& normal,
                                std::span<const BeamSums> sums) const noexcept {
    add_beams(tables, horizon, normal, sums);
    for (std::size_t i = 0; i < lists.size(); ++i)
        if (!lists[i].empty()) add_suns(lists[i], horizon, normal, sums[i]);
}

SunSectors::SunSectors(const PointLight& light, const Geodetic& place, double height_m, std::size_t first_band,
                       std::size_t bands, int directions)
    : sectors_(static_cast<std::size_t>(directions)), whole_(sun_kinds * bands) {
    for (auto& sector : sectors_) {
        sector.tables.resize(sun_kinds * bands);
        sector.lists.resize(sun_kinds * bands);
    }
    for (std::size_t band = 0; band < bands; ++band) {
        const auto path = light.path(first_band + band, place.latitude_rad, place.longitude_rad, height_m);
        for (std::size_t kind = 0; kind < sun_kinds; ++kind)
            for (const auto& sun : kind == 0 ? path.beam : path.circumsolar) {
                const double turn = sun.azimuth_rad / (2 * std::numbers::pi) * directions;
                const double before = std::floor(turn);
                auto& sector = sectors_[static_cast<std::size_t>(before) % sectors_.size()];
                sector.lists[sun_kinds * band + kind].push_back({sun, turn - before});
                sector.empty = false;
                add_level(whole_[sun_kinds * band + kind], sun);
            }
    }
    FlatPixel flat(whole_.size());
    const auto sums = flat.sums();
    for (auto& sector : sectors_) {
        for (std::size_t i = 0; i < sector.lists.size(); ++i) {
            if (sector.lists[i].size() > list_up_to) {
                for (const auto& placed : sector.lists[i]) sector.tables[i].add(placed.sun, placed.share);
                sector.lists[i] = {};
            }
            sector.tables[i].finish();
        }
        if (!sector.empty) sector.add_to(flat.horizon(), flat.normal(), sums);
    }
    take_flat(whole_, flat);
}

FewSuns few_suns(const PointLight& light, const Geodetic& place, double height_m, std::size_t first_band,
                 std::size_t bands) {
    FewSuns found;
    found.whole.resize(sun_kinds * bands);
    for (std::size_t band = 0; band < bands; ++band) {
        const auto path = light.path(first_band + band, place.latitude_rad, place.longitude_rad, height_m);
        for (std::size_t i = 0; i < path.beam.size(); ++i) {
            found.suns.push_back({path.beam[i].azimuth_rad, band, {path.beam[i], 0}, {path.circumsolar[i], 0}});
            add_level(found.whole[sun_kinds * band], path.beam[i]);
            add_level(found.whole[sun_kinds * band + 1], path.circumsolar[i]);
        }
    }
    FlatPixel flat(found.whole.size());
    const auto sums = flat.sums();
    for (const auto& sun : found.suns) {
        add_suns({&sun.beam, 1}, flat.horizon(), flat.normal(), sums[sun_kinds * sun.band]);
        add_suns({&sun.circumsolar, 1}, flat.horizon(), flat.normal(), sums[sun_kinds * sun.band + 1]);
    }
    take_flat(found.whole, flat);
    return found;
}

}  // namespace sunbudget
