#pragma once

#include <string>

#include "sun_flags.hpp"

namespace sunbudget {

/// What `sun` prints: an instant, days, steps, a fit or a plot, in the form that the flags ask for.
[[nodiscard]] std::string sun_text(const SunFlags& flags, Terminal& terminal);

}  // namespace sunbudget
