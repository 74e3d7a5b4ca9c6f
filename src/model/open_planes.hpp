#pragma once

#include <array>
#include <vector>

#include "ground.hpp"
#include "sunbudget/model/light.hpp"

namespace sunbudget {

/// One thread's light on open ground: planes over a window, filled one block of the lattice and one band
/// at a time.
class OpenPlanes {
  public:
    using Part = LightField::Part;
    /// `field` is nothing where no layer needs the sun.
    OpenPlanes(LightField* field, int thread) : field_(field), thread_(thread) {}

    /// A window's share of the field; flags what the sky's raster leaves out. The ground stays as it is meanwhile.
    void begin(Ground& ground);
    /// Blocks of the window.
    [[nodiscard]] std::size_t blocks() const { return blocks_.size(); }
    [[nodiscard]] const Window& block(std::size_t block) const { return blocks_[block].window(); }

    /// One part into any plane over the window.
    void fill(std::size_t block, std::size_t band, Part part, Plane<float>& plane) const;
    /// All but what is thrown back, into the planes here.
    void fill_all(std::size_t block, std::size_t band);

    /// Whether sky light waits for the albedo of the ground.
    [[nodiscard]] bool ground_lights_sky() const;
    /// Then: what goes to and fro between ground and sky, into the planes here, ...
    void fill_thrown_back(std::size_t block, std::size_t band);
    /// ... and on to a plane of sky light, by the albedo that is seen.
    void add_thrown_back(std::size_t block, Plane<float>& albedo_seen, Plane<float>& diffuse);

    [[nodiscard]] Plane<float>& plane(Part part) { return planes_[static_cast<std::size_t>(part)]; }
    [[nodiscard]] const Plane<float>& plane(Part part) const {
        return planes_[static_cast<std::size_t>(part)];
    }
    /// The row of a part that lies over a window inside.
    [[nodiscard]] std::span<float> row(Part part, const Window& window, int r);

  private:
    LightField* field_;
    int thread_;
    const Ground* ground_ = nullptr;
    std::vector<LightField::Block> blocks_;
    std::array<Plane<float>, OpenLight::values> planes_;
};

}  // namespace sunbudget
