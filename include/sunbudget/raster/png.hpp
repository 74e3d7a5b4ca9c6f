#pragma once

#include <array>
#include <cstddef>
#include <cstdint>
#include <span>
#include <vector>

#include "sunbudget/base/plane.hpp"

namespace sunbudget {

struct Colour {
    std::uint8_t red = 0, green = 0, blue = 0;
    friend bool operator==(const Colour&, const Colour&) = default;
};

/// A PNG picture of up to 256 colours; the first colour is see-through. The same bytes for the same pixels.
///
/// in      pixels  numbers of colours, below their count; palette  1 to 256 colours
/// source  PNG specification, second edition (ISO/IEC 15948:2004)
[[nodiscard]] std::vector<std::byte> png_of(const Plane<std::uint8_t>& pixels,
                                            std::span<const Colour> palette);

}  // namespace sunbudget
