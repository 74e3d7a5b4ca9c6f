// The report as one file that needs no other.
#include <catch2/catch.hpp>

#include <cstdlib>
#include <fstream>
#include <regex>

#include "page.hpp"
#include "support/vectors.hpp"

using namespace sunbudget::test;
using Catch::Contains;

namespace {
int count(const std::string& text, const std::string& part) {
    int found = 0;
    for (auto at = text.find(part); at != std::string::npos; at = text.find(part, at + part.size()))
        ++found;
    return found;
}

/// The text without the pictures' digits.
std::string readable(const std::string& page) {
    const std::string mark = "base64,";
    std::string text;
    std::size_t from = 0;
    for (auto at = page.find(mark); at != std::string::npos; at = page.find(mark, from)) {
        text += page.substr(from, at + mark.size() - from);
        from = page.find('"', at);
    }
    return text + page.substr(from);
}
}  // namespace

TEST_CASE("report: names from outside do no harm in it", "[report][edge]") {
    const TemporaryFolder folder;
    const auto page = readable(invented_page(folder.path(), hostile, 120, 90));
    CHECK(count(page, "<script") == 1);
    CHECK(count(page, "<img") == count(page, "<img alt=\"Map of") +
                                     count(page, "<img class=\"before\" alt=\"Map of") +
                                     count(page, "<img class=\"after\" alt=\"Map of"));
    CHECK(count(page, "example.org") ==
          count(page, "src=http://example.org/x onerror=alert(2)&gt;&amp;"));
    CHECK_THAT(page, Contains("&lt;script&gt;alert(1)&lt;/script&gt;") &&
                         Contains("&lt;b&gt;&amp;&quot;0"));
    CHECK(page.find('\x01') == std::string::npos);
}

TEST_CASE("report: it refers to no other file, and the policy in it forbids any", "[report]") {
    const TemporaryFolder folder;
    const auto page = readable(invented_page(folder.path(), "Summer", 300, 200));
    const std::regex reference(
        "(?:src|href|action|data|poster)=\"([^\"]*)\"|url\\(([^)]*)\\)|@import");
    for (auto found = std::sregex_iterator(page.begin(), page.end(), reference);
         found != std::sregex_iterator(); ++found) {
        const auto target = (*found)[1].str();
        CAPTURE(found->str());
        CHECK((target.starts_with("#") || target.starts_with("data:")));
    }
    CHECK_THAT(page, Contains("default-src 'none'") && Contains("script-src 'sha256-"));
    CHECK(page.find("{{") == std::string::npos);
}

TEST_CASE("report: maps, a slider, ranked zones, curve, methods, inputs and cautions are in it",
          "[report]") {
    const TemporaryFolder folder;
    const auto page = readable(invented_page(folder.path(), "Summer", 300, 200));
    for (const auto* id :
         {"maps", "changes", "zones", "figures", "quality", "methods", "inputs", "cautions"})
        CHECK_THAT(page, Contains("<section id=\"" + std::string(id) + "\""));
    CHECK_THAT(page, Contains("type=\"range\"") && Contains("aria-sort=\"ascending\"") &&
                         Contains("Rigollier") && Contains("sha256:00"));
    CHECK_THAT(page, Contains("Period 2025-07: 2025-07-01 to 2025-07-31"));  // the greatest mean
    CHECK_THAT(page, Contains("Curve over 3 periods"));
    CHECK_THAT(page, Contains("Zones are places, not blame"));
    CHECK_THAT(page, Contains("\u2212"
                              "20"));  // a negative saving is shown
    CHECK(count(page, "<tr data-zone=") == 6);
    CHECK(count(page, "id=\"zone-") == 6);
    // Ranked by the mean: the first row is the zone of rank 1, the last one that of rank 6.
    CHECK(page.find("parcel 1</button>") < page.find("parcel 5</button>"));
    CHECK(page.find("parcel 5</button>") < page.find("&quot;0</button>"));
}

TEST_CASE("report: the same run gives the same bytes, and its size does not grow with the raster's",
          "[report][property]") {
    const TemporaryFolder folder;
    const auto page = invented_page(folder.path(), "Summer", 800, 600);
    CHECK(invented_page(folder.path(), "Summer", 800, 600) == page);
    const auto larger = invented_page(folder.path(), "Summer", 2400, 1800);
    // Nine times the pixels, as many dots: they pack less well, since the picture shows finer ground.
    CHECK(larger.size() < 2 * page.size());
}

// For browser_test.py: writes the page to the file that SUNBUDGET_PAGE names.
TEST_CASE("report: a page for the browser", "[.page]") {
    const char* file = std::getenv("SUNBUDGET_PAGE");
    REQUIRE(file != nullptr);
    const TemporaryFolder folder;
    std::ofstream(file, std::ios::binary)
        << invented_page(folder.path(), "Hot months " + hostile, 400, 300);
}
