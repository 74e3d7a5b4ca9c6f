#pragma once

#include <cstddef>
#include <optional>

#include "beside.hpp"
#include "ground.hpp"
#include "needs.hpp"
#include "open_planes.hpp"
#include "sunbudget/model/probe.hpp"

namespace sunbudget {

/// What the flow tells a probe of its pixel. Without one nothing is said.
class FlowNotes {
  public:
    void watch(Probe& probe) { probe_ = &probe; }

    /// Once the flags are whole.
    void ground(const Run& run, const Needs& needs, const Ground& ground) const;
    /// Open ground's light over one block of the lattice.
    void open(const OpenPlanes& open, const Window& block, const Window& window,
              std::size_t band) const;
    /// `band` counts those of the part.
    void shaded(const ShadedBlock& part, std::size_t band, bool suns) const;
    /// `index` is nothing where no raster tells of clouds.
    void light(const Run& run, const Window& window, std::size_t band, const BandPlanes& planes,
               const Plane<float>* index) const;
    void heat(const Run& run, const Window& window, std::size_t band, const HeatFlow& flow,
              const HeatPlanes& found, const Plane<float>& net_light) const;

  private:
    struct Words {
        const char *name, *unit, *text;
    };
    [[nodiscard]] bool listens(const Window& window) const {
        return probe_ != nullptr && probe_->inside(window);
    }
    /// Planes that were not asked for say nothing.
    template <class Value>
    void note(const Plane<Value>& plane, const Window& frame, std::optional<std::size_t> band,
              const Words& words) const {
        if (plane.empty() || !listens(frame)) return;
        note(static_cast<double>(probe_->of(plane, frame)), band, words);
    }
    void note(double value, std::optional<std::size_t> band, const Words& words) const {
        probe_->note({band, words.name, words.unit, words.text, value});
    }

    Probe* probe_ = nullptr;
};

}  // namespace sunbudget
