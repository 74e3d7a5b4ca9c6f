#include "sunbudget/decide/zones.hpp"

#include <algorithm>
#include <cmath>
#include <limits>
#include <memory>
#include <numbers>
#include <numeric>

#include "sunbudget/base/parallel.hpp"
#include "sunbudget/raster/locator.hpp"

namespace sunbudget {

namespace {

/// Blocks of this size lie on a fixed lattice: a zone's sums are added in their order.
constexpr int block_side_px = 512;

/// Bands looked at together: their planes are held at once.
constexpr std::size_t bands_at_once = 16;

constexpr double nan_value = std::numeric_limits<double>::quiet_NaN();

/// A band to be looked at: of a layer, or of its uncertainty.
struct Band {
    std::size_t layer = 0, band = 0;
    bool uncertainty = false;
    const Source* source = nullptr;
};

std::vector<Band> bands_of(const ZoneQuestion& question) {
    std::vector<Band> bands;
    for (std::size_t n = 0; n < question.layers.size(); ++n) {
        const auto& layer = question.layers[n];
        for (std::size_t b = 0; b < layer.bands.size(); ++b)
            bands.push_back({n, b, false, &layer.bands[b]});
        for (std::size_t b = 0; b < layer.uncertainty.size(); ++b)
            bands.push_back({n, b, true, &layer.uncertainty[b]});
    }
    return bands;
}

/// What one block gives one zone, or all blocks so far.
struct Piece {
    double map_area_m2 = 0, surface_area_m2 = 0, covered_px = 0, first_layer_px = 0;
    std::map<std::int32_t, double> classes_m2;
    std::vector<ZoneTally> tallies;  ///< by band

    void merge(const Piece& later) {
        map_area_m2 += later.map_area_m2;
        surface_area_m2 += later.surface_area_m2;
        covered_px += later.covered_px;
        first_layer_px += later.first_layer_px;
        for (const auto& [code, area_m2] : later.classes_m2) classes_m2[code] += area_m2;
        tallies.resize(std::max(tallies.size(), later.tallies.size()));
        for (std::size_t i = 0; i < later.tallies.size(); ++i) tallies[i].merge(later.tallies[i]);
    }
};

/// One thread's readers and planes.
class BlockLooker {
  public:
    BlockLooker(const ZoneQuestion& question, std::span<const Band> bands, bool ground,
                const Locator& locator)
        : question_(question),
          bands_(bands),
          ground_(ground),
          locator_(locator.clone()),
          planes_(bands.size()) {
        for (const auto& band : bands) readers_.emplace_back(*band.source);
        if (question.slope_deg) slope_.emplace(*question.slope_deg);
        if (ground && question.classes) classes_.emplace(*question.classes);
    }

    void read(const Window& block) {
        block_ = block;
        for (std::size_t i = 0; i < readers_.size(); ++i) readers_[i].read(block, planes_[i]);
        if (classes_) classes_->read_codes(block, codes_);
        map_areas(block);
        surface_areas(block);
    }

    [[nodiscard]] Piece look(const Polygon& zone);

  private:
    void map_areas(const Window& block);
    void surface_areas(const Window& block);
    void add_ground(const Window& window, Piece& piece) const;
    void add_band(std::size_t band, const Window& window, Piece& piece) const;

    const ZoneQuestion& question_;
    std::span<const Band> bands_;
    bool ground_;  ///< areas and classes are asked for
    Locator locator_;
    std::vector<Reader> readers_;
    std::optional<Reader> slope_, classes_;
    Window block_;
    std::vector<Plane<float>> planes_;
    Plane<std::int32_t> codes_;
    Plane<float> slope_deg_;
    Plane<double> map_m2_, surface_m2_, shares_;
};

/// The parabola through three areas of a row, at its pixels: areas vary smoothly, and each row has its own.
void BlockLooker::map_areas(const Window& block) {
    map_m2_ = Plane<double>(block.width, block.height);
    const auto area_at = [&](double column, double row) {
        const auto matrix = locator_.matrix(column + 0.5, row + 0.5);
        return matrix ? std::abs(matrix->determinant()) : nan_value;
    };
    const double last = std::max(1, block.width - 1);
    for (int r = 0; r < block.height; ++r) {
        const double row = static_cast<double>(block.row + r),
                     left = static_cast<double>(block.column);
        const double a = area_at(left, row), b = area_at(left + last / 2, row),
                     c = area_at(left + last, row);
        const auto out = map_m2_.row(r);
        for (std::size_t i = 0; i < out.size(); ++i) {
            const double u = static_cast<double>(i) / last;
            const double area =
                a * (1 - u) * (1 - 2 * u) + b * 4 * u * (1 - u) + c * u * (2 * u - 1);
            out[i] = std::isnan(area) ? 0 : area;  // off the globe
        }
    }
}

void BlockLooker::surface_areas(const Window& block) {
    surface_m2_ = Plane<double>(block.width, block.height);
    if (slope_) slope_->read(block, slope_deg_);
    for (int r = 0; r < block.height; ++r) {
        const auto map = map_m2_.row(r), surface = surface_m2_.row(r);
        std::copy(map.begin(), map.end(), surface.begin());
        if (!slope_) continue;
        const auto slope = slope_deg_.row(r);
        for (std::size_t i = 0; i < slope.size(); ++i)
            if (!std::isnan(slope[i]))
                surface[i] /= std::cos(static_cast<double>(slope[i]) * std::numbers::pi / 180);
    }
}

/// The part of a block that a zone's outline lies in; no pixels where they do not meet.
Window overlap(const Polygon& zone, const Window& block) {
    const auto low = [](double edge, long from) {
        return std::max(from, static_cast<long>(std::floor(std::max(edge, -1.0))));
    };
    const auto high = [](double edge, long to) {
        return std::min(to, static_cast<long>(std::ceil(std::min(edge, 2e9))));
    };
    const long left = low(zone.left, block.column), top = low(zone.top, block.row);
    const long right = high(zone.right, block.column + block.width),
               bottom = high(zone.bottom, block.row + block.height);
    return {left, top, static_cast<int>(std::max(0L, right - left)),
            static_cast<int>(std::max(0L, bottom - top))};
}

Piece BlockLooker::look(const Polygon& zone) {
    Piece piece;
    const auto window = overlap(zone, block_);
    if (window.width == 0 || window.height == 0) return piece;
    cover(zone.rings, window, shares_);
    if (ground_) add_ground(window, piece);
    piece.tallies.resize(bands_.size());
    for (std::size_t band = 0; band < bands_.size(); ++band) {
        add_band(band, window, piece);
        piece.tallies[band].settle();
    }
    return piece;
}

void BlockLooker::add_ground(const Window& window, Piece& piece) const {
    const int top = static_cast<int>(window.row - block_.row);
    const auto left = static_cast<std::size_t>(window.column - block_.column);
    for (int r = 0; r < window.height; ++r) {
        const auto share = shares_.row(r);
        const auto map = map_m2_.row(top + r).subspan(left),
                   surface = surface_m2_.row(top + r).subspan(left);
        for (std::size_t i = 0; i < share.size(); ++i) {
            if (share[i] == 0) continue;
            piece.covered_px += share[i];
            piece.map_area_m2 += share[i] * map[i];
            piece.surface_area_m2 += share[i] * surface[i];
            if (!classes_) continue;
            const auto code = codes_.row(top + r)[left + i];
            if (code != no_code) piece.classes_m2[code] += share[i] * map[i];
        }
    }
}

void BlockLooker::add_band(std::size_t band, const Window& window, Piece& piece) const {
    const int top = static_cast<int>(window.row - block_.row);
    const auto left = static_cast<std::size_t>(window.column - block_.column);
    const auto& areas =
        question_.layers[bands_[band].layer].per_surface_area ? surface_m2_ : map_m2_;
    auto& tally = piece.tallies[band];
    for (int r = 0; r < window.height; ++r) {
        const auto share = shares_.row(r);
        const auto value = planes_[band].row(top + r).subspan(left);
        const auto area = areas.row(top + r).subspan(left);
        for (std::size_t i = 0; i < share.size(); ++i) {
            if (share[i] == 0 || std::isnan(value[i])) continue;
            if (ground_ && band == 0) piece.first_layer_px += share[i];
            if (area[i] > 0) tally.add(value[i], share[i] * area[i]);
        }
    }
}

/// Zones in the order of their upper ends, and those that the rows at work reach.
class Sweep {
  public:
    explicit Sweep(const std::vector<Polygon>& zones) : zones_(zones), order_(zones.size()) {
        std::iota(order_.begin(), order_.end(), std::size_t{0});
        std::stable_sort(order_.begin(), order_.end(), [&](std::size_t a, std::size_t b) {
            return zones_[a].top < zones_[b].top;
        });
    }
    /// Numbers of the zones that reach into the rows [top, bottom), ascending.
    const std::vector<std::size_t>& reaching(double top, double bottom) {
        std::erase_if(open_, [&](std::size_t z) { return zones_[z].bottom <= top; });
        for (; next_ < order_.size() && zones_[order_[next_]].top < bottom; ++next_)
            if (zones_[order_[next_]].bottom > top) open_.push_back(order_[next_]);
        std::sort(open_.begin(), open_.end());
        return open_;
    }

  private:
    const std::vector<Polygon>& zones_;
    std::vector<std::size_t> order_, open_;
    std::size_t next_ = 0;
};

/// The answers to some bands at a time.
class Answering {
  public:
    Answering(const ZoneQuestion& question, const std::vector<Polygon>& zones,
              std::span<const Band> bands, bool ground, const ZoneOptions& options,
              std::vector<ZoneAnswer>& answers)
        : question_(question),
          zones_(zones),
          bands_(bands),
          ground_(ground),
          options_(options),
          answers_(answers),
          locator_(question.grid),
          lookers_(static_cast<std::size_t>(options.threads)) {}

    void run(double done_before, double total) {
        Sweep sweep(zones_);
        const auto& grid = question_.grid;
        for (int top = 0; top < grid.height; top += block_side_px) {
            const int rows = std::min(block_side_px, grid.height - top);
            look_along(top, rows, sweep.reaching(top, top + rows));
            throw_if_stopped();
            close_above(top + rows);
            if (options_.progress)
                options_.progress(done_before + static_cast<double>(top + rows) * grid.width / 1e6,
                                  total);
        }
        close_above(std::numeric_limits<double>::infinity());
    }

  private:
    void look_along(int top, int rows, const std::vector<std::size_t>& reaching);
    void close_above(double row);
    void finish(std::size_t zone, const Piece& piece);

    const ZoneQuestion& question_;
    const std::vector<Polygon>& zones_;
    std::span<const Band> bands_;
    bool ground_;
    const ZoneOptions& options_;
    std::vector<ZoneAnswer>& answers_;
    Locator locator_;
    std::vector<std::unique_ptr<BlockLooker>> lookers_;
    std::map<std::size_t, Piece> open_;
};

/// One row of blocks: looked at in parallel, then added up from left to right.
void Answering::look_along(int top, int rows, const std::vector<std::size_t>& reaching) {
    const auto columns =
        static_cast<std::size_t>((question_.grid.width + block_side_px - 1) / block_side_px);
    std::vector<std::vector<std::size_t>> zones_of(columns);
    for (const auto z : reaching) {
        const double last = static_cast<double>(columns) - 1;
        if (zones_[z].right <= 0 || zones_[z].left >= question_.grid.width) continue;
        const auto from = static_cast<std::size_t>(
            std::clamp(std::floor(zones_[z].left / block_side_px), 0.0, last));
        const auto to = static_cast<std::size_t>(
            std::clamp(std::floor(zones_[z].right / block_side_px), 0.0, last));
        for (std::size_t c = from; c <= to; ++c) zones_of[c].push_back(z);
    }
    std::vector<std::vector<Piece>> pieces(columns);
    parallel_for(columns, options_.threads, [&](std::size_t c, int thread) {
        if (zones_of[c].empty()) return;
        auto& looker = lookers_[static_cast<std::size_t>(thread)];
        if (!looker) looker = std::make_unique<BlockLooker>(question_, bands_, ground_, locator_);
        const int left = static_cast<int>(c) * block_side_px;
        looker->read({left, top, std::min(block_side_px, question_.grid.width - left), rows});
        for (const auto z : zones_of[c]) pieces[c].push_back(looker->look(zones_[z]));
    });
    if (stop_signal != 0) return;
    for (std::size_t c = 0; c < columns; ++c)
        for (std::size_t i = 0; i < zones_of[c].size(); ++i)
            open_[zones_of[c][i]].merge(pieces[c][i]);
}

/// Answers the zones that end above a row.
void Answering::close_above(double row) {
    for (auto it = open_.begin(); it != open_.end();) {
        if (zones_[it->first].bottom > row) {
            ++it;
            continue;
        }
        finish(it->first, it->second);
        it = open_.erase(it);
    }
}

void Answering::finish(std::size_t zone, const Piece& piece) {
    auto& answer = answers_[zone];
    if (ground_) {
        answer.map_area_m2 = piece.map_area_m2;
        answer.surface_area_m2 = piece.surface_area_m2;
        // Rounding may leave a hair.
        const double none = 1 - piece.first_layer_px / zones_[zone].area_px;
        answer.nodata_share = none < 1e-9 ? 0 : std::min(none, 1.0);
        double classified = 0;
        for (const auto& [code, area_m2] : piece.classes_m2) classified += area_m2;
        for (const auto& [code, area_m2] : piece.classes_m2)
            answer.class_shares[code] = area_m2 / classified;
    }
    for (std::size_t i = 0; i < piece.tallies.size(); ++i) {
        const auto& band = bands_[i];
        if (band.uncertainty) {
            const auto found = piece.tallies[i].figures({});
            answer.uncertainty[band.layer][band.band] = found.weight > 0 ? found.mean : nan_value;
        } else {
            answer.figures[band.layer][band.band] = piece.tallies[i].figures(question_.above);
        }
    }
}

ZoneAnswer unanswered(const ZoneQuestion& question) {
    ZoneAnswer answer;
    answer.nodata_share = 1;
    for (const auto& layer : question.layers) {
        answer.figures.emplace_back(layer.bands.size());
        answer.uncertainty.emplace_back(layer.bands.size(), nan_value);
    }
    return answer;
}

}  // namespace

ZoneAnswer::ClassShare ZoneAnswer::commonest_class() const {
    ClassShare most;
    for (const auto& [code, share] : class_shares)
        if (share > most.share) most = {code, share};
    return most;
}

std::vector<ZoneAnswer> zone_answers(const ZoneQuestion& question,
                                     const std::vector<Polygon>& zones,
                                     const ZoneOptions& options) {
    std::vector<ZoneAnswer> answers(zones.size(), unanswered(question));
    const auto bands = bands_of(question);
    const double pixels = static_cast<double>(question.grid.width) * question.grid.height / 1e6;
    const double passes =
        std::ceil(static_cast<double>(bands.size()) / static_cast<double>(bands_at_once));
    double done = 0;
    for (std::size_t first = 0; first < bands.size(); first += bands_at_once, done += pixels) {
        const auto some =
            std::span(bands).subspan(first, std::min(bands_at_once, bands.size() - first));
        Answering(question, zones, some, first == 0, options, answers).run(done, passes * pixels);
    }
    return answers;
}

}  // namespace sunbudget
