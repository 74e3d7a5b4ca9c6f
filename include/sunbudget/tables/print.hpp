#pragma once

#include <string>
#include <string_view>
#include <vector>

namespace sunbudget {

enum class TableFormat { text, csv, json };

/// What `printed_table` knows by name: the shipped class tables, then methods, layers, sensors,
/// sensor-quality, weights, quality.
[[nodiscard]] std::vector<std::string> table_names();
/// One line on what the table holds; empty for a name that is not in table_names().
[[nodiscard]] std::string table_text(std::string_view name);

/// The whole table, lines ended with \n. `name` may also be the path of a user's class table. A
/// class table printed as CSV reads back as the same table.
///
/// errors  Error(input) with a suggestion for a name that is neither; those of read_class_table
[[nodiscard]] std::string printed_table(const std::string& name, TableFormat format);

}  // namespace sunbudget
