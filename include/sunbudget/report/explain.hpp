#pragma once

#include <string>

#include "sunbudget/engine/pixel.hpp"

namespace sunbudget {

/// The account of one pixel for people: what was read, where the albedo came from, the sun's way and
/// the horizon, every term of light, the layers as stored, methods with sources.
[[nodiscard]] std::string explain_text(const Run& run, const PixelAccount& account);
/// The same as JSON, every term of every period.
[[nodiscard]] std::string explain_json(const Run& run, const PixelAccount& account);

}  // namespace sunbudget
