#include "block_frame.hpp"

#include <algorithm>
#include <cmath>
#include <numbers>

#include "sunbudget/model/shading.hpp"

namespace sunbudget {

namespace {

PixelMatrix between(const PixelMatrix& a, const PixelMatrix& b, double share) {
    const auto mix = [share](double x, double y) { return x + share * (y - x); };
    return {mix(a.east_per_column, b.east_per_column), mix(a.east_per_row, b.east_per_row),
            mix(a.north_per_column, b.north_per_column), mix(a.north_per_row, b.north_per_row)};
}

}  // namespace

PixelMatrix BlockFrame::left(double share) const {
    return between(corner[0], corner[2], share);
}
PixelMatrix BlockFrame::right(double share) const {
    return between(corner[1], corner[3], share);
}

std::optional<BlockFrame> frame_of(const Window& block, const Locator& locator) {
    const double left = static_cast<double>(block.column) + 0.5,
                 top = static_cast<double>(block.row) + 0.5;
    const double right = left + block.width - 1, bottom = top + block.height - 1;
    const std::array corners{locator.matrix(left, top), locator.matrix(right, top),
                             locator.matrix(left, bottom), locator.matrix(right, bottom)};
    const auto middle = locator.matrix((left + right) / 2, (top + bottom) / 2);
    const auto place = locator.at((left + right) / 2, (top + bottom) / 2);
    if (!middle || !place) return std::nullopt;
    BlockFrame frame{{}, *middle, *place};
    // Where the globe's edge cuts a corner off, the middle's matrix serves there.
    for (std::size_t i = 0; i < 4; ++i) frame.corner[i] = corners[i].value_or(*middle);
    return frame;
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
