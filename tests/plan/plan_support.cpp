#include "plan_support.hpp"

#include <fstream>
#include <sstream>

namespace sunbudget::test {

std::string text_of_file(const std::filesystem::path& file) {
    std::ifstream stream(file, std::ios::binary);
    if (!stream) throw std::runtime_error("cannot read " + file.string());
    std::ostringstream text;
    text << stream.rdbuf();
    return text.str();
}

std::vector<Problem> problems_of(const PlanText& plan) {
    try {
        (void)parse_plan(plan);
        return {};
    } catch (const Error& error) {
        if (error.cause() != Cause::usage) throw;
        return error.problems();
    }
}

Plan plan_of(const std::string& text, const std::vector<Override>& overrides) {
    return parse_plan({"/plans/plan.yaml", text, overrides});
}

}  // namespace sunbudget::test
