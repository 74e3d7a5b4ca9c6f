#include "sunbudget/raster/tile_codec.hpp"

#include <zstd.h>

#include <bit>
#include <cassert>
#include <cstring>
#include <memory>
#include <string>

#include "sunbudget/base/error.hpp"
#include "sunbudget/base/simd.hpp"

namespace sunbudget {

// A TIFF keeps the byte order of the machine that wrote it, and the tiles go in as they are.
static_assert(std::endian::native == std::endian::little);

namespace {
constexpr int zstd_level = 1;
constexpr std::uint32_t the_nan = 0x7fc00000;

struct FreeContext {
    void operator()(ZSTD_CCtx* context) const noexcept { ZSTD_freeCCtx(context); }
    void operator()(ZSTD_DCtx* context) const noexcept { ZSTD_freeDCtx(context); }
};

/// What a thread keeps from tile to tile.
struct Workspace {
    std::unique_ptr<ZSTD_CCtx, FreeContext> packer{ZSTD_createCCtx()};
    std::unique_ptr<ZSTD_DCtx, FreeContext> unpacker{ZSTD_createDCtx()};
    std::vector<std::uint8_t> planes;  ///< one row of floats as four planes of bytes
    std::vector<std::uint8_t> plain;   ///< the tile after the predictor
    std::vector<std::byte> packed;
};

Workspace& workspace() {
    thread_local Workspace mine;
    return mine;
}

std::vector<std::byte> packed(Workspace& work) {
    work.packed.resize(ZSTD_compressBound(work.plain.size()));
    const auto size = ZSTD_compressCCtx(work.packer.get(), work.packed.data(), work.packed.size(),
                                        work.plain.data(), work.plain.size(), zstd_level);
    if (ZSTD_isError(size) != 0)
        throw Error(Cause::internal,
                    std::string("a tile cannot be compressed: ") + ZSTD_getErrorName(size));
    return {work.packed.begin(), work.packed.begin() + static_cast<std::ptrdiff_t>(size)};
}

void unpack(Workspace& work, std::span<const std::byte> bytes, std::size_t expected) {
    work.plain.resize(expected);
    const auto size = ZSTD_decompressDCtx(work.unpacker.get(), work.plain.data(), expected,
                                          bytes.data(), bytes.size());
    if (ZSTD_isError(size) != 0)
        throw Error(Cause::output,
                    std::string("a stored tile is damaged: ") + ZSTD_getErrorName(size));
    if (size != expected)
        throw Error(Cause::output, "a stored tile is damaged: it holds " + std::to_string(size) +
                                       " bytes, expected " + std::to_string(expected));
}

/// All first bytes, then all second bytes and so on, the most significant ones first.
SUNBUDGET_CLONES void split_bytes(const float* row, std::size_t count, std::uint8_t* planes) {
    std::uint8_t* p0 = planes;
    std::uint8_t* p1 = planes + count;
    std::uint8_t* p2 = planes + 2 * count;
    std::uint8_t* p3 = planes + 3 * count;
    for (std::size_t i = 0; i < count; ++i) {
        const std::uint32_t bits =
            row[i] == row[i] ? std::bit_cast<std::uint32_t>(row[i]) : the_nan;
        p0[i] = static_cast<std::uint8_t>(bits >> 24);
        p1[i] = static_cast<std::uint8_t>(bits >> 16);
        p2[i] = static_cast<std::uint8_t>(bits >> 8);
        p3[i] = static_cast<std::uint8_t>(bits);
    }
}

template <typename T>
SUNBUDGET_CLONES void differences(const T* in, std::size_t count, T* out) {
    out[0] = in[0];
    for (std::size_t i = 1; i < count; ++i) out[i] = static_cast<T>(in[i] - in[i - 1]);
}

template <typename T>
void sums(T* values, std::size_t count) noexcept {
    for (std::size_t i = 1; i < count; ++i) values[i] = static_cast<T>(values[i] + values[i - 1]);
}

void join_bytes(const std::uint8_t* planes, std::size_t count, float* row) noexcept {
    for (std::size_t i = 0; i < count; ++i) {
        const std::uint32_t bits =
            std::uint32_t{planes[i]} << 24 | std::uint32_t{planes[count + i]} << 16 |
            std::uint32_t{planes[2 * count + i]} << 8 | planes[3 * count + i];
        row[i] = std::bit_cast<float>(bits);
    }
}

template <typename T>
std::size_t bytes_of_row(const Plane<T>& square) {
    assert(square.width() == square.height() && square.width() % 16 == 0 && !square.empty());
    return static_cast<std::size_t>(square.width()) * sizeof(T);
}
}  // namespace

std::vector<std::byte> encode_tile(const Plane<float>& square) {
    auto& work = workspace();
    const std::size_t row_bytes = bytes_of_row(square);
    work.planes.resize(row_bytes);
    work.plain.resize(row_bytes * static_cast<std::size_t>(square.height()));
    std::uint8_t* out = work.plain.data();
    for (int r = 0; r < square.height(); ++r, out += row_bytes) {
        split_bytes(square.row(r).data(), square.row(r).size(), work.planes.data());
        differences(work.planes.data(), row_bytes, out);
    }
    return packed(work);
}

std::vector<std::byte> encode_tile(const Plane<std::uint16_t>& square) {
    auto& work = workspace();
    const std::size_t row_bytes = bytes_of_row(square);
    work.plain.resize(row_bytes * static_cast<std::size_t>(square.height()));
    std::vector<std::uint16_t> line(square.row(0).size());
    std::uint8_t* out = work.plain.data();
    for (int r = 0; r < square.height(); ++r, out += row_bytes) {
        differences(square.row(r).data(), line.size(), line.data());
        std::memcpy(out, line.data(), row_bytes);
    }
    return packed(work);
}

template <typename T>
Plane<T> decode_tile(std::span<const std::byte> bytes, int tile) {
    auto& work = workspace();
    Plane<T> square(tile, tile);
    const std::size_t row_bytes = bytes_of_row(square);
    unpack(work, bytes, row_bytes * static_cast<std::size_t>(tile));
    std::uint8_t* in = work.plain.data();
    for (int r = 0; r < tile; ++r, in += row_bytes) {
        const auto row = square.row(r);
        if constexpr (std::is_same_v<T, float>) {
            sums(in, row_bytes);
            join_bytes(in, row.size(), row.data());
        } else {
            std::memcpy(row.data(), in, row_bytes);
            sums(row.data(), row.size());
        }
    }
    return square;
}

template Plane<float> decode_tile<float>(std::span<const std::byte>, int);
template Plane<std::uint16_t> decode_tile<std::uint16_t>(std::span<const std::byte>, int);

}  // namespace sunbudget
