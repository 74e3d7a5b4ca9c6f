#include "sunbudget/tables/print.hpp"

#include <algorithm>
#include <nlohmann/json.hpp>

#include "csv.hpp"
#include "listing.hpp"
#include "sunbudget/base/text.hpp"

namespace sunbudget {

namespace {

std::string as_csv(const Listing& list) {
    std::string text;
    for (const auto& column : list.columns)
        text += (&column == &list.columns.front() ? "" : ",") + column.name;
    for (const auto& row : list.rows) {
        text += '\n';
        for (const auto& cell : row) text += (&cell == &row.front() ? "" : ",") + csv_cell(cell);
    }
    return text + '\n';
}

nlohmann::ordered_json json_of(const Column& column, const std::string& cell) {
    if (column.cell != Cell::number) return cell;
    if (const auto whole = parse_integer(cell)) return *whole;
    if (const auto value = parse_number(cell)) return *value;
    return nullptr;
}

std::string as_json(const Listing& list) {
    nlohmann::ordered_json json{{"table", list.name}, {"text", list.text}};
    if (!list.digest.empty()) json["digest"] = list.digest;
    auto& rows = json["rows"] = nlohmann::ordered_json::array();
    for (const auto& row : list.rows) {
        nlohmann::ordered_json object;
        for (std::size_t i = 0; i < row.size(); ++i)
            object[list.columns[i].name] = json_of(list.columns[i], row[i]);
        rows.push_back(std::move(object));
    }
    return json.dump(2) + '\n';
}

/// Characters of a UTF-8 text, so that columns line up.
std::size_t length(const std::string& text) {
    return static_cast<std::size_t>(
        std::count_if(text.begin(), text.end(), [](char c) { return (c & 0xc0) != 0x80; }));
}

std::vector<std::size_t> widths(const Listing& list) {
    std::vector<std::size_t> most;
    for (std::size_t i = 0; i < list.columns.size(); ++i) {
        most.push_back(length(list.columns[i].name));
        for (const auto& row : list.rows) most[i] = std::max(most[i], length(row[i]));
    }
    return most;
}

std::string aligned(const std::vector<std::string>& cells, const Listing& list,
                    const std::vector<std::size_t>& most) {
    std::string line;
    for (std::size_t i = 0; i < cells.size(); ++i) {
        const std::string gap(most[i] - length(cells[i]), ' ');
        line += (i > 0 ? "  " : "") +
                (list.columns[i].cell == Cell::number ? gap + cells[i] : cells[i] + gap);
    }
    line.erase(line.find_last_not_of(' ') + 1);
    return printable(line) + '\n';
}

/// The listing with each note replaced by its number, and the notes in that order.
std::vector<std::string> take_notes(Listing& list) {
    std::vector<std::string> notes;
    for (auto& row : list.rows) {
        for (std::size_t i = 0; i < row.size(); ++i) {
            if (list.columns[i].cell != Cell::note || row[i].empty()) continue;
            const auto found = std::find(notes.begin(), notes.end(), row[i]);
            const auto index = found - notes.begin();
            if (found == notes.end()) notes.push_back(row[i]);
            row[i] = '[' + std::to_string(index + 1) + ']';
        }
    }
    return notes;
}

std::string as_text(Listing list) {
    std::string text = list.name + ": " + list.text + '\n';
    if (!list.digest.empty()) text += list.digest + '\n';
    const auto notes = take_notes(list);
    std::vector<std::string> header;
    for (const auto& column : list.columns) header.push_back(column.name);
    const auto most = widths(list);
    text += '\n' + aligned(header, list, most);
    for (const auto& row : list.rows) text += aligned(row, list, most);
    if (!notes.empty()) text += '\n';
    for (std::size_t i = 0; i < notes.size(); ++i)
        text += '[' + std::to_string(i + 1) + "] " + printable(notes[i]) + '\n';
    return text;
}

}  // namespace

std::string table_text(std::string_view name) {
    const auto names = table_names();
    if (std::find(names.begin(), names.end(), name) == names.end()) return {};
    return listing(std::string(name)).text;
}

std::string printed_table(const std::string& name, TableFormat format) {
    const auto list = listing(name);
    if (format == TableFormat::csv) return as_csv(list);
    return format == TableFormat::json ? as_json(list) : as_text(list);
}

}  // namespace sunbudget
