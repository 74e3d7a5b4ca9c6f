#include "sunbudget/raster/png.hpp"

#include <zlib.h>

#include <algorithm>
#include <cassert>
#include <string_view>

namespace sunbudget {

namespace {

using Bytes = std::vector<std::uint8_t>;

void add_number(Bytes& bytes, std::uint32_t number) {
    for (const int shift : {24, 16, 8, 0})
        bytes.push_back(static_cast<std::uint8_t>(number >> shift));
}

/// Length, name, content, and the checksum of name and content.
void add_chunk(Bytes& file, std::string_view name, const Bytes& content) {
    add_number(file, static_cast<std::uint32_t>(content.size()));
    const auto start = file.size();
    file.insert(file.end(), name.begin(), name.end());
    file.insert(file.end(), content.begin(), content.end());
    add_number(file, static_cast<std::uint32_t>(
                         crc32(0, file.data() + start, static_cast<uInt>(file.size() - start))));
}

Bytes header(int width, int height) {
    Bytes bytes;
    add_number(bytes, static_cast<std::uint32_t>(width));
    add_number(bytes, static_cast<std::uint32_t>(height));
    bytes.insert(bytes.end(), {8, 3, 0, 0, 0});  // 8 bits, colours by number, nothing unusual
    return bytes;
}

Bytes colours(std::span<const Colour> palette) {
    Bytes bytes;
    for (const auto& colour : palette)
        bytes.insert(bytes.end(), {colour.red, colour.green, colour.blue});
    return bytes;
}

/// Each row behind a 0: its bytes as they are.
Bytes compressed(const Plane<std::uint8_t>& pixels) {
    Bytes plain;
    plain.reserve(static_cast<std::size_t>(pixels.width() + 1) *
                  static_cast<std::size_t>(pixels.height()));
    for (int r = 0; r < pixels.height(); ++r) {
        plain.push_back(0);
        plain.insert(plain.end(), pixels.row(r).begin(), pixels.row(r).end());
    }
    uLongf size = compressBound(static_cast<uLong>(plain.size()));
    Bytes packed(size);
    // Room enough was asked for: it cannot fail but for want of memory, which throws before.
    [[maybe_unused]] const int done =
        compress2(packed.data(), &size, plain.data(), static_cast<uLong>(plain.size()), 9);
    assert(done == Z_OK);
    packed.resize(size);
    return packed;
}

}  // namespace

std::vector<std::byte> png_of(const Plane<std::uint8_t>& pixels, std::span<const Colour> palette) {
    assert(!pixels.empty() && !palette.empty() && palette.size() <= 256);
    Bytes file{0x89, 'P', 'N', 'G', '\r', '\n', 0x1a, '\n'};
    add_chunk(file, "IHDR", header(pixels.width(), pixels.height()));
    add_chunk(file, "PLTE", colours(palette));
    add_chunk(file, "tRNS", {0});
    add_chunk(file, "IDAT", compressed(pixels));
    add_chunk(file, "IEND", {});
    std::vector<std::byte> bytes(file.size());
    std::ranges::transform(file, bytes.begin(),
                           [](std::uint8_t byte) { return static_cast<std::byte>(byte); });
    return bytes;
}

}  // namespace sunbudget
