#include "sunbudget/report/report_html.hpp"

#include <fmt/format.h>

#include "html.hpp"
#include "layer_maps.hpp"
#include "layer_words.hpp"
#include "report_tables.hpp"
#include "sunbudget/base/digest.hpp"
#include "sunbudget/base/version.hpp"
#include "sunbudget/raster/grid_build.hpp"
#include "sunbudget/report/run_json.hpp"
#include "zone_sections.hpp"

namespace sunbudget {

namespace {

std::string time_words(const TimePlan& times) {
    if (times.instant) return format_utc(*times.instant);
    const auto& periods = times.periods;
    const auto& first = periods.front().days.front();
    return fmt::format(
        "{} to {}{}, {}, steps of {:g} min", format_date(first.date),
        format_date(periods.back().days.back().date),
        first.weight != 1 ? " (one day standing for each month)" : "",
        periods.size() == 1 ? "one period" : fmt::format("{} periods", periods.size()),
        times.step_s / 60);
}

/// The policy names the script by its digest: no other script runs, whatever a name holds.
std::string script_digest(const std::string& script) {
    const auto hex = sha256_of("\n" + script);
    std::vector<std::byte> digest;
    for (std::size_t i = 0; i < hex.size(); i += 2)
        digest.push_back(static_cast<std::byte>(std::stoi(hex.substr(i, 2), nullptr, 16)));
    return base64(digest);
}

class Report {
  public:
    Report(const Run& run, const Execution& execution, const OutputSet& outputs)
        : run_(run),
          execution_(execution),
          maps_(run, execution, outputs),
          zones_(run, execution, outputs, maps_) {}
    [[nodiscard]] std::string whole();

  private:
    void add(const std::string& id, const std::string& title, const std::string& text);
    [[nodiscard]] std::string maps() const;
    [[nodiscard]] std::string changes() const;
    [[nodiscard]] std::string facts() const;
    [[nodiscard]] std::string footer() const;

    const Run& run_;
    const Execution& execution_;
    LayerMaps maps_;
    ZoneSections zones_;
    std::string navigation_, sections_;
};

void Report::add(const std::string& id, const std::string& title, const std::string& text) {
    if (text.empty()) return;
    navigation_ += "<li><a href=\"#" + id + "\">" + title + "</a></li>\n";
    sections_ += text;
}

std::string Report::maps() const {
    std::string text;
    for (std::size_t n = 0; n < run_.layers.size(); ++n) {
        if (!maps_.chosen(n) || is_change(run_.layers[n].file.name)) continue;
        text += run_.layers[n].file.sample == Sample::uint16 ? maps_.kinds_article(n)
                                                             : maps_.layer_article(n);
    }
    return section("maps", "Maps", text);
}

std::string Report::changes() const {
    std::string text;
    for (std::size_t n = 0; n < run_.layers.size(); ++n) {
        const auto& name = run_.layers[n].file.name;
        if (!maps_.chosen(n) || !is_change(name)) continue;
        // How much more or less the low and high albedo save stands in the tables.
        const auto& changed = run_.layers[n].changed;
        if (changed && !run_.changes[changed->change].case_name.empty()) continue;
        const auto base = maps_.layer_named(name.substr(0, name.find("__")));
        text +=
            is_difference(name) || !base ? maps_.layer_article(n) : maps_.slider_article(*base, n);
    }
    if (text.empty()) return {};
    return section("changes", "Changes",
                   "<p>What would be different, beside what is. Negative savings, at neighbours "
                   "that get more light, are shown "
                   "too.</p>\n" +
                       zones_.change_zones() + text);
}

std::string Report::facts() const {
    std::string text;
    const auto fact = [&](const char* name, const std::string& value) {
        text += std::string("<dt>") + name + "</dt><dd>" + escaped(value) + "</dd>\n";
    };
    fact("Grid", describe(run_.grid));
    if (run_.times) fact("Time", time_words(*run_.times));
    if (const auto* image = std::get_if<ReflectanceSurface>(&run_.surface);
        image != nullptr && !image->facts.scene.empty())
        fact("Image", image->facts.scene);
    fact("Plan", run_.plan_file.empty() ? "made from flags" : run_.plan_file);
    return text;
}

std::string Report::footer() const {
    return "<p>Made by sunbudget " + escaped(program_version()) + " from the plan with digest " +
           escaped(run_.plan_digest) + "; run " + run_digest(run_) +
           ". Colours: inferno, viridis (van der Walt &amp; Smith), cividis (Nu\u00f1ez, Anderton "
           "&amp; Renslow 2018), twilight (Bechtold), PuOr (ColorBrewer, Brewer &amp; "
           "Harrower).</p>\n";
}

std::string Report::whole() {
    add("maps", "Maps", maps());
    add("changes", "Changes", changes());
    add("zones", "Zones", zones_.zones());
    add("figures", "Figures", figures_section(run_, execution_));
    add("quality", "Data quality", quality_section(run_, execution_));
    add("methods", "Methods", methods_section(run_));
    add("inputs", "Inputs", inputs_section(run_));
    navigation_ += "<li><a href=\"#cautions\">Before you act on this</a></li>\n";
    const auto script = std::string(report_file("report.js"));
    return filled(
        report_file("report.html"),
        {{"title", escaped(run_.title.empty() ? "What the ground keeps of the sun" : run_.title)},
         {"version", escaped(program_version())},
         {"script_digest", script_digest(script)},
         {"style", std::string(report_file("report.css"))},
         {"facts", facts()},
         {"navigation", navigation_},
         {"sections", sections_},
         {"footer", footer()},
         {"script", script}});
}

}  // namespace

std::string report_html(const Run& run, const Execution& execution, const OutputSet& outputs) {
    return Report(run, execution, outputs).whole();
}

}  // namespace sunbudget
