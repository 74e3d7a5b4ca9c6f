#include "sunbudget/model/height_levels.hpp"

#include <algorithm>
#include <cmath>
#include <deque>
#include <limits>
#include <mutex>

#include "sunbudget/physics/levels.hpp"
#include "sunbudget/raster/output_file.hpp"

namespace sunbudget {

namespace {

constexpr float nan_value = std::numeric_limits<float>::quiet_NaN();

long floor_to(long value, long step) {
    const long down = value / step;
    return (value % step < 0 ? down - 1 : down) * step;
}

/// Maximum and mean of a cell, side by side in the file.
struct Cell {
    float maximum_m;
    float mean_m;
};

}  // namespace

struct HeightLevels::Store {
    int level_count;
    long piece_px;  ///< pieces of this many pixels a side are made at once, all levels
    Window area;    ///< in pixels, on borders of pieces
    Window ground;  ///< pixels on which the rasters lie
    std::deque<std::once_flag> made;  ///< row by row of pieces
    std::vector<OutputFile> files;    ///< one a level, cells row by row

    [[nodiscard]] long pieces_across() const { return area.width / piece_px; }
    [[nodiscard]] long cells_across(int level) const { return area.width >> level; }

    [[nodiscard]] Plane<float> read_piece(const Window& piece, ElevationReader& reader) const;
    void make_piece(long piece_column, long piece_row, ElevationReader& reader);
    void ensure(const Window& cells, int level, ElevationReader& reader);
    [[nodiscard]] LevelPatch patch(int level, const Window& window, ElevationReader& reader);
};

/// Heights of a piece; where no raster lies none is asked, which would cost as much as where one does.
Plane<float> HeightLevels::Store::read_piece(const Window& piece, ElevationReader& reader) const {
    Plane<float> heights_m(piece.width, piece.height, nan_value);
    const long left = std::max(piece.column, ground.column), top = std::max(piece.row, ground.row);
    const long right = std::min(piece.column + piece.width, ground.column + ground.width);
    const long bottom = std::min(piece.row + piece.height, ground.row + ground.height);
    if (left >= right || top >= bottom) return heights_m;
    Plane<float> part;
    reader.read({left, top, static_cast<int>(right - left), static_cast<int>(bottom - top)}, part);
    for (int r = 0; r < part.height(); ++r)
        std::ranges::copy(
            part.row(r),
            heights_m.row(static_cast<int>(top - piece.row) + r).begin() + (left - piece.column));
    return heights_m;
}

void HeightLevels::Store::make_piece(long piece_column, long piece_row, ElevationReader& reader) {
    const int side = static_cast<int>(piece_px);
    const Window piece{area.column + piece_column * piece_px, area.row + piece_row * piece_px, side,
                       side};
    const auto heights_m = read_piece(piece, reader);
    const auto made_levels = build_levels(heights_m, level_count);
    std::vector<Cell> row;
    for (int level = 1; level <= level_count; ++level) {
        const auto& cells = made_levels[static_cast<std::size_t>(level - 1)];
        const int across = cells.maximum_m.width();
        row.resize(static_cast<std::size_t>(across));
        for (int r = 0; r < cells.maximum_m.height(); ++r) {
            for (int c = 0; c < across; ++c)
                row[static_cast<std::size_t>(c)] = {cells.maximum_m.at(c, r),
                                                    cells.mean_m.at(c, r)};
            const long at = (piece_row * across + r) * cells_across(level) + piece_column * across;
            files[static_cast<std::size_t>(level - 1)].write(
                static_cast<std::uint64_t>(at) * sizeof(Cell), std::as_bytes(std::span(row)));
        }
    }
}

/// Makes the pieces that hold a window of cells; another thread may be waiting for the same ones.
void HeightLevels::Store::ensure(const Window& cells, int level, ElevationReader& reader) {
    const long per_piece = piece_px >> level;
    const long last_column = (cells.column + cells.width - 1) / per_piece,
               last_row = (cells.row + cells.height - 1) / per_piece;
    for (long row = cells.row / per_piece; row <= last_row; ++row)
        for (long column = cells.column / per_piece; column <= last_column; ++column)
            std::call_once(made[static_cast<std::size_t>(row * pieces_across() + column)],
                           [&] { make_piece(column, row, reader); });
}

LevelPatch HeightLevels::Store::patch(int level, const Window& window, ElevationReader& reader) {
    Plane<float> maximum_m(window.width, window.height, nan_value),
        mean_m(window.width, window.height, nan_value);
    // The window's part that lies in the area, in cells counted from the area's corner.
    const long first_column = window.column - (area.column >> level),
               first_row = window.row - (area.row >> level);
    const long left = std::max(0L, first_column), top = std::max(0L, first_row);
    const long right = std::min(first_column + window.width, cells_across(level));
    const long bottom =
        std::min(first_row + window.height, static_cast<long>(area.height >> level));
    if (left < right && top < bottom) {
        ensure({left, top, static_cast<int>(right - left), static_cast<int>(bottom - top)}, level,
               reader);
        std::vector<Cell> row(static_cast<std::size_t>(right - left));
        for (long r = top; r < bottom; ++r) {
            files[static_cast<std::size_t>(level - 1)].read(
                static_cast<std::uint64_t>(r * cells_across(level) + left) * sizeof(Cell),
                std::as_writable_bytes(std::span(row)));
            for (std::size_t i = 0; i < row.size(); ++i) {
                const auto c = static_cast<std::size_t>(left - first_column) + i;
                maximum_m.row(static_cast<int>(r - first_row))[c] = row[i].maximum_m;
                mean_m.row(static_cast<int>(r - first_row))[c] = row[i].mean_m;
            }
        }
    }
    return make_level_patch(level, window, maximum_m, mean_m);
}

HeightLevels::HeightLevels(std::span<const Source> sources, const Grid& grid, int levels,
                           double step_m, const Sight& sight,
                           const std::filesystem::path& scratch_folder)
    : store_(std::make_unique<Store>()) {
    auto& s = *store_;
    s.level_count = levels;
    constexpr long usual_piece_px = 1024;
    s.piece_px = std::max(usual_piece_px, 1L << levels);
    // A few pixels more: the outline is of a sample of places.
    constexpr int spare_px = 8;
    auto ground = extent_on_grid(sources, grid);
    ground = {ground.column - spare_px, ground.row - spare_px, ground.width + 2 * spare_px,
              ground.height + 2 * spare_px};
    s.ground = ground;
    // Looks interpolate between cells, so a little more than the reach.
    const long margin = static_cast<long>(std::ceil(sight.reach_m / step_m)) + (4L << levels);
    const long left = floor_to(std::max(-margin, ground.column), s.piece_px),
               top = floor_to(std::max(-margin, ground.row), s.piece_px);
    const long right = floor_to(
        std::min(grid.width + margin, ground.column + ground.width) + s.piece_px - 1, s.piece_px);
    const long bottom = floor_to(
        std::min(grid.height + margin, ground.row + ground.height) + s.piece_px - 1, s.piece_px);
    s.area = {left, top, static_cast<int>(std::max(0L, right - left)),
              static_cast<int>(std::max(0L, bottom - top))};
    const auto pieces = static_cast<std::size_t>(s.pieces_across() * (s.area.height / s.piece_px));
    for (std::size_t i = 0; i < pieces; ++i) s.made.emplace_back();
    for (int level = 1; level <= levels; ++level) {
        auto file = OutputFile::create(scratch_folder / ("levels-" + std::to_string(level)));
        file.truncate(static_cast<std::uint64_t>(s.cells_across(level)) *
                      static_cast<std::uint64_t>(s.area.height >> level) * sizeof(Cell));
        s.files.push_back(std::move(file));
    }
}

HeightLevels::~HeightLevels() {
    for (const auto& file : store_->files) {
        std::error_code ignored;
        std::filesystem::remove(file.path(), ignored);
    }
}

int HeightLevels::levels() const {
    return store_->level_count;
}

std::vector<LevelPatch> HeightLevels::patches(const Window& block, ElevationReader& reader) {
    std::vector<LevelPatch> found;
    for (int level = 1; level <= store_->level_count; ++level)
        found.push_back(store_->patch(level, level_window(block, level), reader));
    return found;
}

}  // namespace sunbudget
