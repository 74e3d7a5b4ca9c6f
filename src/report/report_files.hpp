#pragma once

#include <span>
#include <string_view>

namespace sunbudget {

struct EmbeddedFile {
    std::string_view name;
    std::string_view text;
};
/// Every file of src/report/data, as it stands there.
[[nodiscard]] std::span<const EmbeddedFile> report_files() noexcept;

}  // namespace sunbudget
