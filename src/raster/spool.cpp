#include "sunbudget/raster/spool.hpp"

#include <fmt/format.h>

#include <atomic>
#include <cassert>
#include <charconv>
#include <fstream>
#include <mutex>
#include <sstream>
#include <string>

#include "sunbudget/base/digest.hpp"
#include "sunbudget/base/error.hpp"
#include "sunbudget/base/text.hpp"
#include "sunbudget/raster/output_file.hpp"

namespace sunbudget {

namespace fs = std::filesystem;

namespace {
fs::path index_of(const fs::path& file) {
    return file.string() + ".index";
}

std::span<const std::byte> bytes_of_text(std::string_view text) {
    return std::as_bytes(std::span(text.data(), text.size()));
}

/// A line of the index: the text, its checksum, a line end.
std::string sealed(const std::string& text) {
    return fmt::format("{} {:016x}\n", text, tile_checksum(bytes_of_text(text)));
}

/// The text of a line that is whole.
std::optional<std::string> unsealed(const std::string& line) {
    const auto space = line.rfind(' ');
    if (space == std::string::npos) return std::nullopt;
    auto text = line.substr(0, space);
    if (sealed(text) != line + "\n") return std::nullopt;
    return text;
}

std::string first_line(const Layout& layout) {
    return sealed(fmt::format("sunbudget-spool 1 {} {} {} {} {}", layout.width, layout.height,
                              layout.tile, layout.bands,
                              layout.sample == Sample::float32 ? "float32" : "uint16"));
}

std::string text_of(const BlockStatistics& block) {
    if (block.count == 0) return "0";
    return fmt::format("{},{},{},{},{}", block.count, shortest(block.min), shortest(block.max),
                       shortest(block.mean), shortest(block.squares));
}

std::string line_of(const TileKey& key, const SpooledTile& tile) {
    auto text = fmt::format("tile {} {} {} {} {} {} {:016x}", key.level, key.band, key.column,
                            key.row, tile.offset, tile.length, tile.checksum);
    for (const auto& block : tile.blocks) text += " " + text_of(block);
    return sealed(text);
}

std::optional<BlockStatistics> block_of(const std::string& text) {
    if (text == "0") return BlockStatistics{};
    std::vector<double> numbers;
    for (const auto& part : split(text, ','))
        if (const auto number = parse_number(part)) numbers.push_back(*number);
    if (numbers.size() != 5) return std::nullopt;
    return BlockStatistics{static_cast<std::uint64_t>(numbers[0]), numbers[1], numbers[2],
                           numbers[3], numbers[4]};
}

struct IndexLine {
    TileKey key;
    SpooledTile tile;
};

/// The tile a line tells of, if it is a whole line of ours.
std::optional<IndexLine> index_line(const std::string& line) {
    const auto text = unsealed(line);
    if (!text) return std::nullopt;
    const auto words = split(*text, ' ');
    if (words.size() < 8 || words[0] != "tile") return std::nullopt;
    std::array<std::int64_t, 6> n{};
    for (std::size_t i = 0; i < n.size(); ++i) {
        const auto number = parse_integer(words[i + 1]);
        if (!number || *number < 0) return std::nullopt;
        n[i] = *number;
    }
    IndexLine found;
    found.key = {static_cast<int>(n[0]), static_cast<int>(n[1]), static_cast<int>(n[2]),
                 static_cast<int>(n[3])};
    found.tile.offset = static_cast<std::uint64_t>(n[4]);
    found.tile.length = static_cast<std::uint64_t>(n[5]);
    const auto& sum = words[7];
    std::from_chars(sum.data(), sum.data() + sum.size(), found.tile.checksum, 16);
    for (std::size_t i = 8; i < words.size(); ++i) {
        const auto block = block_of(words[i]);
        if (!block) return std::nullopt;
        found.tile.blocks.push_back(*block);
    }
    return found;
}

std::string whole_text(const OutputFile& file) {
    std::string text(file.size(), '\0');
    file.read(0, std::as_writable_bytes(std::span(text.data(), text.size())));
    return text;
}
}  // namespace

struct Spool::State {
    State(OutputFile spooled, OutputFile lines, const Layout& of)
        : layout(of), data(std::move(spooled)), index(std::move(lines)), tiles(of.tile_count()) {}

    void keep(const TileKey& key, SpooledTile tile);
    void write_line(const std::string& line);
    void take_index();
    void take_line(const std::string& line);
    [[nodiscard]] bool intact(const SpooledTile& tile) const;

    Layout layout;
    OutputFile data;
    OutputFile index;
    std::atomic<std::uint64_t> data_end{0};

    mutable std::mutex lock;  // of what follows, and of the end of the index
    std::vector<SpooledTile> tiles;
    std::uint64_t index_end = 0;
    std::size_t present = 0;
    std::uint64_t bytes = 0;
};

void Spool::State::keep(const TileKey& key, SpooledTile tile) {
    auto& place = tiles[layout.index(key)];
    if (place.length == 0) ++present;
    bytes += tile.length - place.length;
    place = std::move(tile);
}

void Spool::State::write_line(const std::string& line) {
    index.write(index_end, bytes_of_text(line));
    index_end += line.size();
}

bool Spool::State::intact(const SpooledTile& tile) const {
    if (tile.length == 0 || tile.offset > data.size() || tile.length > data.size() - tile.offset)
        return false;
    std::vector<std::byte> buffer(tile.length);
    data.read(tile.offset, buffer);
    return tile_checksum(buffer) == tile.checksum;
}

/// Reads the index an earlier run left and makes it ready for more lines.
void Spool::State::take_index() {
    const auto text = whole_text(index);
    const auto head = first_line(layout);
    const auto end = text.rfind('\n') + 1;  // 0 where not even the first line is whole
    index.truncate(end);
    index_end = end;
    if (end == 0) return write_line(head);
    if (!text.starts_with(head))
        throw Error(Cause::output, "the unfinished work there is of another raster",
                    data.path().string(), "start anew with --fresh, or choose another output");
    std::istringstream lines(text.substr(head.size(), end - head.size()));
    for (std::string line; std::getline(lines, line);) take_line(line);
}

void Spool::State::take_line(const std::string& line) {
    auto found = index_line(line);
    if (found && layout.has(found->key) && intact(found->tile))
        keep(found->key, std::move(found->tile));
}

Spool::Spool(std::unique_ptr<State> state) : state_(std::move(state)) {}
Spool::Spool(Spool&&) noexcept = default;
Spool& Spool::operator=(Spool&&) noexcept = default;
Spool::~Spool() = default;

Spool Spool::create(const fs::path& file, const Layout& layout) {
    auto data = OutputFile::create(file);
    try {
        auto index = OutputFile::create(index_of(file));
        auto state = std::make_unique<State>(std::move(data), std::move(index), layout);
        state->write_line(first_line(layout));
        return Spool(std::move(state));
    } catch (...) {
        std::error_code ignored;
        fs::remove(file, ignored);
        throw;
    }
}

Spool Spool::reopen(const fs::path& file, const Layout& layout) {
    auto data = OutputFile::open(file, true);
    // A run may have been killed before it had an index.
    const bool indexed = fs::exists(fs::symlink_status(index_of(file)));
    auto index =
        indexed ? OutputFile::open(index_of(file), true) : OutputFile::create(index_of(file));
    auto state = std::make_unique<State>(std::move(data), std::move(index), layout);
    state->take_index();
    state->data_end = state->data.size();
    return Spool(std::move(state));
}

void Spool::append(const TileKey& key, std::span<const std::byte> bytes,
                   std::span<const BlockStatistics> blocks) {
    assert(state_->layout.has(key) && !bytes.empty());
    SpooledTile tile{state_->data_end.fetch_add(bytes.size()),
                     bytes.size(),
                     tile_checksum(bytes),
                     {blocks.begin(), blocks.end()}};
    state_->data.write(tile.offset, bytes);
    const auto line = line_of(key, tile);
    const std::lock_guard guard(state_->lock);
    state_->write_line(line);
    state_->keep(key, std::move(tile));
}

bool Spool::has(const TileKey& key) const {
    const std::lock_guard guard(state_->lock);
    return state_->tiles[state_->layout.index(key)].length > 0;
}

std::optional<SpooledTile> Spool::find(const TileKey& key) const {
    const std::lock_guard guard(state_->lock);
    const auto& tile = state_->tiles[state_->layout.index(key)];
    if (tile.length == 0) return std::nullopt;
    return tile;
}

std::vector<std::byte> Spool::read(const TileKey& key) const {
    const auto tile = find(key);
    assert(tile);
    std::vector<std::byte> bytes(tile->length);
    state_->data.read(tile->offset, bytes);
    if (tile_checksum(bytes) != tile->checksum)
        throw Error(Cause::output,
                    fmt::format("tile {}, {} of band {}, level {}, is damaged", key.column, key.row,
                                key.band + 1, key.level),
                    path().string(), "run again: damaged tiles are made anew");
    return bytes;
}

std::size_t Spool::missing() const {
    const std::lock_guard guard(state_->lock);
    return state_->tiles.size() - state_->present;
}

std::uint64_t Spool::bytes() const {
    const std::lock_guard guard(state_->lock);
    return state_->bytes;
}

void Spool::sync() {
    state_->data.sync();
    state_->index.sync();
}

void Spool::remove() {
    const auto file = path();
    state_->data.close();
    state_->index.close();
    std::error_code failure;
    for (const auto& name : {index_of(file), file})
        if (!fs::remove(name, failure) && failure)
            throw output_error(name, "cannot remove the file", failure.value());
}

const Layout& Spool::layout() const noexcept {
    return state_->layout;
}
const fs::path& Spool::path() const noexcept {
    return state_->data.path();
}

}  // namespace sunbudget
