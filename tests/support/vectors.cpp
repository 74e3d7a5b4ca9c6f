#include "support/vectors.hpp"

#include <cstdlib>
#include <fstream>
#include <stdexcept>

#include "sunbudget/base/text.hpp"

namespace sunbudget::test {

namespace fs = std::filesystem;

namespace {
std::vector<std::string> cells_of(const std::string& line) {
    std::vector<std::string> cells(1);
    bool quoted = false;
    for (std::size_t i = 0; i < line.size(); ++i) {
        const char c = line[i];
        if (quoted && c == '"' && i + 1 < line.size() && line[i + 1] == '"') {
            cells.back() += '"';
            ++i;
        } else if (c == '"') {
            quoted = !quoted;
        } else if (c == ',' && !quoted) {
            cells.emplace_back();
        } else if (c != '\r') {
            cells.back() += c;
        }
    }
    return cells;
}
}  // namespace

std::size_t Table::column(std::string_view name) const {
    for (std::size_t i = 0; i < columns.size(); ++i)
        if (columns[i] == name) return i;
    throw std::runtime_error("no column " + std::string(name));
}

const std::string& Table::cell(std::size_t row, std::string_view column_name) const {
    return rows.at(row).at(column(column_name));
}

double Table::number(std::size_t row, std::string_view column_name) const {
    const auto& text = cell(row, column_name);
    const auto value = parse_number(trimmed(text));
    if (!value) throw std::runtime_error("not a number: " + text);
    return *value;
}

Table read_table(const std::string& name) {
    std::ifstream file(testdata(name));
    if (!file) throw std::runtime_error("cannot read testdata/" + name);
    Table table;
    for (std::string line; std::getline(file, line);) {
        if (line.starts_with('#'))
            table.comments.push_back(line);
        else if (table.columns.empty())
            table.columns = cells_of(line);
        else if (!trimmed(line).empty())
            table.rows.push_back(cells_of(line));
    }
    if (table.rows.empty()) throw std::runtime_error("no rows in testdata/" + name);
    return table;
}

fs::path source_folder() {
    return SUNBUDGET_SOURCE_DIR;
}

fs::path testdata(const std::string& name) {
    return source_folder() / "testdata" / name;
}

std::optional<fs::path> real_data(const std::string& name) {
    const char* folder = std::getenv("SUNBUDGET_DATA");
    if (folder == nullptr || *folder == '\0') return std::nullopt;
    auto file = fs::path(folder) / name;
    if (!fs::exists(file)) return std::nullopt;
    return file;
}

TemporaryFolder::TemporaryFolder() {
    std::string pattern = (fs::temp_directory_path() / "sunbudget-test-XXXXXX").string();
    if (mkdtemp(pattern.data()) == nullptr) throw std::runtime_error("cannot make " + pattern);
    path_ = pattern;
}
TemporaryFolder::~TemporaryFolder() {
    std::error_code ignored;
    fs::remove_all(path_, ignored);
}

}  // namespace sunbudget::test
