// Curves of periods, and the order of savings.
#include <catch2/catch.hpp>

#include <fstream>
#include <regex>

#include "charts.hpp"
#include "support/vectors.hpp"
#include "zone_view.hpp"

using namespace sunbudget;
using namespace sunbudget::test;

namespace {
struct Label {
    double middle;
    std::string text;
};
/// Names below the curve.
std::vector<Label> labels_of(const std::string& svg) {
    const std::regex label(
        "<text x=\"([0-9.]+)\" y=\"174.0\" text-anchor=\"middle\">([^<]*)</text>");
    std::vector<Label> labels;
    for (std::sregex_iterator at(svg.begin(), svg.end(), label), end; at != end; ++at)
        labels.push_back({std::stod((*at)[1]), (*at)[2]});
    return labels;
}
}  // namespace

TEST_CASE("curve_svg: names of periods stand side by side, however long and many",
          "[report][property]") {
    const auto apart = [](const std::vector<std::string>& names) {
        std::vector<CurvePoint> points;
        for (const auto& name : names) points.push_back({name, static_cast<double>(points.size())});
        const auto labels = labels_of(curve_svg(points, "W/m2"));
        REQUIRE(!labels.empty());
        // A letter of the chart's 11 px type is some 6 px wide.
        for (std::size_t i = 1; i < labels.size(); ++i)
            CHECK(labels[i].middle - labels[i - 1].middle >=
                  6.0 * static_cast<double>(labels[i].text.size()));
        return labels;
    };
    CHECK(apart({"2025-01-01 to 2025-02-28", "2025-03 to 2025-05", "2025-06 to 2025-08",
                 "2025-09 to 2025-11", "2025-12-01 to 2025-12-31"})[1]
              .text == "2025-06");
    apart(std::vector<std::string>(365, "2025-06-21"));
    CHECK(apart({"a", "b", "c", "d"}).size() == 4);
}

TEST_CASE("curve_svg: a long name is cut between characters", "[report][edge]") {
    // Thirteen times a letter of two bytes.
    std::string name;
    for (int i = 0; i < 13; ++i) name += "\xC3\xA4";
    const std::vector<CurvePoint> points{{name, 1}, {"b", 2}};
    const auto labels = labels_of(curve_svg(points, "1"));
    REQUIRE(!labels.empty());
    CHECK(labels[0].text == name.substr(0, 24));
}

TEST_CASE("change_view: what is kept less decides the order, not the light that arrives",
          "[report][property]") {
    const TemporaryFolder folder;
    const auto csv = folder.path() / "changes.csv";
    std::ofstream(csv) << "fid,change,insolation_saved_sum,net_shortwave_saved_sum\n1,pale,-1,5\n2,"
                          "pale,-9,80\n3,pale,0,0\n4,pale,-3,-2\n";
    const auto view = change_view(csv, 1, 10);
    REQUIRE(view.rows.size() == 3);
    CHECK(view.rows[0].cells[0] == "2");
    CHECK(view.rows[1].cells[0] == "1");
    CHECK(view.rows[2].cells[0] == "4");
}
