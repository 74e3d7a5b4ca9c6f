#pragma once

#include <span>
#include <string_view>

namespace sunbudget {

/// A file of src/tables/data, byte for byte.
struct EmbeddedFile {
    std::string_view name;
    std::string_view text;
};

[[nodiscard]] std::span<const EmbeddedFile> embedded_files() noexcept;

}  // namespace sunbudget
