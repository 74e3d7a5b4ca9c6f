#pragma once

#include <cstdint>
#include <span>
#include <vector>

#include "sunbudget/base/plane.hpp"
#include "sunbudget/model/run.hpp"
#include "sunbudget/physics/broadband.hpp"

namespace sunbudget {

/// One thread's way from an image to albedo and flags; where the image gives none, both are left as
/// `quality::no_surface` with the reasons beside it.
class ReflectanceReader {
  public:
    explicit ReflectanceReader(const ReflectanceSurface& surface);

    /// shape  albedo and flags have the window's size; flags are 0 before
    void read(const Window& window, Plane<float>& albedo, Plane<std::uint16_t>& flags);
    [[nodiscard]] std::uint64_t infinities() const;

  private:
    void read_planes(const Window& window);
    void convert_row(int row, std::span<float> albedo, std::span<std::uint16_t> flags);

    const ReflectanceSurface& surface_;
    std::vector<Reader> bands_;
    std::vector<Reader> quality_;
    std::vector<Plane<float>> reflectance_;
    std::vector<Plane<std::int32_t>> codes_;
    std::vector<WeightedBand> weighted_;
    std::vector<RejectReason> reasons_;
};

}  // namespace sunbudget
