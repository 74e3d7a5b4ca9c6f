#include "report_tables.hpp"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>

#include "charts.hpp"
#include "html.hpp"
#include "layer_words.hpp"
#include "quality_counts.hpp"
#include "sunbudget/base/text.hpp"
#include "sunbudget/report/run_json.hpp"

namespace sunbudget {

namespace {

std::string cell(const std::string& text) {
    return "<td>" + escaped(text) + "</td>";
}
std::string number(double value, const std::string& text) {
    return fmt::format("<td class=\"number{}\" data-value=\"{}\">{}</td>",
                       value < 0 ? " below" : "",
                       std::isnan(value) ? std::string() : shortest(value), text);
}
std::string number(double value) {
    return number(value, for_people(value));
}

std::string share(double part, double all) {
    const double percent = all > 0 ? part / all * 100 : 0;
    return part > 0 && percent < 0.01 ? "below 0.01 %" : fmt::format("{:.2f} %", percent);
}

std::string table(const std::string& caption, const std::vector<std::string>& heads,
                  const std::string& rows) {
    std::string text = "<div class=\"scroll\" tabindex=\"0\" role=\"region\" aria-label=\"" +
                       caption + "\"><table><caption>" + caption + "</caption><thead><tr>";
    for (const auto& head : heads)
        text += head.starts_with('#')
                    ? "<th scope=\"col\" class=\"number\">" + head.substr(1) + "</th>"
                    : "<th scope=\"col\">" + head + "</th>";
    return text + "</tr></thead><tbody>\n" + rows + "</tbody></table></div>\n";
}

std::string list(const std::vector<std::string>& lines) {
    std::string text = "<ul class=\"notes\">\n";
    for (const auto& line : lines) text += "<li>" + escaped(line) + "</li>\n";
    return text + "</ul>\n";
}

std::string band_row(const OutputLayer& layer, std::size_t band, const BandStatistics& figures) {
    const auto& file = layer.file;
    const double missing = static_cast<double>(figures.pixels - figures.count);
    const auto of = [&](double value) { return number(figures.count > 0 ? value : std::nan("")); };
    return "<tr><th scope=\"row\">" + escaped(words_for(file.name)) + "</th>" +
           cell(file.bands.size() == 1 && file.bands[band].description == file.name
                    ? ""
                    : file.bands[band].description) +
           cell(file.unit == "1" ? "share of 1" : file.unit) + of(figures.mean) + of(figures.min) +
           of(figures.max) + of(figures.stddev) + "<td class=\"number\">" +
           share(missing, static_cast<double>(figures.pixels)) + "</td></tr>\n";
}

}  // namespace

namespace {

/// What a station's record left open.
std::string record_notes(const Run& run) {
    if (!run.light.measured) return {};
    const auto& measured = *run.light.measured;
    std::vector<std::string> lines{
        fmt::format("Light from a record of {}: {} days, {} of them missing, {} with gaps filled "
                    "by their own mean; "
                    "{:.1f} sunlit hours without a value",
                    measured.from, measured.days, measured.days_missing, measured.days_with_gaps,
                    measured.gap_h)};
    if (measured.split_intervals > 0)
        lines.push_back(fmt::format("Sky light was split off the global light in {} intervals",
                                    measured.split_intervals));
    for (std::size_t band = 0; band < run.light.thin.size(); ++band)
        if (run.light.thin[band])
            lines.push_back("Too little was measured, no data: " +
                            (run.times->instant ? "the instant" : run.times->periods[band].name));
    return "<h3>The record</h3>\n" + list(lines);
}

}  // namespace

std::string section(const std::string& id, const std::string& title, const std::string& content) {
    return fmt::format(
        "<section id=\"{0}\" aria-labelledby=\"{0}-title\">\n<h2 "
        "id=\"{0}-title\">{1}</h2>\n{2}</section>\n",
        id, title, content);
}

std::string figures_section(const Run& run, const Execution& execution) {
    std::string rows;
    std::size_t count = 0;
    for (std::size_t n = 0; n < run.layers.size(); ++n)
        for (std::size_t band = 0; band < execution.layers[n].bands.size(); ++band, ++count)
            rows += band_row(run.layers[n], band, execution.layers[n].bands[band]);
    auto text = table(
        "Every layer and period, all pixels of the grid counted alike",
        {"Layer", "Period", "Unit", "#Mean", "#Least", "#Greatest", "#Spread", "#Without value"},
        rows);
    constexpr std::size_t many = 30;
    if (count > many)
        text = fmt::format(
            "<details><summary>Figures of {} layers and periods</summary>\n{}</details>\n", count,
            text);
    return section("figures", "Figures",
                   text +
                       "<p>Spread is the standard deviation over the pixels. A mean in W/m2 counts "
                       "every hour of the period, night included.</p>\n");
}

std::string quality_section(const Run& run, const Execution& execution) {
    double all = 0;
    for (const auto& [flag, pixels] : execution.flags) all += static_cast<double>(pixels);
    std::string rows;
    for (const auto& row : quality_rows()) {
        if (row.mask == quality::source_mask && !run.has_surface()) continue;
        if (const auto pixels = pixels_of(row, execution); pixels > 0)
            rows += "<tr><th scope=\"row\">" + escaped(row.text) + "</th><td class=\"number\">" +
                    std::to_string(pixels) + "</td><td class=\"number\">" +
                    share(static_cast<double>(pixels), all) + "</td></tr>\n";
    }
    std::string text = rows.empty() ? "<p>No pixel was marked.</p>\n"
                                    : table(
                                          "Pixels by where their albedo came from and by what was "
                                          "seen; one may count in several lines",
                                          {"What", "#Pixels", "#Share"}, rows);
    if (execution.infinities > 0)
        text += fmt::format("<p>{} infinite numbers in the inputs counted as without value.</p>\n",
                            execution.infinities);
    text += record_notes(run);
    auto warnings = run.warnings;
    for (const auto& warning : closing_warnings(run, execution)) warnings.push_back(warning);
    text += "<h3>Warnings</h3>\n" + (warnings.empty() ? "<p>None.</p>\n" : list(warnings));
    text +=
        "<h3>Assumptions</h3>\n" +
        (run.assumptions.empty() ? "<p>None beyond the methods'.</p>\n" : list(run.assumptions));
    return section("quality", "Data quality", text);
}

std::string methods_section(const Run& run) {
    std::string rows;
    for (const auto* method : run.methods)
        rows += "<tr><th scope=\"row\">" + escaped(words_for(method->family)) + "</th>" +
                cell(method->name) + cell(method->text) + cell(method->source) + "</tr>\n";
    auto text =
        table("Methods with their sources", {"What for", "Method", "In words", "Source"}, rows);
    std::vector<std::string> numbers;
    for (std::size_t i = 0; run.times && i < sky_parameter_count; ++i)
        if (!std::isnan(run.sky.parameters[i][0])) {
            std::vector<std::string> months;
            for (const double value : run.sky.parameters[i]) months.push_back(shortest(value));
            const bool same = std::ranges::count(months, months[0]) == 12;
            numbers.push_back(fmt::format(
                "{} {}: {}", name_of(run.sky.model), name_of(static_cast<SkyParameter>(i)),
                same ? months[0] : joined(months, ", ") + " (January first)"));
        }
    if (!numbers.empty()) text += "<h3>Numbers of the sky</h3>\n" + list(numbers);
    return section("methods", "Methods", text);
}

std::string inputs_section(const Run& run) {
    std::string rows;
    for (const auto& input : run.inputs) {
        std::string notes;
        if (!input.notes.empty())
            notes = "<details><summary>" + std::to_string(input.notes.size()) + " notes</summary>" +
                    list(input.notes) + "</details>";
        rows += "<tr><th scope=\"row\">" + escaped(input.role) + "</th>" + cell(input.name) +
                "<td class=\"number\">" + fmt::format("{:.1f} %", input.coverage * 100) +
                "</td><td><code>" + escaped(input.digest) + "</code></td><td>" + notes +
                "</td></tr>\n";
    }
    return section("inputs", "Inputs",
                   table("Files and tables that were read",
                         {"Plan key", "File", "#Covers", "Digest", "Notes"}, rows));
}

std::string zone_table(const ZoneView& view, const std::string& id, const std::string& caption) {
    auto text = fmt::format(
        "<p id=\"{0}-said\" role=\"status\" aria-live=\"polite\"></p>\n"
        "<div class=\"scroll tall\" tabindex=\"0\" role=\"region\" aria-label=\"{1}\">"
        "<table class=\"sorted\" data-said=\"{0}-said\"><caption>{1}; press a heading to sort, a "
        "name to see the zone on the "
        "map</caption><thead><tr>",
        id, caption);
    const auto is_text = [&](std::size_t column) {
        return column == 0 || view.columns[column] == "change";
    };
    for (std::size_t i = 0; i < view.columns.size(); ++i)
        text += fmt::format(
            "<th scope=\"col\"{} aria-sort=\"{}\"><button type=\"button\">{}</button></th>",
            is_text(i) ? "" : " class=\"number\"",
            view.columns[i] == view.ranked_by + "_rank_mean" ? "ascending" : "none",
            escaped(words_for(view.columns[i])));
    text += "</tr></thead><tbody>\n";
    for (const auto& row : view.rows) {
        text += fmt::format(
            "<tr data-zone=\"{}\"><th scope=\"row\"><button type=\"button\" "
            "aria-pressed=\"false\">{}</button></th>",
            row.zone, escaped(row.cells.front()));
        for (std::size_t i = 1; i < row.cells.size(); ++i)
            text += is_text(i) ? cell(row.cells[i])
                               : number(parse_number(row.cells[i]).value_or(std::nan("")));
        text += "</tr>\n";
    }
    return text + "</tbody></table></div>\n";
}

}  // namespace sunbudget
