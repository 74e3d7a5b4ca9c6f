#include "sunbudget/model/smooth_field.hpp"

#include <array>
#include <cmath>
#include <limits>
#include <mutex>
#include <set>
#include <unordered_map>

#include "sunbudget/base/simd.hpp"

namespace sunbudget {

namespace {

constexpr int largest_cell_px = 2048;
constexpr int shared_above_px = 256;  // smaller cells belong to one block and die with it
constexpr double height_cell_m = 1000;
constexpr float nan_value = std::numeric_limits<float>::quiet_NaN();

/// A node's place in quarter pixels and half height cells.
struct NodeKey {
    long column4 = 0;
    long row4 = 0;
    int height2 = 0;
    friend bool operator==(const NodeKey&, const NodeKey&) = default;
};
struct NodeHash {
    std::size_t operator()(const NodeKey& key) const noexcept {
        std::size_t hash = static_cast<std::size_t>(key.column4);
        hash = hash * 0x9e3779b97f4a7c15u + static_cast<std::size_t>(key.row4);
        return hash * 0x9e3779b97f4a7c15u + static_cast<std::size_t>(key.height2);
    }
};

using Values = std::vector<double>;

/// Values at nodes, each computed once or, when two threads meet, twice alike.
class Nodes {
  public:
    Nodes(const SmoothField::Shape& shape, const SmoothField::Function& function)
        : shape_(shape), function_(function) {}

    const Values& at(const NodeKey& key, int thread) {
        {
            const std::lock_guard hold(mutex_);
            if (const auto found = values_.find(key); found != values_.end()) return found->second;
        }
        Values values(shape_.values);
        const double height_m =
            shape_.constant_height_m.value_or(key.height2 * (height_cell_m / 2));
        function_(static_cast<double>(key.column4) / 4, static_cast<double>(key.row4) / 4, height_m,
                  thread, values);
        const std::lock_guard hold(mutex_);
        return values_.try_emplace(key, std::move(values)).first->second;
    }

  private:
    const SmoothField::Shape& shape_;
    const SmoothField::Function& function_;
    std::mutex mutex_;
    std::unordered_map<NodeKey, Values, NodeHash> values_;
};

/// A square of pixels [column, column + size) x [row, row + size); its nodes stop at the raster's
/// last pixel centres.
struct Cell {
    int column = 0;
    int row = 0;
    int size = largest_cell_px;
    int span_columns = 0;  ///< pixels from the first node to the last
    int span_rows = 0;
};

Cell cell_of(int column, int row, int size, const SmoothField::Shape& shape) {
    return {column, row, size, std::min(size, shape.width - 1 - column),
            std::min(size, shape.height - 1 - row)};
}

NodeKey node_of(const Cell& cell, int quarter_column, int quarter_row, int height2) {
    return {4L * cell.column + static_cast<long>(quarter_column) * cell.span_columns,
            4L * cell.row + static_cast<long>(quarter_row) * cell.span_rows, height2};
}

/// Weights of the quadratic through 0, 1/2 and 1.
std::array<double, 3> quadratic(double u) {
    return {(1 - u) * (1 - 2 * u), 4 * u * (1 - u), u * (2 * u - 1)};
}

/// The polynomial in u that goes through three values at 0, 1/2 and 1.
std::array<double, 3> polynomial(double v0, double v1, double v2) {
    return {v0, 4 * v1 - 3 * v0 - v2, 2 * (v0 + v2) - 4 * v1};
}

/// One row of pixels from the bi-quadratic in place (u) and height (s), s in height cells from the
/// cell's floor. Pixels whose height lies in another cell keep what they have.
SUNBUDGET_CLONES
void fill_row(const float* __restrict heights_m, float* __restrict out, int count, float first_u,
              float step_u, float floor_m, const float* __restrict c) {
    constexpr float per_cell = static_cast<float>(1 / height_cell_m);
    const float ceiling_m = floor_m + static_cast<float>(height_cell_m);
    for (int i = 0; i < count; ++i) {
        const float u = first_u + step_u * static_cast<float>(i);
        const float s = (heights_m[i] - floor_m) * per_cell;
        const float c0 = c[0] + u * (c[1] + u * c[2]);
        const float c1 = c[3] + u * (c[4] + u * c[5]);
        const float c2 = c[6] + u * (c[7] + u * c[8]);
        const float value = c0 + s * (c1 + s * c2);
        out[i] = heights_m[i] >= floor_m && heights_m[i] < ceiling_m ? value : out[i];
    }
}

SUNBUDGET_CLONES
void fill_row_at_one_height(float* __restrict out, int count, float first_u, float step_u,
                            const float* __restrict c) {
    for (int i = 0; i < count; ++i) {
        const float u = first_u + step_u * static_cast<float>(i);
        out[i] = c[0] + u * (c[1] + u * c[2]);
    }
}

/// The height cells that a window's pixels lie in. Neighbours mostly share one: the set is asked
/// only where the height leaves it.
std::set<int> height_cells_of(const Window& window, const Window& frame,
                              const Plane<float>& heights_m) {
    std::set<int> cells;
    const auto left = static_cast<std::size_t>(window.column - frame.column);
    const int top = static_cast<int>(window.row - frame.row);
    float floor_m = 0, ceiling_m = 0;
    for (int r = 0; r < window.height; ++r)
        for (const float height_m :
             heights_m.row(top + r).subspan(left, static_cast<std::size_t>(window.width))) {
            if ((height_m >= floor_m && height_m < ceiling_m) || !std::isfinite(height_m)) continue;
            const double cell = std::floor(static_cast<double>(height_m) / height_cell_m);
            cells.insert(static_cast<int>(cell));
            floor_m = static_cast<float>(cell * height_cell_m);
            ceiling_m = static_cast<float>((cell + 1) * height_cell_m);
        }
    return cells;
}

}  // namespace

struct SmoothField::Work {
    Shape shape;
    Function function;
    Nodes shared;

    Work(Shape s, Function f) : shape(s), function(std::move(f)), shared(shape, function) {}

    [[nodiscard]] bool varies_in_height() const { return !shape.constant_height_m; }

    /// Whether the quadratics meet the function between the nodes, to the tolerance.
    bool good_enough(const Cell& cell, int height_cell, Nodes& nodes, int thread) const {
        const int height2 = varies_in_height() ? 2 * height_cell + 1 : 0;
        std::array<const Values*, 9> known{};
        for (int r = 0; r < 3; ++r)
            for (int c = 0; c < 3; ++c)
                known[static_cast<std::size_t>(3 * r + c)] =
                    &nodes.at(node_of(cell, 2 * c, 2 * r, height2), thread);
        for (const int quarter_row : {1, 3})
            for (const int quarter_column : {1, 3}) {
                const auto& truth =
                    nodes.at(node_of(cell, quarter_column, quarter_row, height2), thread);
                const auto across = quadratic(quarter_column / 4.0);
                const auto down = quadratic(quarter_row / 4.0);
                for (std::size_t v = 0; v < shape.values; ++v) {
                    double guess = 0;
                    for (std::size_t n = 0; n < 9; ++n)
                        guess += down[n / 3] * across[n % 3] * (*known[n])[v];
                    // Written so that a NaN on either side is not good enough.
                    if (!(std::abs(guess - truth[v]) <= shape.tolerance)) return false;
                }
            }
        return true;
    }
};

/// A leaf cell at one height cell, cut to the block's window.
struct Piece {
    Cell cell;
    int height_cell = 0;
    Window part;                            ///< pixels of the raster
    std::array<const Values*, 27> nodes{};  ///< height, row, column; 9 where the height is constant
};

struct SmoothField::Block::Cells {
    Window window;
    Window frame;  ///< what the planes of heights and results cover
    bool varies_in_height = false;
    std::unique_ptr<Nodes> own;
    std::vector<Piece> pieces;

    void add(Nodes& nodes, const Cell& cell, int height_cell, const Window& part, int thread) {
        Piece piece{cell, height_cell, part, {}};
        const int heights = varies_in_height ? 3 : 1;
        for (int k = 0; k < heights; ++k)
            for (int r = 0; r < 3; ++r)
                for (int c = 0; c < 3; ++c)
                    piece.nodes[static_cast<std::size_t>(9 * k + 3 * r + c)] = &nodes.at(
                        node_of(cell, 2 * c, 2 * r, varies_in_height ? 2 * height_cell + k : 0),
                        thread);
        pieces.push_back(piece);
    }

    void collect(Work& work, const Cell& cell, int height_cell, int thread) {
        const long left = std::max<long>(cell.column, window.column);
        const long top = std::max<long>(cell.row, window.row);
        const long right = std::min<long>(cell.column + cell.size, window.column + window.width);
        const long bottom = std::min<long>(cell.row + cell.size, window.row + window.height);
        if (left >= right || top >= bottom) return;
        Nodes& nodes = cell.size > shared_above_px ? work.shared : *own;
        if (cell.size <= 2 || work.good_enough(cell, height_cell, nodes, thread)) {
            add(nodes, cell, height_cell,
                {left, top, static_cast<int>(right - left), static_cast<int>(bottom - top)},
                thread);
            return;
        }
        const int half = cell.size / 2;
        for (const int down : {0, half})
            for (const int across : {0, half})
                if (cell.column + across < work.shape.width && cell.row + down < work.shape.height)
                    collect(work, cell_of(cell.column + across, cell.row + down, half, work.shape),
                            height_cell, thread);
    }

    void fill_piece(const Piece& piece, std::size_t value, const Plane<float>& heights_m,
                    Plane<float>& out) const;
    void fill_pixels(const Piece& piece, std::size_t value, const Plane<float>& heights_m,
                     Plane<float>& out) const;
};

void SmoothField::Block::Cells::fill_piece(const Piece& piece, std::size_t value,
                                           const Plane<float>& heights_m, Plane<float>& out) const {
    const auto& cell = piece.cell;
    const auto first = static_cast<std::size_t>(piece.part.column - frame.column);
    const double step_u = cell.span_columns > 0 ? 1.0 / cell.span_columns : 0;
    const double first_u = static_cast<double>(piece.part.column - cell.column) * step_u;
    for (int r = 0; r < piece.part.height; ++r) {
        const double v = cell.span_rows > 0
                             ? static_cast<double>(piece.part.row + r - cell.row) / cell.span_rows
                             : 0;
        const auto down = quadratic(v);
        std::array<std::array<double, 3>, 3> along{};  // height node, column node
        for (std::size_t k = 0; k < (varies_in_height ? 3u : 1u); ++k)
            for (std::size_t c = 0; c < 3; ++c)
                for (std::size_t n = 0; n < 3; ++n)
                    along[k][c] += down[n] * (*piece.nodes[9 * k + 3 * n + c])[value];
        const int out_row = static_cast<int>(piece.part.row + r - frame.row);
        float* target = out.row(out_row).data() + first;
        std::array<float, 9> coefficients{};
        if (!varies_in_height) {
            const auto p = polynomial(along[0][0], along[0][1], along[0][2]);
            for (std::size_t i = 0; i < 3; ++i) coefficients[i] = static_cast<float>(p[i]);
            fill_row_at_one_height(target, piece.part.width, static_cast<float>(first_u),
                                   static_cast<float>(step_u), coefficients.data());
            continue;
        }
        std::array<std::array<double, 3>, 3> in_u{};
        for (std::size_t k = 0; k < 3; ++k)
            in_u[k] = polynomial(along[k][0], along[k][1], along[k][2]);
        for (std::size_t i = 0; i < 3; ++i) {
            const auto in_s = polynomial(in_u[0][i], in_u[1][i], in_u[2][i]);
            for (std::size_t m = 0; m < 3; ++m)
                coefficients[3 * m + i] = static_cast<float>(in_s[m]);
        }
        fill_row(heights_m.row(out_row).data() + first, target, piece.part.width,
                 static_cast<float>(first_u), static_cast<float>(step_u),
                 static_cast<float>(piece.height_cell * height_cell_m), coefficients.data());
    }
}

/// Cells of two pixels: every pixel is a node, and a node without a value spoils itself alone.
void SmoothField::Block::Cells::fill_pixels(const Piece& piece, std::size_t value,
                                            const Plane<float>& heights_m,
                                            Plane<float>& out) const {
    const auto& cell = piece.cell;
    for (int r = 0; r < piece.part.height; ++r)
        for (int i = 0; i < piece.part.width; ++i) {
            const long column = piece.part.column + i, row = piece.part.row + r;
            // Node 0, 1 or 2 along each axis; a span of one pixel has its second pixel at node 2.
            const auto node = [](long offset, int span) {
                return static_cast<std::size_t>(offset == 0 || span == 0 ? 0 : 2 * offset / span);
            };
            const std::size_t n = 3 * node(row - cell.row, cell.span_rows) +
                                  node(column - cell.column, cell.span_columns);
            const int x = static_cast<int>(column - frame.column),
                      y = static_cast<int>(row - frame.row);
            if (!varies_in_height) {
                out.at(x, y) = static_cast<float>((*piece.nodes[n])[value]);
                continue;
            }
            const double s =
                static_cast<double>(heights_m.at(x, y)) / height_cell_m - piece.height_cell;
            if (!(s >= 0 && s < 1)) continue;
            const auto weights = quadratic(s);
            double sum = 0;
            for (std::size_t k = 0; k < 3; ++k)
                sum += weights[k] * (*piece.nodes[9 * k + n])[value];
            out.at(x, y) = static_cast<float>(sum);
        }
}

SmoothField::Block::Block() = default;
SmoothField::Block::~Block() = default;
SmoothField::Block::Block(Block&&) noexcept = default;
SmoothField::Block& SmoothField::Block::operator=(Block&&) noexcept = default;

void SmoothField::Block::fill(std::size_t value, const Plane<float>& heights_m,
                              Plane<float>& out) const {
    const auto& window = cells_->window;
    const auto left = static_cast<std::size_t>(window.column - cells_->frame.column);
    const int top = static_cast<int>(window.row - cells_->frame.row);
    // At one height the pieces cover every pixel; else a height may be missing.
    for (int r = 0; cells_->varies_in_height && r < window.height; ++r)
        std::fill_n(out.row(top + r).data() + left, window.width, nan_value);
    for (const auto& piece : cells_->pieces) {
        if (piece.cell.size <= 2)
            cells_->fill_pixels(piece, value, heights_m, out);
        else
            cells_->fill_piece(piece, value, heights_m, out);
    }
}

SmoothField::SmoothField(Shape shape, Function function)
    : work_(std::make_unique<Work>(shape, std::move(function))) {}
SmoothField::~SmoothField() = default;

SmoothField::Block SmoothField::prepare(const Window& window, const Window& frame,
                                        const Plane<float>& heights_m, int thread) {
    Block block;
    block.cells_ = std::make_unique<Block::Cells>();
    auto& cells = *block.cells_;
    cells.window = window;
    cells.frame = frame;
    cells.varies_in_height = work_->varies_in_height();
    cells.own = std::make_unique<Nodes>(work_->shape, work_->function);
    const auto height_cells =
        cells.varies_in_height ? height_cells_of(window, frame, heights_m) : std::set<int>{0};
    const int column = static_cast<int>(window.column) / largest_cell_px * largest_cell_px;
    const int row = static_cast<int>(window.row) / largest_cell_px * largest_cell_px;
    for (const int height_cell : height_cells)
        cells.collect(*work_, cell_of(column, row, largest_cell_px, work_->shape), height_cell,
                      thread);
    return block;
}

}  // namespace sunbudget
