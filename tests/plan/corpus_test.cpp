#include <algorithm>
#include <catch2/catch.hpp>

#include "plan_support.hpp"
#include "sunbudget/base/text.hpp"
#include "support/vectors.hpp"

namespace sunbudget::test {

namespace {

/// A problem that a plan of the corpus expects: "# <- KEY: WORDS | WORDS" at its line, or
/// "# expect LINE: KEY: WORDS" anywhere. KEY "-" is the plan itself.
struct Expected {
    std::string where;
    std::vector<std::string> words;
    std::string text;
};

Expected expected_at(const std::string& file, int line, std::string_view text) {
    text = trimmed(text);
    const auto colon = text.find(": ");
    REQUIRE(colon != text.npos);
    const std::string key(text.substr(0, colon));
    Expected expected{file + ":" + std::to_string(line), {}, std::string(text)};
    if (key != "-") expected.where += ": " + key;
    for (const auto& words : split(text.substr(colon + 2), '|'))
        expected.words.emplace_back(trimmed(words));
    return expected;
}

std::vector<Expected> expected_of(const std::string& file, const std::string& text) {
    constexpr std::string_view here = "# <- ";
    constexpr std::string_view elsewhere = "# expect ";
    std::vector<Expected> all;
    int number = 0;
    for (const std::string_view line : split(text, '\n')) {
        ++number;
        if (line.starts_with(elsewhere))
            all.push_back(expected_at(file, std::stoi(std::string(line.substr(elsewhere.size()))),
                                      line.substr(line.find(": ") + 2)));
        for (auto mark = line.find(here); mark != line.npos;) {
            const auto next = line.find(here, mark + 1);
            const auto begin = mark + here.size();
            all.push_back(expected_at(file, number, line.substr(begin, next - begin)));
            mark = next;
        }
    }
    return all;
}

std::vector<std::filesystem::path> plans(const std::string& folder) {
    std::vector<std::filesystem::path> files;
    for (const auto& entry : std::filesystem::directory_iterator(testdata("plans/" + folder)))
        files.push_back(entry.path());
    std::ranges::sort(files);
    REQUIRE_FALSE(files.empty());
    return files;
}

bool matches(const Problem& problem, const Expected& expected) {
    return problem.where == expected.where &&
           std::ranges::all_of(expected.words, [&](const auto& words) {
               return text_of(problem).find(words) != std::string::npos;
           });
}

}  // namespace

TEST_CASE("every bad plan is refused for what is wrong with it, at its line, and for nothing else",
          "[plan][edge]") {
    for (const auto& file : plans("bad")) {
        const auto text = text_of_file(file);
        auto problems = problems_of({file.string(), text, {}});
        std::string told;
        for (const auto& problem : problems) told += text_of(problem) + "\n";
        INFO(file << "\n" << told);
        const auto all = expected_of(file.string(), text);
        CHECK_FALSE(all.empty());
        for (const auto& expected : all) {
            INFO(expected.text);
            const auto found = std::ranges::find_if(
                problems, [&](const auto& problem) { return matches(problem, expected); });
            CHECK(found != problems.end());
            if (found != problems.end()) problems.erase(found);
        }
        CHECK(problems.empty());
    }
}

TEST_CASE("problems come in the order of the file's lines", "[plan][property]") {
    const auto file = testdata("plans/bad/many_at_once.yaml");
    const auto problems = problems_of({"plan", text_of_file(file), {}});
    REQUIRE(problems.size() > 10);
    CHECK(std::ranges::is_sorted(problems, {}, [](const auto& problem) {
        return std::stoi(problem.where.substr(problem.where.find(':') + 1));
    }));
}

TEST_CASE("a good plan is read, written and read again without a change", "[plan][property]") {
    for (const auto& file : plans("good")) {
        INFO(file);
        const auto plan = read_plan(file);
        const auto text = plan_text(plan);
        INFO(text);
        const auto again = parse_plan({plan.file, text, {}});
        CHECK(again == plan);
        CHECK(plan_text(again) == text);
        CHECK(plan_digest(again) == plan_digest(plan));
        CHECK(with_defaults(with_defaults(plan)) == with_defaults(plan));
    }
}

TEST_CASE("a plan written for another folder still names the same files", "[plan][property]") {
    for (const auto& file : plans("good")) {
        INFO(file);
        const auto plan = read_plan(file);
        const auto folder = file.parent_path().parent_path() / "elsewhere";
        const auto text = plan_text(plan, folder);
        INFO(text);
        CHECK(parse_plan({(folder / "plan.yaml").string(), text, {}}) == plan);
    }
}

}  // namespace sunbudget::test
