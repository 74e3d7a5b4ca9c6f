#pragma once

#include <string_view>

namespace sunbudget {

/// "0.1.0"
[[nodiscard]] std::string_view program_version() noexcept;

}  // namespace sunbudget
