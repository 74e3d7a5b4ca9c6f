#pragma once

#include <string>
#include <vector>

namespace sunbudget {

enum class Cell { words, number, note };

struct Column {
    std::string name;
    Cell cell = Cell::words;  ///< a note is long and often repeated: in text it stands below
};

/// Any table as cells; an empty cell of a number column means "none".
struct Listing {
    std::string name;
    std::string text;
    std::string digest;  ///< empty but for class tables
    std::vector<Column> columns;
    std::vector<std::vector<std::string>> rows;
};

/// The table that `printed_table` prints, by its name or path.
[[nodiscard]] Listing listing(const std::string& name);

}  // namespace sunbudget
