#include "sunbudget/base/error.hpp"

#include <cassert>

#include "sunbudget/base/text.hpp"

namespace sunbudget {

std::string text_of(const Problem& problem) {
    std::string text = problem.what;
    if (!problem.where.empty()) text += " (" + problem.where + ")";
    if (!problem.todo.empty()) text += ": " + problem.todo;
    return printable(text);
}

namespace {
std::string all_text(const std::vector<Problem>& problems) {
    std::string text;
    for (const auto& problem : problems) text += (text.empty() ? "" : "\n") + text_of(problem);
    return text;
}
}  // namespace

Error::Error(Cause cause, std::string what, std::string where, std::string todo)
    : Error(cause, std::vector<Problem>{{std::move(what), std::move(where), std::move(todo)}}) {}

Error::Error(Cause cause, std::vector<Problem> problems)
    : std::runtime_error(all_text(problems)), cause_(cause), problems_(std::move(problems)) {
    assert(!problems_.empty());
}

Error Error::at(const std::string& where) const {
    auto problems = problems_;
    for (auto& problem : problems)
        problem.where = problem.where.empty() ? where : where + ", " + problem.where;
    return {cause_, std::move(problems)};
}

}  // namespace sunbudget
