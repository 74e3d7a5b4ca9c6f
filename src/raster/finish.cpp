#include "sunbudget/raster/finish.hpp"

#include <fmt/format.h>
#include <tiffio.h>

#include <algorithm>
#include <cassert>
#include <cstring>
#include <functional>
#include <system_error>

#include "sunbudget/base/digest.hpp"
#include "sunbudget/base/error.hpp"
#include "sunbudget/base/parallel.hpp"
#include "sunbudget/raster/output_file.hpp"
#include "sunbudget/raster/tile_codec.hpp"
#include "tiff_handle.hpp"
#include "tiff_tags.hpp"

namespace sunbudget {

namespace fs = std::filesystem;

namespace {
/// Removes the file unless it has become what it should.
class Unfinished {
  public:
    explicit Unfinished(const fs::path& file) : file_(file) {}
    ~Unfinished() {
        std::error_code ignored;
        if (!done_) fs::remove(file_, ignored);
    }
    Unfinished(const Unfinished&) = delete;
    Unfinished& operator=(const Unfinished&) = delete;
    void done() { done_ = true; }

  private:
    fs::path file_;
    bool done_ = false;
};

/// No file made of these tiles and tags is larger.
std::uint64_t most_bytes(const Spool& spool, const TiffTags& tags) {
    const auto& layout = spool.layout();
    const std::uint64_t image_tags = 4096 + 8 * static_cast<std::uint64_t>(layout.bands);
    const std::uint64_t places = 16 * std::uint64_t{layout.tile_count()};
    return spool.bytes() + layout.levels.size() * image_tags + tags.bytes() + places;
}

void set_image_tags(TIFF* tiff, const Layout& layout, int level) {
    const auto& size = layout.levels[static_cast<std::size_t>(level)];
    const bool floats = layout.sample == Sample::float32;
    const auto bands = static_cast<std::uint16_t>(layout.bands);
    TIFFSetField(tiff, TIFFTAG_SUBFILETYPE, level == 0 ? 0u : unsigned{FILETYPE_REDUCEDIMAGE});
    TIFFSetField(tiff, TIFFTAG_IMAGEWIDTH, static_cast<std::uint32_t>(size.width));
    TIFFSetField(tiff, TIFFTAG_IMAGELENGTH, static_cast<std::uint32_t>(size.height));
    TIFFSetField(tiff, TIFFTAG_TILEWIDTH, static_cast<std::uint32_t>(layout.tile));
    TIFFSetField(tiff, TIFFTAG_TILELENGTH, static_cast<std::uint32_t>(layout.tile));
    TIFFSetField(tiff, TIFFTAG_BITSPERSAMPLE, floats ? 32 : 16);
    TIFFSetField(tiff, TIFFTAG_SAMPLEFORMAT, floats ? SAMPLEFORMAT_IEEEFP : SAMPLEFORMAT_UINT);
    TIFFSetField(tiff, TIFFTAG_SAMPLESPERPIXEL, bands);
    TIFFSetField(tiff, TIFFTAG_PLANARCONFIG,
                 bands > 1 ? PLANARCONFIG_SEPARATE : PLANARCONFIG_CONTIG);
    TIFFSetField(tiff, TIFFTAG_PHOTOMETRIC, PHOTOMETRIC_MINISBLACK);
    if (bands > 1) {
        const std::vector<std::uint16_t> extra(bands - 1u, EXTRASAMPLE_UNSPECIFIED);
        TIFFSetField(tiff, TIFFTAG_EXTRASAMPLES, bands - 1, extra.data());
    }
    TIFFSetField(tiff, TIFFTAG_COMPRESSION, COMPRESSION_ZSTD);
    TIFFSetField(tiff, TIFFTAG_PREDICTOR, floats ? PREDICTOR_FLOATINGPOINT : PREDICTOR_HORIZONTAL);
}

/// The overviews' directories say nothing of their own but what is no data.
void set_tags(TIFF* tiff, const TiffTags& tags, int level) {
    for (const auto& [tag, text] : tags.texts)
        if (level == 0 || tag == tag_gdal_nodata) TIFFSetField(tiff, tag, text.c_str());
    if (level > 0) return;
    for (const auto& [tag, values] : tags.doubles)
        TIFFSetField(tiff, tag, static_cast<int>(values.size()), values.data());
    if (!tags.geo_keys.empty())
        TIFFSetField(tiff, tag_geo_keys, static_cast<int>(tags.geo_keys.size()),
                     tags.geo_keys.data());
}

/// All directories, with room for the places of the tiles but no tiles yet.
void write_directories(OutputFile& file, const Layout& layout, const TiffTags& tags, bool big) {
    TiffHandle handle(file, big ? "w8" : "w4");
    auto* tiff = handle.get();
    const int levels = static_cast<int>(layout.levels.size());
    for (int level = 0; level < levels; ++level) {
        if (level > 0) {
            TIFFFreeDirectory(tiff);
            handle.require(TIFFCreateDirectory(tiff) == 0, "cannot add a directory");
            handle.know_tags();
        }
        set_image_tags(tiff, layout, level);
        set_tags(tiff, tags, level);
        handle.require(TIFFDeferStrileArrayWriting(tiff) == 1 && TIFFWriteCheck(tiff, 1, "") == 1 &&
                           TIFFWriteDirectory(tiff) == 1,
                       "cannot write a directory");
    }
    for (int level = 0; level < levels; ++level)
        handle.require(TIFFSetDirectory(tiff, static_cast<tdir_t>(level)) == 1 &&
                           TIFFForceStrileArrayWriting(tiff) == 1,
                       "cannot write a directory");
    handle.close();
}

void stop_if_told() {
    if (stop_signal.load() != 0)
        throw Error(Cause::temporary, "stopped before the file was finished", {},
                    "run again: it goes on from where it was");
}

using TileWork = std::function<void(TIFF* tiff, std::uint32_t number, const TileKey& key)>;

/// Every tile, in the order of its bytes: the smallest level first; `number` is libtiff's.
void for_each_tile(TiffHandle& handle, const Layout& layout, const TileWork& work) {
    for (int level = static_cast<int>(layout.levels.size()) - 1; level >= 0; --level) {
        handle.require(TIFFSetDirectory(handle.get(), static_cast<tdir_t>(level)) == 1,
                       "a directory is missing");
        const auto& size = layout.levels[static_cast<std::size_t>(level)];
        std::uint32_t number = 0;
        for (int band = 0; band < layout.bands; ++band)
            for (int row = 0; row < size.rows; ++row)
                for (int column = 0; column < size.columns; ++column, ++number) {
                    stop_if_told();
                    work(handle.get(), number, {level, band, column, row});
                }
        // libtiff forgets the places of tiles just written when it goes to another directory.
        handle.require(TIFFFlush(handle.get()) == 1, "cannot write a directory");
    }
}

void write_tiles(OutputFile& file, const Spool& spool) {
    // Opened anew: only in this mode does libtiff put the tiles' places into the room left for them
    // instead of writing the directory once more at the end.
    TiffHandle handle(file, "r+");
    for_each_tile(handle, spool.layout(),
                  [&](TIFF* tiff, std::uint32_t number, const TileKey& key) {
                      auto bytes = spool.read(key);
                      const auto size = static_cast<tmsize_t>(bytes.size());
                      handle.require(TIFFWriteRawTile(tiff, number, bytes.data(), size) == size,
                                     "cannot write a tile");
                  });
    handle.close();
}

[[noreturn]] void damaged(const fs::path& file, const TileKey& key) {
    throw Error(Cause::output,
                fmt::format("the finished file does not hold what was computed: tile {}, {} of "
                            "band {}, level {}",
                            key.column, key.row, key.band + 1, key.level),
                file.string(), "check the disk and run again");
}

void compare_decoded(TIFF* tiff, std::uint32_t number, const Layout& layout,
                     std::span<const std::byte> encoded, std::vector<std::byte>& pixels,
                     const std::function<void()>& on_difference) {
    pixels.resize(layout.tile_bytes());
    const auto size = static_cast<tmsize_t>(pixels.size());
    if (TIFFReadEncodedTile(tiff, number, pixels.data(), size) != size) return on_difference();
    const auto same = [&](const auto& square) {
        const auto row_bytes = pixels.size() / static_cast<std::size_t>(layout.tile);
        for (int r = 0; r < layout.tile; ++r)
            if (std::memcmp(square.row(r).data(),
                            pixels.data() + static_cast<std::size_t>(r) * row_bytes,
                            row_bytes) != 0)
                return false;
        return true;
    };
    const bool equal = layout.sample == Sample::float32
                           ? same(decode_tile<float>(encoded, layout.tile))
                           : same(decode_tile<std::uint16_t>(encoded, layout.tile));
    if (!equal) on_difference();
}

}  // namespace

void verify_layer(const Spool& spool, const fs::path& path) {
    auto file = OutputFile::open(path, false);
    const auto& layout = spool.layout();
    TiffHandle handle(file, "r");
    handle.require(TIFFNumberOfDirectories(handle.get()) == layout.levels.size(),
                   "a directory is missing");
    std::vector<std::byte> bytes, pixels;
    for_each_tile(handle, layout, [&](TIFF* tiff, std::uint32_t number, const TileKey& key) {
        const auto expected = spool.find(key);
        if (!expected || TIFFGetStrileByteCount(tiff, number) != expected->length)
            damaged(path, key);
        bytes.resize(expected->length);
        const auto size = static_cast<tmsize_t>(bytes.size());
        if (TIFFReadRawTile(tiff, number, bytes.data(), size) != size ||
            tile_checksum(bytes) != expected->checksum)
            damaged(path, key);
        if (layout.index(key) % 100 == 0)
            compare_decoded(tiff, number, layout, bytes, pixels, [&] { damaged(path, key); });
    });
}

void finish_layer(const LayerFile& layer, const Spool& spool,
                  std::span<const BandStatistics> statistics, const fs::path& temporary_file,
                  std::uint64_t classic_bytes) {
    assert(layout_of(layer) == spool.layout());
    assert(statistics.empty() || statistics.size() == layer.bands.size());
    if (const auto missing = spool.missing(); missing > 0)
        throw Error(Cause::partial,
                    fmt::format("{} of {} tiles are missing", missing, spool.layout().tile_count()),
                    layer.name, "run again: it goes on from where it was");
    const auto tags = tiff_tags(layer, statistics);
    auto file = OutputFile::create(temporary_file);
    Unfinished guard(temporary_file);
    write_directories(file, spool.layout(), tags, most_bytes(spool, tags) > classic_bytes);
    write_tiles(file, spool);
    file.sync();
    file.close();
    verify_layer(spool, temporary_file);
    guard.done();
}

void check_layer(const LayerFile& layer) {
    (void)tiff_tags(layer, {});
}

}  // namespace sunbudget
