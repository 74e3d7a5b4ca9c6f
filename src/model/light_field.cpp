#include <algorithm>
#include <cmath>
#include <limits>
#include <map>
#include <mutex>
#include <set>

#include "sunbudget/base/simd.hpp"
#include "sunbudget/model/light.hpp"

namespace sunbudget {

namespace {

/// Far below the quantum of stored fluxes (1/16 W m-2) and of the sky's own uncertainty.
constexpr double tolerance_w_m2 = 1.0 / 256;

constexpr float nan_value = std::numeric_limits<float>::quiet_NaN();

/// A band's days of one month, where months differ; else a band.
struct Share {
    std::size_t band = 0;
    int month = 0;  ///< 0: all
};

/// The month whose raster a share needs. An instant's month hangs on the place's clock by a day at most.
int month_of(const Share& share, const TimePlan& times) {
    return share.month != 0 || !times.instant ? share.month
                                              : times.zone.local(*times.instant, 0).date.month;
}

/// Adds the quadratic through three planes at 0, 1/2 and 1 of a cell to pixels whose parameter lies in it.
SUNBUDGET_CLONES
void add_cell(const float* __restrict parameter, const float* __restrict low,
              const float* __restrict middle, const float* __restrict high, float* __restrict out,
              int count, float floor, float width) {
    for (int i = 0; i < count; ++i) {
        const float u = (parameter[i] - floor) / width;
        const float value = (1 - u) * (1 - 2 * u) * low[i] + 4 * u * (1 - u) * middle[i] +
                            u * (2 * u - 1) * high[i];
        out[i] = u >= 0 && u < 1 ? out[i] + value : out[i];
    }
}

}  // namespace

double cell_of(SkyParameter parameter) {
    return parameter == SkyParameter::turbidity ? 0.5 : 4;
}

struct LightField::Block::Parts {
    Window window, frame;
    SmoothField::Block same;  ///< where the sky does not vary

    std::map<int, SmoothField::Block> nodes;  ///< by half cells of the parameter
    std::map<int, Plane<float>>
        values;  ///< the parameter over the window, by the month of its raster
    std::map<int, std::set<int>> cells;  ///< that its pixels lie in
    std::array<Plane<float>, 3> scratch;
};

LightField::Block::Block() = default;
LightField::Block::~Block() = default;
LightField::Block::Block(Block&&) noexcept = default;
LightField::Block& LightField::Block::operator=(Block&&) noexcept = default;

void LightField::Block::each_sky_row(
    const std::function<void(int, std::span<const float>)>& visit) const {
    for (const auto& [month, plane] : parts_->values)
        for (int r = 0; r < plane.height(); ++r) visit(r, plane.row(r));
}
const Window& LightField::Block::window() const {
    return parts_->window;
}

struct LightField::Work {
    TimePlan times;
    PointLight light;
    bool vectors, ground;
    const SkyRaster* varied;
    SmoothField::Shape shape;
    std::vector<Share> shares;
    std::vector<Locator> locators;             // one a thread
    std::vector<std::vector<Reader>> readers;  // one a thread and month's raster
    std::mutex mutex;
    std::map<int, std::unique_ptr<SmoothField>>
        fields;  // by half cells of the parameter; 0 alone where it does not vary

    Work(const TimePlan& t, const Sky& sky, const Grid& grid, int threads,
         std::optional<double> height_m, bool v, const SkyRaster* raster)
        : times(t), light(t, sky), vectors(v), ground(waits_for_ground(sky)), varied(raster) {
        const bool by_month = varied != nullptr && varied->months.size() > 1;
        for (std::size_t band = 0; band < light.bands(); ++band)
            for (const int month : by_month ? light.months_of(band) : std::vector<int>{0})
                shares.push_back({band, month});
        shape = {grid.width, grid.height, values_a_share() * shares.size(), tolerance_w_m2,
                 height_m};
        locators.emplace_back(grid);
        for (int i = 1; i < threads; ++i) locators.push_back(locators.front().clone());
        for (int i = 0; i < threads && varied != nullptr; ++i) {
            readers.emplace_back();
            for (const auto& source : varied->months) readers.back().emplace_back(source);
        }
    }

    [[nodiscard]] std::size_t values_a_share() const {
        return (vectors ? 9u : 2u) + (ground ? 2u : 0u);
    }
    [[nodiscard]] std::size_t index_of(Part part) const {
        if (part == Part::thrown_back) return vectors ? 9 : 2;
        if (part == Part::thrown_back_twice) return vectors ? 10 : 3;
        return vectors ? static_cast<std::size_t>(part) : part == Part::beam_up ? 0u : 1u;
    }

    /// The field at one value of the parameter, made when first asked for.
    SmoothField& field(int node) {
        const std::lock_guard hold(mutex);
        auto& found = fields[node];
        if (!found) {
            Sky sky = light.sky();
            if (varied != nullptr)
                sky[varied->parameter].fill(node * cell_of(varied->parameter) / 2);
            found = std::make_unique<SmoothField>(
                shape, [this, sky](double column, double row, double height_m, int thread,
                                   std::span<double> values) {
                    at_node(sky, column, row, height_m, thread, values);
                });
        }
        return *found;
    }

    void at_node(const Sky& sky, double column, double row, double height_m, int thread,
                 std::span<double> values) const {
        // Nodes are pixel centres; the locator counts from the pixel's outer corner.
        const auto place = locators[static_cast<std::size_t>(thread)].at(column + 0.5, row + 0.5);
        if (!place) {
            std::fill(values.begin(), values.end(), std::numeric_limits<double>::quiet_NaN());
            return;
        }
        for (std::size_t n = 0; n < shares.size(); ++n) {
            const auto found = light.at(shares[n].band, shares[n].month, sky, place->latitude_rad,
                                        place->longitude_rad, height_m);
            write(found, values.data() + n * values_a_share());
        }
    }

    void write(const OpenLight& light_there, double* to) const {
        if (vectors) {
            to = std::copy(light_there.beam_w_m2.begin(), light_there.beam_w_m2.end(), to);
            to = std::copy(light_there.circumsolar_w_m2.begin(), light_there.circumsolar_w_m2.end(),
                           to);
            *to++ = light_there.diffuse_w_m2;
            *to++ = light_there.horizon_w_m2;
            *to++ = light_there.sunlit_h_a_day;
        } else {
            *to++ = light_there.direct_w_m2();
            *to++ = light_there.diffuse_w_m2;
        }
        if (!ground) return;
        *to++ = light_there.thrown_back_w_m2;
        *to++ = light_there.thrown_back_twice_w_m2;
    }

    void read_parameter(Block::Parts& parts, int thread);
    void fill_varied(Block::Parts& parts, std::size_t band, Part part,
                     const Plane<float>& heights_m, Plane<float>& out) const;
};

/// The parameter's values over the window, and which cells they lie in.
void LightField::Work::read_parameter(Block::Parts& parts, int thread) {
    const double width = cell_of(varied->parameter);
    for (const auto& share : shares) {
        const int month = varied->months.size() > 1 ? month_of(share, times) : 0;
        if (parts.values.count(month) != 0) continue;
        auto& plane = parts.values[month];
        auto& cells = parts.cells[month];
        readers[static_cast<std::size_t>(thread)]
               [month == 0 ? 0 : static_cast<std::size_t>(month - 1)]
                   .read(parts.window, plane);
        float floor = 0, ceiling = 0;
        for (int r = 0; r < plane.height(); ++r)
            for (float& value : plane.row(r)) {
                const auto number = static_cast<double>(value);
                if (!(number >= varied->lowest && number <= varied->highest)) value = nan_value;
                // Neighbours mostly share a cell: the set is asked only where one leaves it.
                if ((value >= floor && value < ceiling) || std::isnan(value)) continue;
                const int cell = static_cast<int>(std::floor(number / width));
                cells.insert(cell);
                floor = static_cast<float>(cell * width);
                ceiling = static_cast<float>((cell + 1) * width);
            }
    }
}

void LightField::Work::fill_varied(Block::Parts& parts, std::size_t band, Part part,
                                   const Plane<float>& heights_m, Plane<float>& out) const {
    const auto width = static_cast<float>(cell_of(varied->parameter));
    const auto left = static_cast<std::size_t>(parts.window.column - parts.frame.column);
    const int top = static_cast<int>(parts.window.row - parts.frame.row);
    const int columns = parts.window.width;
    for (auto& plane : parts.scratch)
        if (plane.width() != out.width() || plane.height() != out.height())
            plane = Plane<float>(out.width(), out.height());
    for (int r = 0; r < parts.window.height; ++r)
        std::fill_n(out.row(top + r).data() + left, columns, 0.0F);
    for (std::size_t n = 0; n < shares.size(); ++n) {
        if (shares[n].band != band) continue;
        const int month = varied->months.size() > 1 ? month_of(shares[n], times) : 0;
        const auto& values = parts.values.at(month);
        for (int r = 0; r < parts.window.height; ++r) {
            const auto row = values.row(r);
            float* to = out.row(top + r).data() + left;
            for (std::size_t i = 0; i < row.size(); ++i)
                to[i] = std::isnan(row[i]) ? nan_value : to[i];
        }
        for (const int cell : parts.cells.at(month)) {
            for (int k = 0; k < 3; ++k)
                parts.nodes.at(2 * cell + k)
                    .fill(n * values_a_share() + index_of(part), heights_m,
                          parts.scratch[static_cast<std::size_t>(k)]);
            const auto at = [&](std::size_t k, int r) {
                return parts.scratch[k].row(top + r).data() + left;
            };
            for (int r = 0; r < parts.window.height; ++r)
                add_cell(values.row(r).data(), at(0, r), at(1, r), at(2, r),
                         out.row(top + r).data() + left, columns, static_cast<float>(cell) * width,
                         width);
        }
    }
}

LightField::LightField(const TimePlan& times, const Sky& sky, const Grid& grid, int threads,
                       std::optional<double> constant_height_m, bool vectors,
                       const SkyRaster* varied)
    : work_(std::make_unique<Work>(times, sky, grid, threads, constant_height_m, vectors, varied)) {
}
LightField::~LightField() = default;

LightField::Block LightField::prepare(const Window& window, const Window& frame,
                                      const Plane<float>& heights_m, int thread) {
    Block block;
    block.parts_ = std::make_unique<Block::Parts>();
    auto& parts = *block.parts_;
    parts.window = window;
    parts.frame = frame;
    if (work_->varied == nullptr) {
        parts.same = work_->field(0).prepare(window, frame, heights_m, thread);
        return block;
    }
    work_->read_parameter(parts, thread);
    std::set<int> nodes;
    for (const auto& [month, cells] : parts.cells)
        for (const int cell : cells) nodes.insert({2 * cell, 2 * cell + 1, 2 * cell + 2});
    for (const int node : nodes)
        parts.nodes.emplace(node, work_->field(node).prepare(window, frame, heights_m, thread));
    return block;
}

void LightField::fill(const Block& block, std::size_t band, Part part,
                      const Plane<float>& heights_m, Plane<float>& out) const {
    if (work_->varied != nullptr)
        return work_->fill_varied(*block.parts_, band, part, heights_m, out);
    block.parts_->same.fill(band * work_->values_a_share() + work_->index_of(part), heights_m, out);
}

bool LightField::has(Part part) const {
    if (part == Part::thrown_back || part == Part::thrown_back_twice) return work_->ground;
    return work_->vectors || part == Part::beam_up || part == Part::diffuse;
}

const PointLight& LightField::point() const {
    return work_->light;
}
const Locator& LightField::locator(int thread) const {
    return work_->locators[static_cast<std::size_t>(thread)];
}

}  // namespace sunbudget
