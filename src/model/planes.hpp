#pragma once

#include <algorithm>
#include <cstddef>

#include "sunbudget/base/plane.hpp"

namespace sunbudget {

/// A plane of the size wanted, the old memory kept where it fits.
template <typename T>
void fit(Plane<T>& plane, int width, int height) {
    if (plane.width() != width || plane.height() != height) plane = Plane<T>(width, height);
}
template <typename T>
void fit(Plane<T>& plane, const Window& window) {
    fit(plane, window.width, window.height);
}

inline void copy_plane(const Plane<float>& from, Plane<float>& to) {
    fit(to, from.width(), from.height());
    for (int r = 0; r < from.height(); ++r) std::ranges::copy(from.row(r), to.row(r).begin());
}

/// The part of a plane's row that lies over a window inside the plane's frame.
template <typename AnyPlane>
auto over(AnyPlane& plane, const Window& frame, const Window& window, int row) {
    return plane.row(static_cast<int>(window.row - frame.row) + row)
        .subspan(static_cast<std::size_t>(window.column - frame.column),
                 static_cast<std::size_t>(window.width));
}

}  // namespace sunbudget
