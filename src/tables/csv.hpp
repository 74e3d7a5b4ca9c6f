#pragma once

#include <string>
#include <string_view>
#include <vector>

#include "sunbudget/base/error.hpp"

namespace sunbudget {

/// Cells of one line.
struct CsvLine {
    int number = 0;  ///< 1 is the file's first
    std::vector<std::string> cells;
};

/// A strict little CSV: commas, `"` around cells that need it (doubled inside), one record a line,
/// CRLF or LF, UTF-8 with or without byte-order mark. Lines that start with # and lines without a
/// filled cell are left out. Cells lose outer blanks unless quoted.
///
/// errors  added to `problems` with "NAME:LINE" as place; lines with an error are left out
[[nodiscard]] std::vector<CsvLine> csv_lines(std::string_view text, const std::string& name,
                                             std::vector<Problem>& problems);

/// The cell as it stands in a CSV file, quoted when it must be.
[[nodiscard]] std::string csv_cell(std::string_view text);

/// "NAME:LINE".
[[nodiscard]] std::string place_of(const std::string& name, int line);

}  // namespace sunbudget
