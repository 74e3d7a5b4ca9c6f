#pragma once

#include <cstddef>
#include <vector>

#include "sunbudget/base/plane.hpp"
#include "sunbudget/model/run.hpp"

namespace sunbudget {

/// One thread's clouds where rasters tell of them: a clear-sky index for each pixel and band held.
class CloudIndex {
  public:
    explicit CloudIndex(const Run& run);

    /// No raster tells of clouds.
    [[nodiscard]] bool empty() const { return readers_.empty(); }
    /// Reads some bands of a window. A share of the sky that is none has no value.
    void read(const Window& window, std::size_t first_band, std::size_t bands);
    /// `held` counts the bands read last.
    [[nodiscard]] const Plane<float>& of(std::size_t held) const { return index_[held]; }

  private:
    [[nodiscard]] double index_of(double value, std::size_t band) const;

    const Run& run_;
    std::vector<Reader> readers_;
    std::vector<Plane<float>> index_;
};

}  // namespace sunbudget
