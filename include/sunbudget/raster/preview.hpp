#pragma once

#include <filesystem>

#include "sunbudget/base/plane.hpp"

namespace sunbudget {

/// A band of a finished layer file, made small enough to look at: the largest of its overviews that fits,
/// else means of squares of pixels (flags: their upper left pixel). NaN where there is no value.
///
/// in      file     one of ours: its overviews are trusted
///         band     from 1
///         most_px  longest side of the result
/// memory  the result and a few rows of the file
/// errors  Error(input) when the file cannot be read
[[nodiscard]] Plane<float> preview(const std::filesystem::path& file, int band, int most_px);

}  // namespace sunbudget
