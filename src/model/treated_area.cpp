#include "sunbudget/model/treated_area.hpp"

#include <algorithm>
#include <cmath>

namespace sunbudget {

namespace {

constexpr int block_px = 256;
/// Pixels around the grid that a horizon may lie in.
constexpr double furthest_px = 1 << 16;
/// A block and its neighbours, twice over: what one block of the run looks at.
constexpr std::size_t blocks_kept = 20;

long block_of(double place) {
    return static_cast<long>(std::floor(place / block_px));
}

/// The blocks that a rectangle of pixels touches, borders not counted.
struct Blocks {
    long left, top, right, bottom;
};
Blocks blocks_of(double left, double top, double right, double bottom) {
    return {block_of(left), block_of(top), static_cast<long>(std::ceil(right / block_px)) - 1,
            static_cast<long>(std::ceil(bottom / block_px)) - 1};
}
Blocks blocks_of(const Window& w) {
    return blocks_of(static_cast<double>(w.column), static_cast<double>(w.row),
                     static_cast<double>(w.column + w.width),
                     static_cast<double>(w.row + w.height));
}

/// Rounding of the shares' sums along a row leaves a hair.
double whole(double share) {
    return share > 1 - 1e-9 ? 1 : share;
}

}  // namespace

TreatedArea::TreatedArea(std::vector<Polygon> polygons, const Grid& grid)
    : polygons_(std::move(polygons)) {
    for (std::size_t i = 0; i < polygons_.size(); ++i) {
        const auto& p = polygons_[i];
        const auto blocks = blocks_of(std::max(p.left, -furthest_px), std::max(p.top, -furthest_px),
                                      std::min(p.right, grid.width + furthest_px),
                                      std::min(p.bottom, grid.height + furthest_px));
        for (long row = blocks.top; row <= blocks.bottom; ++row)
            for (long column = blocks.left; column <= blocks.right; ++column)
                by_block_[{column, row}].push_back(i);
    }
}

bool TreatedArea::touches(const Window& window) const {
    const auto blocks = blocks_of(window);
    for (long row = blocks.top; row <= blocks.bottom; ++row)
        for (long column = blocks.left; column <= blocks.right; ++column)
            if (by_block_.contains({column, row})) return true;
    return false;
}

/// Nothing where no polygon reaches the block.
const TreatedReader::Block* TreatedReader::block(std::pair<long, long> place) {
    const auto inside = area_.by_block_.find(place);
    if (inside == area_.by_block_.end()) return nullptr;
    const auto known = std::find_if(recent_.begin(), recent_.end(),
                                    [&](const Block& b) { return b.place == place; });
    if (known != recent_.end()) {
        recent_.splice(recent_.begin(), recent_, known);
        return &recent_.front();
    }
    const Window window{place.first * block_px, place.second * block_px, block_px, block_px};
    Plane<double> sum(block_px, block_px), weighted(block_px, block_px);
    for (const auto i : inside->second) {
        const auto& polygon = area_.polygons_[i];
        cover(polygon.rings, window, scratch_);
        const double number =
            polygon.numbers.empty() || std::isnan(polygon.numbers[0]) ? 0 : polygon.numbers[0];
        for (int r = 0; r < block_px; ++r)
            for (int c = 0; c < block_px; ++c) {
                sum.at(c, r) += scratch_.at(c, r);
                weighted.at(c, r) += scratch_.at(c, r) * number;
            }
    }
    Block made{place, Plane<float>(block_px, block_px), Plane<float>(block_px, block_px)};
    for (int r = 0; r < block_px; ++r)
        for (int c = 0; c < block_px; ++c) {
            const double share = sum.at(c, r);
            made.shares.at(c, r) = static_cast<float>(whole(std::min(share, 1.0)));
            made.numbers.at(c, r) = static_cast<float>(whole(share) > 1 ? weighted.at(c, r) / share
                                                                        : weighted.at(c, r));
        }
    recent_.push_front(std::move(made));
    if (recent_.size() > blocks_kept) recent_.pop_back();
    return &recent_.front();
}

void TreatedReader::fill(const Window& window, Plane<float> Block::*what, Plane<float>& out) {
    if (out.width() != window.width || out.height() != window.height)
        out = Plane<float>(window.width, window.height);
    else
        out.fill(0);
    const auto blocks = blocks_of(window);
    for (long row = blocks.top; row <= blocks.bottom; ++row)
        for (long column = blocks.left; column <= blocks.right; ++column) {
            const auto* found = block({column, row});
            if (found == nullptr) continue;
            const long left = std::max(window.column, column * block_px),
                       top = std::max(window.row, row * block_px);
            const long right = std::min(window.column + window.width, (column + 1) * block_px);
            const long bottom = std::min(window.row + window.height, (row + 1) * block_px);
            for (long r = top; r < bottom; ++r) {
                const auto from = (found->*what).row(static_cast<int>(r - row * block_px));
                std::copy(
                    from.begin() + (left - column * block_px),
                    from.begin() + (right - column * block_px),
                    out.row(static_cast<int>(r - window.row)).begin() + (left - window.column));
            }
        }
}

void TreatedReader::shares(const Window& window, Plane<float>& shares) {
    fill(window, &Block::shares, shares);
}
void TreatedReader::numbers(const Window& window, Plane<float>& sums) {
    fill(window, &Block::numbers, sums);
}

}  // namespace sunbudget
