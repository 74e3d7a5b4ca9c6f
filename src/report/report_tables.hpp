#pragma once

#include <string>

#include "sunbudget/engine/execute.hpp"
#include "zone_view.hpp"

namespace sunbudget {

// Sections of the report that are words and tables; each empty where the run has nothing of it.
[[nodiscard]] std::string figures_section(const Run& run, const Execution& execution);
[[nodiscard]] std::string quality_section(const Run& run, const Execution& execution);
[[nodiscard]] std::string methods_section(const Run& run);
[[nodiscard]] std::string inputs_section(const Run& run);
/// A table of zones, sortable; `id` tells several apart.
[[nodiscard]] std::string zone_table(const ZoneView& view, const std::string& id,
                                     const std::string& caption);

/// "<section ...>" with its heading.
[[nodiscard]] std::string section(const std::string& id, const std::string& title,
                                  const std::string& content);

}  // namespace sunbudget
