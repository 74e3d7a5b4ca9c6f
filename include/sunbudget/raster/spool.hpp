#pragma once

#include <cstddef>
#include <cstdint>
#include <filesystem>
#include <memory>
#include <optional>
#include <span>
#include <vector>

#include "sunbudget/raster/layer_file.hpp"
#include "sunbudget/raster/statistics.hpp"

namespace sunbudget {

/// Where an encoded tile lies in the spool, and what came with it.
struct SpooledTile {
    std::uint64_t offset = 0;
    std::uint64_t length = 0;
    std::uint64_t checksum = 0;
    std::vector<BlockStatistics> blocks;  ///< as given to append

    friend bool operator==(const SpooledTile&, const SpooledTile&) = default;
};

/// The encoded tiles of one layer on disk in the order they came, until the layer is finished.
/// Beside the file FILE stands FILE.index: a line a tile, each with its own checksum, so that an
/// interrupted run can go on from it. Safe to use from many threads.
///
/// errors  Error(output) naming the path and the free bytes when the disk does not take or give
class Spool {
  public:
    /// A new spool; neither FILE nor FILE.index may exist.
    [[nodiscard]] static Spool create(const std::filesystem::path& file, const Layout& layout);
    /// The spool an earlier run left. Tiles whose index line or bytes are damaged are forgotten,
    /// and so is a last line that was cut short. Throws Error(output) when it is of another layout.
    [[nodiscard]] static Spool reopen(const std::filesystem::path& file, const Layout& layout);

    Spool(Spool&&) noexcept;
    Spool& operator=(Spool&&) noexcept;
    ~Spool();

    /// Keeps an encoded tile. A tile the spool has already is replaced.
    void append(const TileKey& key, std::span<const std::byte> bytes,
                std::span<const BlockStatistics> blocks = {});

    [[nodiscard]] bool has(const TileKey& key) const;
    [[nodiscard]] std::optional<SpooledTile> find(const TileKey& key) const;
    /// The bytes of a tile, after comparing them with their checksum.
    [[nodiscard]] std::vector<std::byte> read(const TileKey& key) const;
    /// Tiles that are not there yet, of all levels and bands.
    [[nodiscard]] std::size_t missing() const;
    /// Encoded bytes of all tiles that are there.
    [[nodiscard]] std::uint64_t bytes() const;
    /// Waits until the disk has tiles and index.
    void sync();
    /// Deletes both files; nothing may be asked of the spool afterwards.
    void remove();

    [[nodiscard]] const Layout& layout() const noexcept;
    [[nodiscard]] const std::filesystem::path& path() const noexcept;

  private:
    struct State;
    explicit Spool(std::unique_ptr<State> state);

    std::unique_ptr<State> state_;
};

}  // namespace sunbudget
