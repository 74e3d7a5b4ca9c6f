#include "sunbudget/raster/pyramid.hpp"

#include <algorithm>
#include <cassert>
#include <cmath>
#include <limits>
#include <map>
#include <mutex>
#include <type_traits>
#include <variant>

#include "sunbudget/base/simd.hpp"
#include "sunbudget/raster/tile_codec.hpp"

namespace sunbudget {

namespace {
/// Quanta are powers of two: their inverse is exact, and multiplying by it is dividing.
inline double nearest_multiple(double value, double quantum, double inverse) {
    return std::nearbyint(value * inverse) * quantum + 0.0;  // + 0.0 turns -0 into 0
}

/// NaN where no pixel is valid.
inline double mean_of_valid(float a, float b, float c, float d) {
    const auto value = [](float v) { return static_cast<double>(zero_if_nan(v)); };
    const double sum = 0.0 + value(a) + value(b) + value(c) + value(d);
    const int valid =
        zero_or_one(a == a) + zero_or_one(b == b) + zero_or_one(c == c) + zero_or_one(d == d);
    return sum / static_cast<double>(valid);
}

SUNBUDGET_CLONES void fold_rows(const float* upper, const float* lower, std::size_t count,
                                float* out) {
    for (std::size_t i = 0; i < count; ++i)
        out[i] = static_cast<float>(
            mean_of_valid(upper[2 * i], upper[2 * i + 1], lower[2 * i], lower[2 * i + 1]));
}

SUNBUDGET_CLONES void fold_rows_rounded(const float* upper, const float* lower, std::size_t count,
                                        double quantum, float* out) {
    const double inverse = 1 / quantum;
    for (std::size_t i = 0; i < count; ++i)
        out[i] = static_cast<float>(nearest_multiple(
            mean_of_valid(upper[2 * i], upper[2 * i + 1], lower[2 * i], lower[2 * i + 1]), quantum,
            inverse));
}

SUNBUDGET_CLONES void round_values(float* row, std::size_t count, double quantum) {
    const double inverse = 1 / quantum;
    for (std::size_t i = 0; i < count; ++i)
        row[i] =
            static_cast<float>(nearest_multiple(static_cast<double>(row[i]), quantum, inverse));
}

/// Folds a whole tile into one quarter of its parent.
void fold(const Plane<float>& child, int left, int top, float quantum, bool nearest,
          Plane<float>& parent) {
    const auto half = static_cast<std::size_t>(child.width() / 2);
    for (int r = 0; r < child.height() / 2; ++r) {
        const auto upper = child.row(2 * r), lower = child.row(2 * r + 1);
        float* out = parent.row(top + r).data() + left;
        if (nearest)
            for (std::size_t i = 0; i < half; ++i) out[i] = upper[2 * i];
        else if (quantum > 0)
            fold_rows_rounded(upper.data(), lower.data(), half, static_cast<double>(quantum), out);
        else
            fold_rows(upper.data(), lower.data(), half, out);
    }
}

void fold(const Plane<std::uint16_t>& child, int left, int top, float, bool,
          Plane<std::uint16_t>& parent) {
    for (int r = 0; r < child.height() / 2; ++r) {
        const auto in = child.row(2 * r);
        const auto out = parent.row(top + r).subspan(static_cast<std::size_t>(left));
        for (std::size_t i = 0; i < in.size() / 2; ++i) out[i] = in[2 * i];
    }
}

template <typename T>
constexpr T nothing = std::is_same_v<T, float> ? std::numeric_limits<T>::quiet_NaN() : T{};

TileKey parent_of(const TileKey& key) {
    return {key.level + 1, key.band, key.column / 2, key.row / 2};
}

/// How many tiles fold into this one: fewer than four at the raster's right and lower edges.
int children_of(const Layout& layout, const TileKey& parent) {
    const auto& below = layout.levels[static_cast<std::size_t>(parent.level - 1)];
    return std::min(2, below.columns - 2 * parent.column) *
           std::min(2, below.rows - 2 * parent.row);
}

/// The pyramid of one sample type.
template <typename T>
class Folder {
  public:
    Folder(const LayerFile& layer, Spool& spool, std::size_t most_bytes)
        : layout_(spool.layout()),
          quantum_(layer.quantum),
          nearest_(layer.nearest),
          most_held_(most_bytes / layout_.tile_bytes()),
          spool_(spool) {}

    void put(int band, int column, int row, const Plane<T>& pixels,
             std::span<const BlockStatistics> blocks);
    void restore();
    [[nodiscard]] std::size_t peak_bytes() const;

  private:
    /// A parent whose pixels would go beyond the memory limit holds none: when its last child has come it
    /// is made from the children in the spool.
    struct Parent {
        Plane<T> pixels;
        int waiting = 0;
    };
    [[nodiscard]] Plane<T> squared(const TileKey& key, const Plane<T>& pixels) const;
    [[nodiscard]] bool inner(const TileKey& key) const;
    void climb(TileKey key, const Plane<T>& pixels);
    [[nodiscard]] Plane<T>* parent_pixels(const TileKey& parent);
    [[nodiscard]] Plane<T> made_from_spool(const TileKey& parent) const;
    [[nodiscard]] Plane<T> taken_if_whole(const TileKey& parent);

    const Layout layout_;
    const float quantum_;
    const bool nearest_;
    const std::size_t most_held_;
    Spool& spool_;
    mutable std::mutex lock_;  // of what follows; the pixels of a parent are written without it
    std::map<std::size_t, Parent> parents_;
    std::size_t held_ = 0;  // parents with pixels
    std::size_t most_parents_ = 0;
};

/// Is the whole tile inside the raster?
template <typename T>
bool Folder<T>::inner(const TileKey& key) const {
    const auto& level = layout_.levels[static_cast<std::size_t>(key.level)];
    return (key.column + 1) * static_cast<long>(layout_.tile) <= level.width &&
           (key.row + 1) * static_cast<long>(layout_.tile) <= level.height;
}

/// A tile at the edge, with nothing beyond the edge.
template <typename T>
Plane<T> Folder<T>::squared(const TileKey& key, const Plane<T>& pixels) const {
    const int width = std::min(layout_.tile, layout_.width - key.column * layout_.tile);
    const int height = std::min(layout_.tile, layout_.height - key.row * layout_.tile);
    assert(pixels.width() >= width && pixels.height() >= height);
    Plane<T> square(layout_.tile, layout_.tile, nothing<T>);
    for (int r = 0; r < height; ++r)
        std::copy_n(pixels.row(r).begin(), width, square.row(r).begin());
    return square;
}

template <typename T>
void Folder<T>::put(int band, int column, int row, const Plane<T>& pixels,
                    std::span<const BlockStatistics> blocks) {
    const TileKey key{0, band, column, row};
    assert(layout_.has(key));
    if (!inner(key)) {
        const auto square = squared(key, pixels);
        spool_.append(key, encode_tile(square), blocks);
        climb(key, square);
    } else {
        assert(pixels.width() == layout_.tile && pixels.height() == layout_.tile);
        spool_.append(key, encode_tile(pixels), blocks);
        climb(key, pixels);
    }
}

/// Folds a tile into its parent, and the parent into its own if that makes it whole, and so on.
template <typename T>
void Folder<T>::climb(TileKey key, const Plane<T>& pixels) {
    const Plane<T>* child = &pixels;
    Plane<T> whole;
    while (key.level + 1 < static_cast<int>(layout_.levels.size())) {
        const auto parent = parent_of(key);
        if (spool_.has(parent)) return;  // from an earlier run, made of the same pixels
        const int half = layout_.tile / 2;
        if (auto* pixels_above = parent_pixels(parent))
            fold(*child, key.column % 2 * half, key.row % 2 * half, quantum_, nearest_,
                 *pixels_above);
        whole = taken_if_whole(parent);
        if (whole.empty()) return;
        spool_.append(parent, encode_tile(whole));
        child = &whole;
        key = parent;
    }
}

/// nullptr for a parent that holds no pixels.
template <typename T>
Plane<T>* Folder<T>::parent_pixels(const TileKey& parent) {
    const std::lock_guard guard(lock_);
    auto& found = parents_[layout_.index(parent)];
    if (found.waiting == 0) {
        found.waiting = children_of(layout_, parent);
        if (held_ < most_held_) {
            found.pixels = Plane<T>(layout_.tile, layout_.tile, nothing<T>);
            most_parents_ = std::max(most_parents_, ++held_);
        }
    }
    return found.pixels.empty() ? nullptr : &found.pixels;
}

template <typename T>
Plane<T> Folder<T>::made_from_spool(const TileKey& parent) const {
    Plane<T> pixels(layout_.tile, layout_.tile, nothing<T>);
    const int half = layout_.tile / 2;
    for (const int down : {0, 1})
        for (const int across : {0, 1}) {
            const TileKey child{parent.level - 1, parent.band, 2 * parent.column + across,
                                2 * parent.row + down};
            if (!layout_.has(child)) continue;
            fold(decode_tile<T>(spool_.read(child), layout_.tile), across * half, down * half,
                 quantum_, nearest_, pixels);
        }
    return pixels;
}

/// Counts one more child; gives the pixels when it was the last.
template <typename T>
Plane<T> Folder<T>::taken_if_whole(const TileKey& parent) {
    Plane<T> pixels;
    {
        const std::lock_guard guard(lock_);
        const auto found = parents_.find(layout_.index(parent));
        if (--found->second.waiting > 0) return {};
        pixels = std::move(found->second.pixels);
        parents_.erase(found);
        if (!pixels.empty()) --held_;
    }
    return pixels.empty() ? made_from_spool(parent) : std::move(pixels);
}

/// Takes in the tiles an earlier run has left in the spool without the overview tile above them.
/// The list is made before the first is taken: a parent that becomes whole here climbs on by
/// itself.
template <typename T>
void Folder<T>::restore() {
    std::vector<TileKey> orphans;
    for (int level = 0; level + 1 < static_cast<int>(layout_.levels.size()); ++level) {
        const auto& size = layout_.levels[static_cast<std::size_t>(level)];
        for (int band = 0; band < layout_.bands; ++band)
            for (int row = 0; row < size.rows; ++row)
                for (int column = 0; column < size.columns; ++column) {
                    const TileKey key{level, band, column, row};
                    if (spool_.has(key) && !spool_.has(parent_of(key))) orphans.push_back(key);
                }
    }
    for (const auto& key : orphans) climb(key, decode_tile<T>(spool_.read(key), layout_.tile));
}

template <typename T>
std::size_t Folder<T>::peak_bytes() const {
    const std::lock_guard guard(lock_);
    return most_parents_ * layout_.tile_bytes();
}
}  // namespace

void round_row(std::span<float> row, float quantum) noexcept {
    if (quantum > 0) round_values(row.data(), row.size(), static_cast<double>(quantum));
}

struct Pyramid::State {
    std::variant<std::monostate, Folder<float>, Folder<std::uint16_t>> folder;
};

Pyramid::Pyramid(const LayerFile& layer, Spool& spool, std::size_t most_bytes)
    : state_(std::make_unique<State>()) {
    assert(layout_of(layer) == spool.layout());
    if (layer.sample == Sample::float32)
        state_->folder.emplace<Folder<float>>(layer, spool, most_bytes).restore();
    else
        state_->folder.emplace<Folder<std::uint16_t>>(layer, spool, most_bytes).restore();
}
Pyramid::~Pyramid() = default;

void Pyramid::put(int band, int tile_column, int tile_row, const Plane<float>& pixels,
                  std::span<const BlockStatistics> blocks) {
    std::get<Folder<float>>(state_->folder).put(band, tile_column, tile_row, pixels, blocks);
}
void Pyramid::put(int band, int tile_column, int tile_row, const Plane<std::uint16_t>& pixels,
                  std::span<const BlockStatistics> blocks) {
    std::get<Folder<std::uint16_t>>(state_->folder)
        .put(band, tile_column, tile_row, pixels, blocks);
}

std::size_t Pyramid::peak_bytes() const {
    if (const auto* floats = std::get_if<Folder<float>>(&state_->folder))
        return floats->peak_bytes();
    return std::get<Folder<std::uint16_t>>(state_->folder).peak_bytes();
}

}  // namespace sunbudget
