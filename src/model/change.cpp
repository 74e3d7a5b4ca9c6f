#include "sunbudget/model/change.hpp"

#include <algorithm>
#include <cmath>

namespace sunbudget {

namespace {

/// The ends are exact: a pixel treated as a whole gets what a run on its own would give it.
float mixed(float before, double after, double share) {
    if (share == 0 || std::isnan(before)) return before;
    if (share == 1) return static_cast<float>(after);
    return static_cast<float>(static_cast<double>(before) +
                              share * (after - static_cast<double>(before)));
}

}  // namespace

struct ChangeReader::State {
    const Change& change;
    std::optional<TreatedReader> where;
    std::optional<Reader> codes;
    std::vector<Reader> heights;
    Plane<float> share, values;

    explicit State(const Change& c) : change(c) {
        if (c.where) where.emplace(*c.where);
        if (c.classes) codes.emplace(c.classes->codes);
        if (c.height)
            for (const auto& source : c.height->instead) heights.emplace_back(source);
    }

    void read_place(const Window& window) {
        if (where) return where->shares(window, share);
        if (share.width() != window.width || share.height() != window.height)
            share = Plane<float>(window.width, window.height);
        share.fill(1);
    }
    /// Place, classes and the share that can be treated, all in one.
    void read_treated(const Window& window) {
        read_place(window);
        if (codes) codes->read_values(window, change.classes->listed, values);
        for (int r = 0; r < window.height; ++r) {
            const auto row = share.row(r);
            for (std::size_t i = 0; i < row.size(); ++i) {
                const float listed = codes ? values.row(r)[i] : 1.0f;
                row[i] = std::isnan(listed)
                             ? 0.0f
                             : static_cast<float>(static_cast<double>(row[i] * listed) *
                                                  change.treatable);
            }
        }
    }

    void mix(const Window& window, const std::optional<double>& treated,
             std::optional<CodeValues> ChangedClasses::*of_classes, Plane<float>& plane);
};

ChangeReader::ChangeReader(const Change& change) : state_(std::make_unique<State>(change)) {}
ChangeReader::~ChangeReader() = default;
ChangeReader::ChangeReader(ChangeReader&&) noexcept = default;

bool ChangeReader::touches(const Window& window) const {
    return !state_->where || state_->change.where->touches(window);
}

void ChangeReader::treated(const Window& window, Plane<float>& share) {
    state_->read_treated(window);
    if (share.width() != window.width || share.height() != window.height)
        share = Plane<float>(window.width, window.height);
    for (int r = 0; r < window.height; ++r)
        std::ranges::copy(state_->share.row(r), share.row(r).begin());
}

/// Of a pixel of several classes each class is changed by itself.
void ChangeReader::State::mix(const Window& window, const std::optional<double>& treated,
                              std::optional<CodeValues> ChangedClasses::*of_classes,
                              Plane<float>& plane) {
    if (!treated || (change.where && !change.where->touches(window))) return;
    const bool by_class = change.classes && (*change.classes.*of_classes);
    if (by_class) {
        read_place(window);
        codes->read_values(window, *(*change.classes.*of_classes), values);
    } else {
        read_treated(window);
    }
    for (int r = 0; r < window.height; ++r) {
        const auto row = plane.row(r), part = share.row(r);
        for (std::size_t i = 0; i < row.size(); ++i)
            row[i] = mixed(row[i], by_class ? static_cast<double>(values.row(r)[i]) : *treated,
                           static_cast<double>(part[i]));
    }
}

void ChangeReader::albedo(const Window& window, Plane<float>& albedo) {
    state_->mix(window, state_->change.albedo, &ChangedClasses::albedo_after, albedo);
}

void ChangeReader::emissivity(const Window& window, Plane<float>& emissivity) {
    state_->mix(window, state_->change.emissivity, &ChangedClasses::emissivity_after, emissivity);
}

void ChangeReader::dry(const Window& window, Plane<float>& dry) {
    state_->mix(window, state_->change.dry, &ChangedClasses::dry_after, dry);
}

void ChangeReader::heights(const Window& window, Plane<float>& heights_m) {
    auto& s = *state_;
    if (!s.change.height || !touches(window)) return;
    const auto& height = *s.change.height;
    if (height.add_numbers)
        s.where->numbers(window, s.share);
    else
        s.read_place(window);
    if (!s.heights.empty()) s.heights.front().read(window, s.values);
    for (int r = 0; r < window.height; ++r) {
        const auto row = heights_m.row(r), share = s.share.row(r);
        for (std::size_t i = 0; i < row.size(); ++i) {
            if (!s.heights.empty()) {
                const float after = s.values.row(r)[i];
                row[i] = std::isnan(after) ? row[i]
                                           : mixed(row[i], static_cast<double>(after),
                                                   static_cast<double>(share[i]));
            } else if (height.add_numbers) {
                row[i] += share[i];
            } else {
                row[i] += static_cast<float>(static_cast<double>(share[i]) * *height.add_m);
            }
        }
    }
}

}  // namespace sunbudget
