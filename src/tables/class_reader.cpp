#include <algorithm>
#include <cmath>
#include <cstdint>
#include <fstream>
#include <limits>
#include <map>
#include <sstream>

#include "csv.hpp"
#include "sunbudget/base/digest.hpp"
#include "sunbudget/base/error.hpp"
#include "sunbudget/base/text.hpp"
#include "sunbudget/tables/class_table.hpp"

namespace sunbudget {

namespace {

const std::vector<std::string>& known_columns() {
    static const std::vector<std::string> names{
        "code",       "name",        "kind",       "scale",  "albedo",
        "albedo_low", "albedo_high", "emissivity", "source",
    };
    return names;
}

/// Reads the lines of one table, collecting every problem.
class ClassReader {
  public:
    ClassReader(std::string_view text, const std::string& name) : name_(name) {
        lines_ = csv_lines(text, name_, problems_);
    }

    std::vector<SurfaceClass> read() {
        std::vector<SurfaceClass> rows;
        if (lines_.empty()) {
            fault(0, "the table is empty", "it needs a header and a row per class");
        } else if (read_header()) {
            for (std::size_t i = 1; i < lines_.size(); ++i) read_row(lines_[i], rows);
            if (lines_.size() == 1) fault(0, "no class below the header", "add a row per class");
        }
        throw_problems();
        return rows;
    }

  private:
    void fault(int line, std::string what, std::string todo) {
        problems_.push_back(
            {std::move(what), line > 0 ? place_of(name_, line) : name_, std::move(todo)});
    }

    void throw_problems() {
        constexpr std::size_t most = 50;  // a table of another kind is wrong in every line
        if (problems_.empty()) return;
        if (const auto count = problems_.size(); count > most) {
            problems_.resize(most);
            fault(0, "and " + std::to_string(count - most) + " problems more", {});
        }
        throw Error(Cause::input, problems_);
    }

    /// False when rows cannot be read for want of columns.
    bool read_header() {
        const auto& header = lines_.front();
        const auto& first = header.cells.front();
        if (header.cells.size() == 1 && first.find_first_of(";\t") != std::string::npos) {
            fault(header.number, "cells are separated by semicolons or tabs",
                  "separate them by commas and write decimals with a point");
            return false;
        }
        for (std::size_t i = 0; i < header.cells.size(); ++i) add_column(header, i);
        bool complete = true;
        for (const auto* required : {"code", "name", "albedo"}) {
            if (columns_.contains(required)) continue;
            complete = false;
            fault(header.number, std::string("the header has no column ") + required,
                  "the first line names the columns: code,name,albedo at least");
        }
        return complete;
    }

    void add_column(const CsvLine& header, std::size_t index) {
        const auto& known = known_columns();
        const auto column = lower_case(header.cells[index]);
        if (std::find(known.begin(), known.end(), column) == known.end())
            fault(header.number, "unknown column \"" + header.cells[index] + "\"",
                  suggestion(column, known));
        else if (!columns_.emplace(column, index).second)
            fault(header.number, "column " + column + " twice", "leave one out");
    }

    void read_row(const CsvLine& line, std::vector<SurfaceClass>& rows) {
        const auto wanted = lines_.front().cells.size();
        if (line.cells.size() != wanted) {
            fault(line.number,
                  std::to_string(line.cells.size()) + " cells where the header has " +
                      std::to_string(wanted),
                  "write decimals with a point, and quote cells that hold a comma");
            return;
        }
        const auto before = problems_.size();
        auto row = parsed(line);
        if (problems_.size() == before) rows.push_back(std::move(row));
    }

    SurfaceClass parsed(const CsvLine& line) {
        SurfaceClass row;
        row.code = code_of(line);
        row.name = cell(line, "name");
        row.source = cell(line, "source");
        if (row.name.empty()) fault(line.number, "name is empty", "give the class a name");
        row.kind = choice(line, "kind", Kind::other, kind_named, kind_names());
        row.scale = choice(line, "scale", Scale::facet, scale_named, scale_names());
        row.albedo = share(line, "albedo", not_known);
        row.albedo_low = share(line, "albedo_low", row.albedo);
        row.albedo_high = share(line, "albedo_high", row.albedo);
        row.emissivity = share(line, "emissivity", not_known);
        check_figures(line, row);
        return row;
    }

    void check_figures(const CsvLine& line, const SurfaceClass& row) {
        if (row.is_nodata()) {
            if (!std::isnan(row.albedo) || !std::isnan(row.albedo_low) ||
                !std::isnan(row.albedo_high) || !std::isnan(row.emissivity))
                fault(line.number, "a class of kind none has figures",
                      "leave them empty, or give it another kind");
            return;
        }
        if (cell(line, "albedo").empty())
            fault(line.number, "albedo is empty",
                  "give a number from 0 to 1, or kind none if the code means no data");
        if (row.albedo_low > row.albedo || row.albedo > row.albedo_high)
            fault(line.number,
                  "albedo " + shortest(row.albedo) + " is not between its low " +
                      shortest(row.albedo_low) + " and high " + shortest(row.albedo_high),
                  "low <= albedo <= high");
    }

    std::string cell(const CsvLine& line, const std::string& column) const {
        const auto found = columns_.find(column);
        if (found == columns_.end()) return {};
        return std::string(trimmed(line.cells[found->second]));
    }

    int code_of(const CsvLine& line) {
        const auto text = cell(line, "code");
        const auto code = parse_integer(text);
        if (!code || *code < std::numeric_limits<int>::min() ||
            *code > std::numeric_limits<int>::max()) {
            fault(line.number, "code \"" + text + "\" is not a whole number",
                  "write the raster's class number");
            return 0;
        }
        const auto [first, fresh] = codes_.emplace(*code, line.number);
        if (!fresh)
            fault(line.number, "code " + text + " again",
                  "it stands on line " + std::to_string(first->second) + " already");
        return static_cast<int>(*code);
    }

    /// A number from 0 to 1, or `otherwise` for an empty cell.
    double share(const CsvLine& line, const std::string& column, double otherwise) {
        const auto text = cell(line, column);
        if (text.empty()) return otherwise;
        const auto value = parse_number(text);
        if (!value)
            fault(line.number, column + " \"" + text + "\" is not a number",
                  "write decimals with a point: 0.15");
        else if (*value < 0 || *value > 1)
            fault(line.number, column + " " + text + " is outside 0 to 1",
                  "write a share: 0.15 for 15 %");
        else
            return *value;
        return not_known;
    }

    template <typename Value, typename Named>
    Value choice(const CsvLine& line, const std::string& column, Value otherwise, Named named,
                 const std::vector<std::string>& names) {
        const auto text = lower_case(cell(line, column));
        if (text.empty()) return otherwise;
        if (const auto value = named(text)) return *value;
        fault(line.number, "unknown " + column + " \"" + text + "\"", suggestion(text, names));
        return otherwise;
    }

    std::string name_;
    std::vector<Problem> problems_;
    std::vector<CsvLine> lines_;
    std::map<std::string, std::size_t> columns_;
    std::map<std::int64_t, int> codes_;  ///< and the line each was first seen on
};

std::string text_of_file(const std::filesystem::path& file) {
    constexpr std::uintmax_t largest = 16'000'000;  // a class table is some kilobytes
    std::error_code failed;
    if (!std::filesystem::is_regular_file(file, failed))
        throw Error(Cause::input, "class table is not a file", file.string(), "give a CSV file");
    if (std::filesystem::file_size(file, failed) > largest)
        throw Error(Cause::input, "class table is larger than 16 MB", file.string(),
                    "give a CSV file with a row per class");
    std::ifstream stream(file, std::ios::binary);
    std::ostringstream text;
    text << stream.rdbuf();
    if (!stream) throw Error(Cause::input, "class table cannot be read", file.string());
    return text.str();
}

}  // namespace

ClassTable parse_class_table(std::string_view text, const std::string& name) {
    return {name, ClassReader(text, name).read(), "sha256:" + sha256_of(text)};
}

ClassTable read_class_table(const std::filesystem::path& file) {
    return parse_class_table(text_of_file(file), file.string());
}

}  // namespace sunbudget
