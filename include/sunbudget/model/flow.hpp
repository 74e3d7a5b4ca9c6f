#pragma once

#include <cstdint>
#include <filesystem>
#include <map>
#include <memory>
#include <vector>

#include "sunbudget/base/plane.hpp"
#include "sunbudget/model/run.hpp"

namespace sunbudget {

/// The side of the blocks that all computing is cut into, on a fixed lattice of the grid.
inline constexpr int block_px = 256;

/// Takes the finished planes of a window.
class Sink {
  public:
    virtual ~Sink() = default;
    /// `layer` counts the run's layers; planes cover the window.
    virtual void put(std::size_t layer, std::size_t band, const Window& window,
                     const Plane<float>& plane) = 0;
    virtual void put(std::size_t layer, std::size_t band, const Window& window,
                     const Plane<std::uint16_t>& plane) = 0;
};

class Probe;
class SharedTerrain;
struct RaisedRun;

/// What all threads of a run share: tables of light and terrain, made as they are needed.
class SharedLight {
  public:
    /// `scratch_folder` takes the coarse levels of the elevation; they go with the object.
    SharedLight(const Run& run, int threads, const std::filesystem::path& scratch_folder);
    ~SharedLight();
    /// Nothing where no layer needs the sun.
    [[nodiscard]] LightField* field() const { return field_.get(); }
    /// Nothing where the run has no terrain.
    [[nodiscard]] SharedTerrain* terrain() const { return terrain_.get(); }
    /// The runs after each change of height.
    [[nodiscard]] const std::vector<std::unique_ptr<RaisedRun>>& raised() const { return raised_; }
    /// Nothing where the run has no longwave, or has its air by the pixel.
    [[nodiscard]] LongwaveField* longwave() const { return longwave_.get(); }

  private:
    std::unique_ptr<LightField> field_;
    std::unique_ptr<SharedTerrain> terrain_;
    std::vector<std::unique_ptr<RaisedRun>> raised_;
    std::unique_ptr<LongwaveField> longwave_;
};

/// One thread's way from inputs to finished planes.
class Flow {
  public:
    Flow(const Run& run, const SharedLight& light, int thread);
    ~Flow();
    Flow(Flow&&) noexcept;

    /// Computes every layer and band of a window that lies on the lattice of blocks.
    void compute(const Window& window, Sink& sink);

    /// From now on tells the probe what becomes of its pixel, where a window holds it; it must outlive the flow.
    void watch(Probe& probe);

    /// Pixels so far by the value of `quality`, whether or not that layer is wanted.
    [[nodiscard]] const std::map<std::uint16_t, std::uint64_t>& flags() const;
    /// Infinite numbers met in the inputs so far.
    [[nodiscard]] std::uint64_t infinities() const;

  private:
    struct State;
    std::unique_ptr<State> state_;
};

}  // namespace sunbudget
