#pragma once

#include <cstddef>
#include <string>

#include "sunbudget/model/run.hpp"

namespace sunbudget {

/// The layer of that name is one of a change, or what a change saves.
[[nodiscard]] bool is_change(const std::string& layer);
[[nodiscard]] bool is_difference(const std::string& layer);

/// "net shortwave" of net_shortwave; of a change "net shortwave with pale-roofs", "... saved by pale-roofs".
[[nodiscard]] std::string words_for(const std::string& layer);

// What the run's layer number `layer` is in, of which time a band of it is, and of which image.
[[nodiscard]] std::string unit_words(const Run& run, std::size_t layer);
[[nodiscard]] std::string when(const Run& run, std::size_t layer, std::size_t band);
/// Empty where no image has a part in it.
[[nodiscard]] std::string scene(const Run& run, std::size_t layer);

}  // namespace sunbudget
