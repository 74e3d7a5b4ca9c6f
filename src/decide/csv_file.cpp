#include "csv_file.hpp"

#include <fmt/format.h>

#include <cmath>

#include "sunbudget/raster/output_file.hpp"

namespace sunbudget {

namespace {

std::string cell(const std::string& text) {
    if (text.find_first_of("\",\n\r") == std::string::npos) return text;
    std::string quoted = "\"";
    for (const char c : text) quoted += c == '"' ? std::string("\"\"") : std::string(1, c);
    return quoted + '"';
}

std::string cell(double number) {
    return std::isnan(number) ? std::string() : fmt::format("{:.9g}", number);
}

}  // namespace

void write_csv_file(const std::filesystem::path& file, std::span<const FeatureColumn> columns,
                    std::size_t rows, const std::function<FeatureRow(std::size_t)>& row) {
    auto out = OutputFile::create(file);
    std::uint64_t written = 0;
    std::string text;
    const auto flush = [&] {
        out.write(written, std::as_bytes(std::span(text.data(), text.size())));
        written += text.size();
        text.clear();
    };
    for (const auto& column : columns) text += (text.empty() ? "" : ",") + cell(column.name);
    text += '\n';
    constexpr std::size_t piece_bytes = std::size_t{1} << 20;
    for (std::size_t r = 0; r < rows; ++r) {
        const auto cells = row(r);
        std::size_t i = 0;
        for (const auto& words : cells.texts) text += (i++ == 0 ? "" : ",") + cell(words);
        for (const double number : cells.numbers) text += "," + cell(number);
        text += '\n';
        if (text.size() > piece_bytes) flush();
    }
    flush();
    out.sync();
    out.close();
}

}  // namespace sunbudget
