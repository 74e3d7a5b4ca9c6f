#pragma once

#include <span>

#include "sunbudget/base/pixel_matrix.hpp"

namespace sunbudget {

/// Slope of one row of heights in pixel space, by the 3 x 3 window of Horn.
///
/// shape   above, centre, below: width + 2 heights, the row and one more at either end; outputs:
/// width units   heights [m]; per_column, per_row [m per pixel], positive where the ground rises
/// with the
///         column and with the row
/// nodata  NaN at the pixel gives NaN. A missing side neighbour is put on the line through the
///         opposite one and the pixel (level with the pixel where both are missing), a missing
///         corner where the two sides next to it and the pixel ask for it: planes stay exact along
///         edges, corners and holes
/// errors  none; rows of other lengths are a caller's bug (asserted)
/// source  Horn 1981, Proc. IEEE 69(1), 14-47 -> terrain.csv 001, 002
/// accuracy float arithmetic: differences of heights are exact to 2^-22 of the larger height, so
///         slopes err by at most about 3e-7 * height / pixel size
void horn_gradient(std::span<const float> above, std::span<const float> centre,
                   std::span<const float> below, std::span<float> per_column,
                   std::span<float> per_row) noexcept;

/// Upward unit normals of one row from its pixel-space slopes.
///
/// shape   five rows of one length; `first` and `last` are the inverse matrices at the row's first
///         and last pixel, taken as linear in between
/// units   slopes [m per pixel] -> parts of a unit vector (east, north, up); up > 0
/// nodata  NaN in either slope gives NaN
/// accuracy 1e-6 in each part
void surface_normals(std::span<const float> per_column, std::span<const float> per_row,
                     const InversePixelMatrix& first, const InversePixelMatrix& last,
                     std::span<float> east, std::span<float> north, std::span<float> up) noexcept;

/// Slope and aspect of one row from its normals.
///
/// shape   five rows of one length
/// units   slope [0, pi/2) rad; aspect [0, 2 pi) rad, downslope, clockwise from true north
/// nodata  NaN in gives NaN out; the aspect of level ground is NaN
/// source  terrain.csv 005, 006
void slope_and_aspect(std::span<const float> east, std::span<const float> north,
                      std::span<const float> up, std::span<float> slope_rad,
                      std::span<float> aspect_rad) noexcept;

}  // namespace sunbudget
