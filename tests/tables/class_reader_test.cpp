#include <catch2/catch.hpp>
#include <cmath>
#include <fstream>

#include "sunbudget/base/error.hpp"
#include "sunbudget/tables/class_table.hpp"
#include "support/vectors.hpp"

using namespace sunbudget;
using Catch::Matchers::Contains;

namespace {

/// What the reader says about a text it must refuse.
std::vector<Problem> problems_of(std::string_view text) {
    try {
        (void)parse_class_table(text, "mine.csv");
    } catch (const Error& error) {
        CHECK(error.cause() == Cause::input);
        return error.problems();
    }
    FAIL("read without an error");
    return {};
}

/// The only problem of a text, as the user reads it.
std::string problem_of(std::string_view text) {
    const auto problems = problems_of(text);
    REQUIRE(problems.size() == 1);
    return text_of(problems.front());
}

}  // namespace

TEST_CASE("parse_class_table: code, name and albedo are enough", "[tables][edge]") {
    const auto table = parse_class_table("code,name,albedo\n3,Car park,0.12\n", "mine.csv");
    REQUIRE(table.rows().size() == 1);
    const auto& row = table.rows().front();
    CHECK(row.code == 3);
    CHECK(row.name == "Car park");
    CHECK(row.kind == Kind::other);
    CHECK(row.scale == Scale::facet);
    CHECK(row.albedo == 0.12);
    CHECK(row.albedo_low == 0.12);
    CHECK(row.albedo_high == 0.12);
    CHECK(std::isnan(row.emissivity));
    CHECK(row.source.empty());
    CHECK(table.name() == "mine.csv");
}

TEST_CASE("parse_class_table: columns in any order and case, comments, quotes, CRLF, mark",
          "[tables][edge]") {
    const auto table = parse_class_table(
        "\xef\xbb\xbf# surveyed in spring\r\n"
        "Name,ALBEDO,code,Kind,albedo_high,emissivity,scale,source,albedo_low\r\n"
        "\r\n"
        "\"Flat roof, \"\"gravel\"\"\", 0.15 ,-4,Roof,0.2,0.92,local,own survey,0.1\r\n"
        "# the last one\r\n"
        "Wei\xc3\x9f,1,5,,,,,,\r\n"
        ",,,,,,,,\r\n",
        "mine.csv");
    REQUIRE(table.rows().size() == 2);
    const auto& roof = *table.find(-4);
    CHECK(roof.name == "Flat roof, \"gravel\"");
    CHECK(roof.kind == Kind::roof);
    CHECK(roof.scale == Scale::local);
    CHECK(roof.albedo_low == 0.1);
    CHECK(roof.albedo == 0.15);
    CHECK(roof.albedo_high == 0.2);
    CHECK(roof.emissivity == 0.92);
    CHECK(roof.source == "own survey");
    CHECK(table.find(5)->albedo == 1.0);
    CHECK(table.find(5)->name == "Wei\xc3\x9f");
}

TEST_CASE("parse_class_table: kind none declares a code without data", "[tables][edge]") {
    const auto table = parse_class_table("code,name,kind,albedo\n0,Sea,none,\n1,Lawn,,0.2", "t");
    CHECK(table.find(0)->is_nodata());
    CHECK(std::isnan(table.find(0)->albedo));
    CHECK_FALSE(table.find(1)->is_nodata());
    CHECK_THAT(problem_of("code,name,kind,albedo\n0,Sea,none,0.06\n"),
               Contains("kind none has figures (mine.csv:2)"));
}

TEST_CASE("parse_class_table: names each kind of mistake with its line and the way out",
          "[tables][edge]") {
    const std::string head = "code,name,albedo\n1,Lawn,0.2\n";
    CHECK_THAT(problem_of(head + "1,Field,0.2\n"),
               Contains("code 1 again (mine.csv:3): it stands on line 2"));
    CHECK_THAT(problem_of(head + "2,Field,20\n"),
               Contains("albedo 20 is outside 0 to 1 (mine.csv:3): write a share"));
    CHECK_THAT(problem_of(head + "2,Field,-0.1\n"), Contains("outside 0 to 1"));
    CHECK_THAT(problem_of(head + "2,Field,nan\n"), Contains("albedo \"nan\" is not a number"));
    CHECK_THAT(problem_of(head + "2,Field,\"0,2\"\n"),
               Contains("is not a number (mine.csv:3): write decimals with a point"));
    CHECK_THAT(
        problem_of(head + "2,Field,0,2\n"),
        Contains("4 cells where the header has 3 (mine.csv:3): write decimals with a point"));
    CHECK_THAT(problem_of(head + "2,Field\n"), Contains("2 cells where the header has 3"));
    CHECK_THAT(problem_of(head + "2,Field,\n"), Contains("albedo is empty"));
    CHECK_THAT(problem_of(head + "2,,0.2\n"), Contains("name is empty (mine.csv:3)"));
    CHECK_THAT(problem_of(head + "2.5,Field,0.2\n"), Contains("\"2.5\" is not a whole number"));
    CHECK_THAT(problem_of(head + "3000000000,Field,0.2\n"), Contains("is not a whole number"));
    CHECK_THAT(problem_of(head + "2,\"Field,0.2\n"), Contains("opened and not closed"));
    CHECK_THAT(problem_of(head + "2,Fi\"eld,0.2\n"), Contains("quote in the middle"));
    CHECK_THAT(problem_of(head + "2,\"Field\" x,0.2\n"), Contains("after a closing quote"));
    CHECK_THAT(problem_of(head + "2,Fi\xe9ld,0.2\n"), Contains("not UTF-8 (mine.csv:3)"));
}

TEST_CASE("parse_class_table: optional columns are held to their rules", "[tables][edge]") {
    CHECK_THAT(problem_of("code,name,albedo,albedo_low\n1,Lawn,0.2,0.3\n"),
               Contains("albedo 0.2 is not between its low 0.3 and high 0.2"));
    CHECK_THAT(problem_of("code,name,albedo,albedo_high\n1,Lawn,0.2,0.1\n"),
               Contains("low <= albedo <= high"));
    CHECK_THAT(problem_of("code,name,albedo,emissivity\n1,Lawn,0.2,95\n"),
               Contains("emissivity 95 is outside 0 to 1"));
    CHECK_THAT(problem_of("code,name,albedo,kind\n1,Lawn,0.2,gras\n"),
               Contains("unknown kind \"gras\" (mine.csv:2): did you mean \"grass\"?"));
    CHECK_THAT(problem_of("code,name,albedo,scale\n1,Lawn,0.2,town\n"),
               Contains("unknown scale \"town\"") && Contains("facet, local"));
}

TEST_CASE("parse_class_table: a header that does not fit is refused", "[tables][edge]") {
    CHECK_THAT(problem_of(""), Contains("the table is empty (mine.csv)"));
    CHECK_THAT(problem_of("# nothing yet\n"), Contains("the table is empty"));
    CHECK_THAT(problem_of("code,name,albedo\n"), Contains("no class below the header"));
    CHECK_THAT(problem_of("code,name,albedo,emisivity\n1,Lawn,0.2,0.9\n"),
               Contains("unknown column \"emisivity\" (mine.csv:1): did you mean \"emissivity\"?"));
    CHECK_THAT(problem_of("code,name,albedo,Name\n1,Lawn,0.2,x\n"), Contains("column name twice"));
    CHECK_THAT(problem_of("code,albedo\n1,0.2\n"), Contains("the header has no column name"));
    CHECK_THAT(problem_of("code;name;albedo\n1;Lawn;0,2\n"),
               Contains("separated by semicolons or tabs (mine.csv:1): separate them by commas"));
    CHECK_THAT(text_of(problems_of("1,Lawn,0.2\n").back()),
               Contains("the first line names the columns"));
    CHECK_THAT(text_of(problems_of("\xff\xfe"
                                   "c")
                           .front()),
               Contains("UTF-16"));
}

TEST_CASE("parse_class_table: every problem at once, in the order of the lines", "[tables][edge]") {
    const auto problems = problems_of(
        "code,name,albedo,kind\n"
        "x,Lawn,1.2,gras\n"
        "2,,0.2,tree\n"
        "2,Wood,0.1,tree\n");
    REQUIRE(problems.size() == 5);
    CHECK(problems[0].where == "mine.csv:2");
    CHECK(problems[2].where == "mine.csv:2");
    CHECK(problems[3].where == "mine.csv:3");
    CHECK(problems[4].where == "mine.csv:4");
}

TEST_CASE("parse_class_table: a file of another kind does not flood the screen", "[tables][edge]") {
    std::string text = "code,name,albedo\n";
    for (int i = 0; i < 1000; ++i) text += "a,b\n";
    const auto problems = problems_of(text);
    CHECK(problems.size() == 51);
    CHECK_THAT(problems.back().what, Contains("950 problems more"));
}

TEST_CASE("read_class_table: reads a file and names it in its problems", "[tables][edge]") {
    const test::TemporaryFolder folder;
    const auto file = folder.path() / "town.csv";
    std::ofstream(file) << "code,name,albedo\n1,Lawn,0.2\n2,Yard,2\n";
    CHECK_THROWS_WITH(read_class_table(file), Contains("town.csv:3"));
    std::ofstream(file) << "code,name,albedo\n1,Lawn,0.2\n";
    CHECK(class_table(file.string()).find(1)->albedo == 0.2);
    CHECK_THROWS_WITH(read_class_table(folder.path()), Contains("not a file"));
    CHECK_THROWS_WITH(read_class_table(folder.path() / "gone.csv"), Contains("not a file"));
}
