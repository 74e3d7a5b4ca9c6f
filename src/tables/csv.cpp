#include "csv.hpp"

#include <algorithm>

#include "sunbudget/base/text.hpp"

namespace sunbudget {

std::string place_of(const std::string& name, int line) {
    return name + ":" + std::to_string(line);
}

namespace {

/// Bytes that follow the first one of a UTF-8 character; -1 when it cannot start one.
int continuation_bytes(unsigned char first) {
    if (first < 0x80) return 0;
    if (first >= 0xc2 && first <= 0xdf) return 1;
    if (first >= 0xe0 && first <= 0xef) return 2;
    if (first >= 0xf0 && first <= 0xf4) return 3;
    return -1;
}

/// Well-formed as to lead and continuation bytes; NUL is refused too.
bool is_utf8_text(std::string_view text) {
    for (std::size_t i = 0; i < text.size(); ++i) {
        const auto byte = static_cast<unsigned char>(text[i]);
        const int more = continuation_bytes(byte);
        if (byte == 0 || more < 0) return false;
        for (int k = 0; k < more; ++k) {
            if (++i == text.size() || (static_cast<unsigned char>(text[i]) & 0xc0) != 0x80)
                return false;
        }
    }
    return true;
}

/// Walks one line cell by cell.
class LineReader {
  public:
    explicit LineReader(std::string_view line) : rest_(line) {}

    /// Empty text: all went well; otherwise what is wrong.
    std::string read(std::vector<std::string>& cells) {
        for (;;) {
            rest_.remove_prefix(std::min(rest_.find_first_not_of(" \t"), rest_.size()));
            auto fault = rest_.starts_with('"') ? quoted(cells) : plain(cells);
            if (!fault.empty()) return fault;
            if (rest_.empty()) return {};
            rest_.remove_prefix(1);  // the comma
        }
    }

  private:
    std::string plain(std::vector<std::string>& cells) {
        const auto cell = rest_.substr(0, rest_.find(','));
        if (cell.find('"') != std::string_view::npos) return "a quote in the middle of a cell";
        cells.emplace_back(trimmed(cell));
        rest_.remove_prefix(cell.size());
        return {};
    }

    std::string quoted(std::vector<std::string>& cells) {
        std::string cell;
        for (rest_.remove_prefix(1);; rest_.remove_prefix(1)) {
            if (rest_.empty()) return "a quote is opened and not closed on the same line";
            if (rest_.front() == '"') {
                if (!rest_.starts_with("\"\"")) break;
                rest_.remove_prefix(1);
            }
            cell += rest_.front();
        }
        rest_.remove_prefix(1);
        rest_.remove_prefix(std::min(rest_.find_first_not_of(" \t"), rest_.size()));
        if (!rest_.empty() && rest_.front() != ',') return "text after a closing quote";
        cells.push_back(std::move(cell));
        return {};
    }

    std::string_view rest_;
};

bool has_filled_cell(const std::vector<std::string>& cells) {
    return std::any_of(cells.begin(), cells.end(), [](const auto& c) { return !c.empty(); });
}

}  // namespace

std::vector<CsvLine> csv_lines(std::string_view text, const std::string& name,
                               std::vector<Problem>& problems) {
    std::vector<CsvLine> lines;
    if (text.starts_with("\xff\xfe") || text.starts_with("\xfe\xff")) {
        problems.push_back({"the file is UTF-16", name, "save it as CSV in UTF-8"});
        return lines;
    }
    if (text.starts_with("\xef\xbb\xbf")) text.remove_prefix(3);
    for (int number = 1; !text.empty(); ++number) {
        auto line = text.substr(0, text.find('\n'));
        text.remove_prefix(std::min(line.size() + 1, text.size()));
        if (line.ends_with('\r')) line.remove_suffix(1);
        if (line.starts_with('#')) continue;
        CsvLine read{number, {}};
        if (!is_utf8_text(line)) {
            problems.push_back({"not UTF-8", place_of(name, number), "save it as CSV in UTF-8"});
            continue;
        }
        const auto fault = LineReader(line).read(read.cells);
        if (!fault.empty())
            problems.push_back({fault, place_of(name, number),
                                "put the whole cell in quotes and double those inside it"});
        else if (has_filled_cell(read.cells))
            lines.push_back(std::move(read));
    }
    return lines;
}

std::string csv_cell(std::string_view text) {
    const bool outer_blanks = trimmed(text).size() != text.size();
    if (!outer_blanks && text.find_first_of(",\"\n#") == std::string_view::npos)
        return std::string(text);
    std::string cell = "\"";
    for (const char c : text) {
        if (c == '"') cell += '"';
        cell += c;
    }
    return cell + '"';
}

}  // namespace sunbudget
