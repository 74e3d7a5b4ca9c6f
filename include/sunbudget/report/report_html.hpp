#pragma once

#include <string>

#include "sunbudget/engine/execute.hpp"
#include "sunbudget/engine/output_set.hpp"

namespace sunbudget {

/// report.html: maps, curves, zones, methods, inputs and cautions for people, in one file without any
/// reference to another. Pictures come from the staged layers' overviews, so that memory does not hang on the
/// raster's size; equal runs give equal text.
///
/// errors  Error(input) when a staged layer or zones.csv cannot be read
[[nodiscard]] std::string report_html(const Run& run, const Execution& execution,
                                      const OutputSet& outputs);

}  // namespace sunbudget
