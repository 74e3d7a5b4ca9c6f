#include "sunbudget/model/shading.hpp"

#include <algorithm>
#include <array>
#include <cmath>
#include <numbers>

#include "sunbudget/model/probe.hpp"
#include "sunbudget/physics/gradient.hpp"
#include "sunbudget/physics/horizon.hpp"
#include "sunbudget/physics/sky_view.hpp"

namespace sunbudget {

namespace {

/// Suns are sorted once for a square of this size: over half of it, 0.1 degrees of the sun's height, the
/// light itself is corrected to the pixel's own place.
constexpr double region_m = 20000;
/// Sorted suns that are kept: regions are visited one after the other, and twelve monthly tables of one
/// take 8 MB.
constexpr std::size_t sectors_kept_bytes = std::size_t{48} << 20;

double side_m(const PixelMatrix& matrix) {
    return std::max(length_of_m(matrix, 1, 0), length_of_m(matrix, 0, 1));
}

PixelMatrix between(const PixelMatrix& a, const PixelMatrix& b, double share) {
    const auto mix = [share](double x, double y) { return x + share * (y - x); };
    return {mix(a.east_per_column, b.east_per_column), mix(a.east_per_row, b.east_per_row),
            mix(a.north_per_column, b.north_per_column), mix(a.north_per_row, b.north_per_row)};
}

/// The matrices at a block's corner pixels and middle.
struct Frame {
    std::array<PixelMatrix, 4> corner;  ///< upper left, upper right, lower left, lower right
    PixelMatrix middle;
    Geodetic place;

    [[nodiscard]] PixelMatrix left(double share) const {
        return between(corner[0], corner[2], share);
    }
    [[nodiscard]] PixelMatrix right(double share) const {
        return between(corner[1], corner[3], share);
    }
};

std::optional<Frame> frame_of(const Window& block, const Locator& locator) {
    const double left = static_cast<double>(block.column) + 0.5,
                 top = static_cast<double>(block.row) + 0.5;
    const double right = left + block.width - 1, bottom = top + block.height - 1;
    const std::array corners{locator.matrix(left, top), locator.matrix(right, top),
                             locator.matrix(left, bottom), locator.matrix(right, bottom)};
    const auto middle = locator.matrix((left + right) / 2, (top + bottom) / 2);
    const auto place = locator.at((left + right) / 2, (top + bottom) / 2);
    if (!middle || !place) return std::nullopt;
    Frame frame{{}, *middle, *place};
    // Where the globe's edge cuts a corner off, the middle's matrix serves there.
    for (std::size_t i = 0; i < 4; ++i) frame.corner[i] = corners[i].value_or(*middle);
    return frame;
}

/// Mean height of pixels spread evenly over the grid; 0 where none of them has one.
double mean_height_m(const Terrain& terrain, const Grid& grid) {
    constexpr long samples = 16;
    ElevationReader reader(terrain);
    Plane<float> height_m;
    double sum = 0, count = 0;
    for (long r = 0; r < samples; ++r)
        for (long c = 0; c < samples; ++c) {
            reader.read({(2 * c + 1) * grid.width / (2 * samples),
                         (2 * r + 1) * grid.height / (2 * samples), 1, 1},
                        height_m);
            if (std::isnan(height_m.at(0, 0))) continue;
            sum += static_cast<double>(height_m.at(0, 0));
            ++count;
        }
    return count > 0 ? sum / count : 0;
}

}  // namespace

SharedTerrain::SharedTerrain(const Terrain& terrain, const Grid& grid,
                             const std::filesystem::path& scratch_folder)
    : terrain_(terrain), grid_(grid), middle_height_m_(mean_height_m(terrain, grid)) {
    const Locator locator(grid);
    double step_m = 1e30, cell_m = 0;
    // The finest cells of the grid decide how many levels the reach takes.
    for (const double u : {0.02, 0.5, 0.98})
        for (const double v : {0.02, 0.5, 0.98})
            if (const auto matrix = locator.matrix(u * grid.width, v * grid.height)) {
                step_m = std::min({step_m, length_of_m(*matrix, 1, 0), length_of_m(*matrix, 0, 1)});
                cell_m = std::max(cell_m, side_m(*matrix));
            }
    if (cell_m == 0) step_m = cell_m = terrain.sight.reach_m;
    while (region_px_ < 4096 && static_cast<double>(region_px_) * 2 * cell_m <= region_m)
        region_px_ *= 2;
    const int levels = std::min(levels_for(step_m, terrain.sight), HeightLevels::most_levels);
    levels_ = std::make_unique<HeightLevels>(terrain.elevation, grid, levels, step_m, terrain.sight,
                                             scratch_folder);
}
SharedTerrain::~SharedTerrain() = default;

std::shared_ptr<const SunSectors> SharedTerrain::sectors(const Window& block,
                                                         std::size_t first_band, std::size_t bands,
                                                         const LightField& light, int thread) {
    const Key key{block.column / region_px_, block.row / region_px_, first_band};
    std::shared_ptr<Entry> entry;
    {
        const std::lock_guard hold(mutex_);
        auto& found = regions_[key];
        if (!found) {
            found = std::make_shared<Entry>();
            oldest_first_.push_back(key);
        }
        entry = found;
    }
    std::call_once(entry->once, [&] {
        const long column =
            std::min(key.column * region_px_ + region_px_ / 2, static_cast<long>(grid_.width - 1));
        const long row =
            std::min(key.row * region_px_ + region_px_ / 2, static_cast<long>(grid_.height - 1));
        // A region in the middle of which the projection has no place takes the block's own.
        const auto middle = light.locator(thread).at(static_cast<double>(column) + 0.5,
                                                     static_cast<double>(row) + 0.5);
        const auto place =
            middle ? middle
                   : light.locator(thread).at(static_cast<double>(block.column) + block.width / 2.0,
                                              static_cast<double>(block.row) + block.height / 2.0);
        entry->sectors = std::make_shared<const SunSectors>(light.point(), *place, middle_height_m_,
                                                            first_band, bands, terrain_.directions);
        make_room(key, *entry);
    });
    return entry->sectors;
}

/// Makes room for a new entry's suns. Whoever works with forgotten ones still holds them.
void SharedTerrain::make_room(const Key& key, Entry& added) {
    const std::lock_guard hold(mutex_);
    if (const auto found = regions_.find(key);
        found == regions_.end() || found->second.get() != &added)
        return;
    added.bytes = added.sectors->bytes();
    for (kept_bytes_ += added.bytes;
         kept_bytes_ > sectors_kept_bytes && oldest_first_.size() > 1;) {
        const auto oldest = regions_.find(oldest_first_.front());
        kept_bytes_ -= oldest->second->bytes;
        regions_.erase(oldest);
        oldest_first_.pop_front();
    }
}

struct BlockShader::State {
    SharedTerrain& shared;
    const LightField* light;
    const Locator& locator;
    int thread;
    ElevationReader elevation;
    std::optional<ElevationReader> slopes;

    HeightPatch patch;
    std::vector<LevelPatch> levels;
    Plane<float> per_column, per_row;  ///< pixel-space slopes of the planes
    Plane<float> rise, before, after, first;
    Probe* probe = nullptr;

    State(SharedTerrain& s, const LightField* l, const Locator& where, int t)
        : shared(s), light(l), locator(where), thread(t), elevation(s.terrain()) {
        if (const auto* other = std::get_if<std::vector<Source>>(&s.terrain().slope_from))
            slopes.emplace(*other);
    }

    void read_ground(const Window& block);
    void read_slopes(const Window& block);
    void normals(const Frame& frame, ShadedBlock& out) const;
    void cast(const Frame& frame, double azimuth_rad, const Window& block, Plane<float>& tangent);
    void cast_all_round(const Frame& frame, const SunSectors* sectors, bool sky_view,
                        ShadedBlock& out);
    void cast_own(const Frame& frame, const FewSuns& few, ShadedBlock& out);
};

BlockShader::BlockShader(SharedTerrain& shared, const LightField* light, const Locator& locator,
                         int thread)
    : state_(std::make_unique<State>(shared, light, locator, thread)) {}
BlockShader::~BlockShader() = default;

void BlockShader::State::read_ground(const Window& block) {
    const auto around = patch_window(block);
    Plane<float> heights_m;
    elevation.read(around, heights_m);
    patch = make_height_patch(around, std::move(heights_m));
    levels = shared.levels().patches(block, elevation);
}

void BlockShader::State::read_slopes(const Window& block) {
    per_column = Plane<float>(block.width, block.height);
    per_row = Plane<float>(block.width, block.height);
    if (std::holds_alternative<Terrain::Flat>(shared.terrain().slope_from)) return;
    Plane<float> heights_m;
    (slopes ? *slopes : elevation)
        .read({block.column - 1, block.row - 1, block.width + 2, block.height + 2}, heights_m);
    for (int r = 0; r < block.height; ++r)
        horn_gradient(heights_m.row(r), heights_m.row(r + 1), heights_m.row(r + 2),
                      per_column.row(r), per_row.row(r));
}

void BlockShader::State::normals(const Frame& frame, ShadedBlock& out) const {
    for (auto* plane : {&out.east, &out.north, &out.up})
        *plane = Plane<float>(out.block.width, out.block.height);
    for (int r = 0; r < out.block.height; ++r) {
        const double share = out.block.height > 1 ? r / double(out.block.height - 1) : 0;
        surface_normals(per_column.row(r), per_row.row(r), inverse(frame.left(share)),
                        inverse(frame.right(share)), out.east.row(r), out.north.row(r),
                        out.up.row(r));
    }
}

/// Tangents of the block's horizons along one azimuth.
void BlockShader::State::cast(const Frame& frame, double azimuth_rad, const Window& block,
                              Plane<float>& tangent) {
    const auto& sight = shared.terrain().sight;
    const auto direction = direction_towards(frame.middle, azimuth_rad);
    if (rise.width() != block.width || rise.height() != block.height)
        rise = Plane<float>(block.width, block.height);
    for (int r = 0; r < block.height; ++r)
        start_rise(per_column.row(r), per_row.row(r), direction, rise.row(r));
    if (!levels.empty())
        raise_by_far(far_rise(levels, direction, sight, block), patch, block, rise);
    raise_by_near(patch, direction, sight, block, rise);
    for (int r = 0; r < block.height; ++r) {
        const double share = block.height > 1 ? r / double(block.height - 1) : 0;
        const double left =
            1 / length_of_m(frame.left(share), direction.column_step, direction.row_step);
        const double right =
            1 / length_of_m(frame.right(share), direction.column_step, direction.row_step);
        const StepScale scale{static_cast<float>(left),
                              static_cast<float>((right - left) / std::max(1, block.width - 1))};
        tangents(patch.height_m.row(r + near_steps)
                     .subspan(near_steps, static_cast<std::size_t>(block.width)),
                 rise.row(r), scale, tangent.row(r));
    }
    if (probe != nullptr && probe->inside(block))
        probe->note_horizon({azimuth_rad, static_cast<double>(probe->of(tangent, block))});
}

void BlockShader::State::cast_all_round(const Frame& frame, const SunSectors* sectors,
                                        bool sky_view, ShadedBlock& out) {
    const int directions = shared.terrain().directions;
    const auto& block = out.block;
    for (auto* plane : {&before, &after, &first})
        if (plane->width() != block.width || plane->height() != block.height)
            *plane = Plane<float>(block.width, block.height);
    Plane<float> tangent(block.width, block.height);
    std::vector<BeamSums> sums(out.beam.size());
    const auto normal_row = [&](int r) {
        return NormalRow{out.east.row(r), out.north.row(r), out.up.row(r)};
    };
    const auto add_sector = [&](int direction, const Plane<float>& from, const Plane<float>& to) {
        if (sectors == nullptr || sectors->after(direction).empty) return;
        for (int r = 0; r < block.height; ++r) {
            for (std::size_t i = 0; i < sums.size(); ++i)
                sums[i] = {out.beam[i].row(r), out.hours[i].row(r), out.around[i].row(r)};
            sectors->after(direction).add_to({from.row(r), to.row(r)}, normal_row(r), sums);
        }
    };
    for (int d = 0; d < directions; ++d) {
        // A direction that neither a sun nor the sky view asks for is not looked along.
        const bool sunny =
            sectors != nullptr &&
            (!sectors->after(d).empty || !sectors->after((d + directions - 1) % directions).empty);
        const double azimuth_rad = 2 * std::numbers::pi * d / directions;
        if (sunny || sky_view) cast(frame, azimuth_rad, block, tangent);
        auto& sine = d == 0 ? first : after;
        for (int r = 0; r < block.height; ++r) {
            if (sky_view)
                add_sky_view(tangent.row(r), normal_row(r), azimuth_rad, out.sky_view.row(r));
            if (sunny) horizon_sines(tangent.row(r), sine.row(r));
        }
        if (d > 0) add_sector(d - 1, d == 1 ? first : before, after);
        if (d > 0) std::swap(before, after);
    }
    add_sector(directions - 1, directions == 1 ? first : before, first);
    if (sky_view)
        for (int r = 0; r < block.height; ++r) finish_sky_view(out.sky_view.row(r), directions);
}

void BlockShader::State::cast_own(const Frame& frame, const FewSuns& few, ShadedBlock& out) {
    Plane<float> sine(out.block.width, out.block.height);
    for (const auto& sun : few.suns) {
        cast(frame, sun.placed.sun.azimuth_rad, out.block, sine);
        for (int r = 0; r < out.block.height; ++r) {
            horizon_sines(sine.row(r), sine.row(r));
            const HorizonPair horizon{sine.row(r), sine.row(r)};
            const NormalRow normal{out.east.row(r), out.north.row(r), out.up.row(r)};
            add_suns({&sun.placed, 1}, horizon, normal,
                     {out.beam[sun.band].row(r), out.hours[sun.band].row(r),
                      out.around[sun.band].row(r)});
        }
    }
}

void BlockShader::shade(const Window& block, std::size_t first_band, std::size_t bands,
                        bool sky_view, ShadedBlock& out) {
    auto& s = *state_;
    out.block = block;
    out.first_band = first_band;
    const auto frame = frame_of(block, s.locator);
    out.located = frame.has_value();
    if (!frame) return;
    s.read_ground(block);
    s.read_slopes(block);
    s.normals(*frame, out);
    out.sky_view = sky_view ? Plane<float>(block.width, block.height) : Plane<float>();
    for (auto* planes : {&out.beam, &out.around, &out.hours}) {
        planes->clear();
        for (std::size_t i = 0; i < bands; ++i) planes->emplace_back(block.width, block.height);
    }
    std::shared_ptr<const SunSectors> sectors;
    out.whole.clear();
    if (bands > 0) {
        const double height_m = s.shared.middle_height_m();
        if (s.light->point().most_suns(first_band, bands) <=
            static_cast<std::size_t>(s.shared.terrain().directions)) {
            const auto few = few_suns(s.light->point(), frame->place, height_m, first_band, bands);
            s.cast_own(*frame, few, out);
            out.whole = few.whole;
        } else {
            sectors = s.shared.sectors(block, first_band, bands, *s.light, s.thread);
            out.whole = sectors->whole();
        }
    }
    if (sectors || sky_view) s.cast_all_round(*frame, sectors.get(), sky_view, out);
}

void BlockShader::heights(const Window& window, Plane<float>& heights_m) {
    state_->elevation.read(window, heights_m);
}

void BlockShader::watch(Probe& probe) {
    state_->probe = &probe;
}

std::uint64_t BlockShader::infinities() const {
    return state_->elevation.infinities() + (state_->slopes ? state_->slopes->infinities() : 0);
}

std::vector<Window> steady_parts(const Window& block, const Locator& locator) {
    // Half a direction of 64 is 2.8 degrees; a turn of one degree over the block is well inside it.
    constexpr double most_turn_rad = 0.02;
    constexpr int smallest_px = 16;
    const auto frame = frame_of(block, locator);
    if (!frame || (block.width <= smallest_px && block.height <= smallest_px)) return {block};
    double turn = 0;
    for (const auto& corner : frame->corner) {
        const double difference =
            azimuth_of_rad(corner, 0, -1) - azimuth_of_rad(frame->middle, 0, -1);
        turn = std::max(turn, std::abs(std::remainder(difference, 2 * std::numbers::pi)));
    }
    if (turn <= most_turn_rad) return {block};
    std::vector<Window> parts;
    const int half_width = (block.width + 1) / 2, half_height = (block.height + 1) / 2;
    for (const int down : {0, half_height})
        for (const int across : {0, half_width}) {
            const Window part{block.column + across, block.row + down,
                              across == 0 ? half_width : block.width - half_width,
                              down == 0 ? half_height : block.height - half_height};
            if (part.width <= 0 || part.height <= 0) continue;
            for (const auto& piece : steady_parts(part, locator)) parts.push_back(piece);
        }
    return parts;
}

}  // namespace sunbudget
