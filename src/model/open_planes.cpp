#include "open_planes.hpp"

#include "flags.hpp"
#include "planes.hpp"
#include "sunbudget/physics/inclined_light.hpp"
#include "sunbudget/tables/quality.hpp"

namespace sunbudget {

void OpenPlanes::begin(Ground& ground) {
    ground_ = &ground;
    blocks_.clear();
    if (field_ == nullptr) return;
    for (const auto& block : ground.blocks) {
        blocks_.push_back(field_->prepare(block, ground.window, ground.heights_m, thread_));
        blocks_.back().each_sky_row([&](int r, std::span<const float> values) {
            flag_nan(values, over(ground.flags, ground.window, block, r), quality::no_sky, 0);
        });
    }
}

void OpenPlanes::fill(std::size_t block, std::size_t band, Part part, Plane<float>& plane) const {
    fit(plane, ground_->window);
    field_->fill(blocks_[block], band, part, ground_->heights_m, plane);
}

void OpenPlanes::fill_all(std::size_t block, std::size_t band) {
    for (std::size_t part = 0; part <= static_cast<std::size_t>(Part::sunlit_h_a_day); ++part)
        fill(block, band, static_cast<Part>(part), planes_[part]);
}

bool OpenPlanes::ground_lights_sky() const {
    return field_ != nullptr && field_->has(Part::thrown_back);
}

void OpenPlanes::fill_thrown_back(std::size_t block, std::size_t band) {
    for (const auto part : {Part::thrown_back, Part::thrown_back_twice})
        fill(block, band, part, plane(part));
}

void OpenPlanes::add_thrown_back(std::size_t block, Plane<float>& albedo_seen,
                                 Plane<float>& diffuse) {
    const auto& where = this->block(block);
    const auto& window = ground_->window;
    for (int r = 0; r < where.height; ++r)
        add_ground_and_sky(over(albedo_seen, window, where, r), row(Part::thrown_back, where, r),
                           row(Part::thrown_back_twice, where, r), over(diffuse, window, where, r));
}

std::span<float> OpenPlanes::row(Part part, const Window& window, int r) {
    return over(plane(part), ground_->window, window, r);
}

}  // namespace sunbudget
