#include "weather_table.hpp"

#include <algorithm>

#include "sunbudget/base/text.hpp"

namespace sunbudget {

void WeatherProblems::add(std::size_t line, std::string_view column, std::string what,
                          std::string todo) {
    constexpr std::size_t most_told = 10;
    if (++count_ > most_told) return;
    std::string where = file_;
    if (line > 0) where += ":" + std::to_string(line);
    if (!column.empty()) where += ": " + std::string(column);
    told_.push_back({std::move(what), std::move(where), std::move(todo)});
}

void WeatherProblems::throw_if_any() const {
    if (count_ == 0) return;
    auto all = told_;
    if (count_ > told_.size())
        all.push_back(
            {std::to_string(count_ - told_.size()) + " more problems of this table", file_, {}});
    throw Error(Cause::input, std::move(all));
}

namespace {

constexpr std::string_view blanks = " \t";

/// Takes one cell off the front, quotes removed; nothing of `rest` is left behind the last. A doubled quote
/// inside a quoted cell stays doubled: no number and no time has one.
std::string_view take_cell(std::optional<std::string_view>& rest, char separator) {
    const auto line = *rest;
    const auto quote = line.starts_with('"') ? line.find('"', 1) : line.npos;
    const auto next = line.find(separator, quote == line.npos ? 0 : quote);
    // Behind a separator there is one more cell, be it empty.
    rest = next == line.npos ? std::nullopt : std::optional(line.substr(next + 1));
    return quote == line.npos ? trimmed(line.substr(0, next)) : line.substr(1, quote - 1);
}

/// The separator that a line has most of; blanks where it has none.
char guessed_separator(std::string_view line) {
    char best = ' ';
    std::ptrdiff_t most = 0;
    for (const char candidate : {',', ';', '\t'})
        if (const auto count = std::count(line.begin(), line.end(), candidate); count > most) {
            most = count;
            best = candidate;
        }
    return best;
}

char separator_char(Separator separator, std::string_view line) {
    switch (separator) {
        case Separator::comma:
            return ',';
        case Separator::semicolon:
            return ';';
        case Separator::tab:
            return '\t';
        case Separator::blanks:
            return ' ';
        case Separator::automatic:
            break;
    }
    return guessed_separator(line);
}

}  // namespace

NameAndUnit name_and_unit(std::string_view header_cell) {
    const auto text = trimmed(header_cell);
    for (const auto& [open, close] : {std::pair{'[', ']'}, std::pair{'(', ')'}}) {
        const auto at = text.find(open);
        if (at == text.npos || at == 0 || text.back() != close) continue;
        return {std::string(trimmed(text.substr(0, at))),
                std::string(trimmed(text.substr(at + 1, text.size() - at - 2)))};
    }
    return {std::string(text), {}};
}

std::optional<std::string_view> WeatherTable::next_line(std::size_t& at,
                                                        std::size_t& number) const {
    while (at < text_.size()) {
        const auto end = std::min(text_.find('\n', at), text_.size());
        auto line = text_.substr(at, end - at);
        at = end + 1;
        ++number;
        if (line.ends_with('\r')) line.remove_suffix(1);
        if (trimmed(line).empty()) continue;
        if (!format_.comment.empty() && trimmed(line).starts_with(format_.comment)) continue;
        return line;
    }
    return std::nullopt;
}

WeatherTable::WeatherTable(std::string_view text, const WeatherFormat& format)
    : text_(text), format_(format) {
    if (text_.starts_with("\xef\xbb\xbf")) text_.remove_prefix(3);  // a byte-order mark
    std::size_t at = 0, number = 0;
    for (int skipped = 0; skipped < format.skip && at < text_.size(); ++skipped) {
        at = std::min(text_.find('\n', at), text_.size() - 1) + 1;
        ++number;
    }
    first_row_ = at;
    const auto first = next_line(at, number);
    if (first) separator_ = separator_char(format.separator, *first);
    if (first && format.header) {
        for (const auto cell : cells_of(*first)) header_.emplace_back(cell);
        first_row_ = at;
        first_line_ = number + 1;
    } else {
        first_line_ = static_cast<std::size_t>(format.skip) + 1;
    }
    std::size_t rows_at = first_row_, rows_number = 0;
    if (!next_line(rows_at, rows_number))
        throw Error(Cause::input, "the weather table has no row", format.file,
                    "look at weather.skip, weather.header and weather.comment");
}

WeatherCells WeatherTable::cells_of(std::string_view line) const {
    WeatherCells cells;
    if (separator_ == ' ') {
        for (auto rest = trimmed(line); !rest.empty();) {
            const auto end = rest.find_first_of(blanks);
            cells.push_back(rest.substr(0, end));
            rest = end == rest.npos ? std::string_view() : trimmed(rest.substr(end));
        }
        return cells;
    }
    for (std::optional rest = line; rest;) cells.push_back(take_cell(rest, separator_));
    return cells;
}

std::optional<std::size_t> WeatherTable::index_of(const WeatherColumn& column) const {
    if (column.number > 0) return static_cast<std::size_t>(column.number - 1);
    for (std::size_t i = 0; i < header_.size(); ++i)
        if (header_[i] == column.name || name_and_unit(header_[i]).name == column.name) return i;
    return std::nullopt;
}

void WeatherTable::each_row(
    const std::function<void(std::size_t, const WeatherCells&)>& visit) const {
    std::size_t at = first_row_, number = first_line_ - 1;
    while (const auto line = next_line(at, number)) visit(number, cells_of(*line));
}

}  // namespace sunbudget
