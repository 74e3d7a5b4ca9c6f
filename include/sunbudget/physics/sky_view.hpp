#pragma once

#include <span>

namespace sunbudget {

/// Upward unit normals of a row of pixels (gradient.hpp), three rows of one length.
struct NormalRow {
    std::span<const float> east, north, up;
};

/// Adds one direction's share of the sky view: with H the horizon's angle from the zenith,
/// cos S sin^2 H + sin S cos(phi - A) (H - sin H cos H), S slope, A aspect, phi the azimuth.
///
/// in      tangents of the horizons' elevation (horizon.hpp: never below 0 nor the pixel's own plane,
///         without which the integral is wrong on slopes), the direction's azimuth
/// shape   rows of one length
/// nodata  NaN goes through
/// source  Dozier & Frew 1990, IEEE Trans. Geosci. Remote Sens. 28(5), 963-969 -> terrain.csv 008
/// accuracy 1e-6 in each share
void add_sky_view(std::span<const float> tangent, const NormalRow& normal, double azimuth_rad,
                  std::span<float> sum) noexcept;

/// The mean over `directions` evenly spaced directions: the sky view [0, 1], exactly 1 on open level
/// ground. Done in place.
void finish_sky_view(std::span<float> sum, int directions) noexcept;

}  // namespace sunbudget
