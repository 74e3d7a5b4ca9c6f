#include "sunbudget/decide/zones.hpp"

#include <algorithm>
#include <cmath>
#include <limits>
#include <memory>
#include <numeric>

#include "sunbudget/base/parallel.hpp"
#include "zone_block.hpp"

namespace sunbudget {

namespace {

/// Blocks of this size lie on a fixed lattice: a zone's sums are added in their order.
constexpr int block_side_px = 512;

/// Bands looked at together: their planes are held at once.
constexpr std::size_t bands_at_once = 16;

constexpr double nan_value = std::numeric_limits<double>::quiet_NaN();

std::vector<ZoneBand> bands_of(const ZoneQuestion& question) {
    std::vector<ZoneBand> bands;
    for (std::size_t n = 0; n < question.layers.size(); ++n) {
        const auto& layer = question.layers[n];
        for (std::size_t b = 0; b < layer.bands.size(); ++b)
            bands.push_back({n, b, false, &layer.bands[b]});
        for (std::size_t b = 0; b < layer.uncertainty.size(); ++b)
            bands.push_back({n, b, true, &layer.uncertainty[b]});
    }
    return bands;
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
              std::span<const ZoneBand> bands, bool ground, const ZoneOptions& options,
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
    void finish(std::size_t zone, const ZonePiece& piece);

    const ZoneQuestion& question_;
    const std::vector<Polygon>& zones_;
    std::span<const ZoneBand> bands_;
    bool ground_;
    const ZoneOptions& options_;
    std::vector<ZoneAnswer>& answers_;
    Locator locator_;
    std::vector<std::unique_ptr<ZoneBlock>> lookers_;
    std::map<std::size_t, ZonePiece> open_;
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
    std::vector<std::vector<ZonePiece>> pieces(columns);
    parallel_for(columns, options_.threads, [&](std::size_t c, int thread) {
        if (zones_of[c].empty()) return;
        auto& looker = lookers_[static_cast<std::size_t>(thread)];
        if (!looker) looker = std::make_unique<ZoneBlock>(question_, bands_, ground_, locator_);
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

void Answering::finish(std::size_t zone, const ZonePiece& piece) {
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
