#include "sunbudget/model/light_shares.hpp"

#include <algorithm>
#include <cassert>
#include <utility>

namespace sunbudget {

namespace {

LightShare plus(const LightShare& a, const LightShare& b, double factor) {
    return {a.beam + b.beam * factor, a.diffuse + b.diffuse * factor,
            a.scattered + b.scattered * factor};
}

}  // namespace

LightShares::LightShares(std::vector<Piece> pieces) : pieces_(std::move(pieces)) {
    assert(!pieces_.empty());
    LightShare sum{0, 0, 0};
    for (std::size_t i = 1; i < pieces_.size(); ++i) {
        const auto &before = pieces_[i - 1].span, &after = pieces_[i].span;
        borders_.push_back((before.end + after.begin) / 2);
        if (i > 1) sum = plus(sum, pieces_[i - 1].share, borders_[i - 1] - borders_[i - 2]);
        integrals_.push_back(sum);
    }
}

std::size_t LightShares::index_of(UtcSeconds utc) const {
    return static_cast<std::size_t>(std::upper_bound(borders_.begin(), borders_.end(), utc) -
                                    borders_.begin());
}

LightShare LightShares::integral_to(UtcSeconds utc) const {
    const auto i = index_of(utc);
    const std::size_t border = i == 0 ? 0 : i - 1;
    return plus(integrals_[border], pieces_[i].share, utc - borders_[border]);
}

LightShare LightShares::over(UtcSeconds begin, UtcSeconds end) const {
    const auto i = index_of(begin);
    if (end <= begin || borders_.empty() || i == index_of(end)) return pieces_[i].share;
    const auto from = integral_to(begin), to = integral_to(end);
    return plus({0, 0, 0}, plus(to, from, -1), 1 / (end - begin));
}

}  // namespace sunbudget
