#pragma once

#include <cstdint>
#include <memory>

#include "sunbudget/base/plane.hpp"
#include "sunbudget/model/run.hpp"

namespace sunbudget {

/// One thread's way from the run's surface inputs to albedo and to the flags that say where it came from.
class SurfaceReader {
  public:
    explicit SurfaceReader(const Run& run);
    ~SurfaceReader();
    SurfaceReader(SurfaceReader&&) noexcept;

    /// Albedo (NaN where there is none) and flags (tables/quality.hpp) of a window of the grid's lattice;
    /// both become as large as the window. A run without a surface gets NaN and quality::no_surface.
    void read(const Window& window, Plane<float>& albedo, Plane<std::uint16_t>& flags);

    /// Standard uncertainty of the albedo that `read` gave for the window, with its flags: NaN where there is no
    /// albedo or nobody knows. Classes that are averaged are taken to err alike.
    void uncertainty(const Window& window, const Plane<float>& albedo,
                     const Plane<std::uint16_t>& flags, Plane<float>& uncertainty);

    /// Infinite numbers met in the inputs so far.
    [[nodiscard]] std::uint64_t infinities() const;

  private:
    struct State;
    std::unique_ptr<State> state_;
};

}  // namespace sunbudget
