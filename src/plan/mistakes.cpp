#include "mistakes.hpp"

#include <algorithm>
#include <limits>

namespace sunbudget {

namespace {
// A file that is no plan at all would give thousands.
constexpr std::size_t most_told = 100;
}  // namespace

std::string Place::text() const {
    if (is_default) return "default of " + key;
    if (line == 0) return file.empty() ? key : file + " " + key;
    return file + ":" + std::to_string(line) + (key.empty() ? "" : ": " + key);
}

void Mistakes::add(const Place& place, std::string what, std::string todo) {
    const int line = place.line > 0 ? place.line : std::numeric_limits<int>::max();
    found_.push_back({line, {std::move(what), place.text(), std::move(todo)}});
}

void Mistakes::throw_if_any() {
    if (found_.empty()) return;
    std::ranges::stable_sort(found_, {}, &Found::line);
    std::vector<Problem> all;
    for (std::size_t i = 0; i < std::min(found_.size(), most_told); ++i)
        all.push_back(std::move(found_[i].problem));
    if (found_.size() > most_told)
        all.push_back({"there are " + std::to_string(found_.size() - most_told) + " more problems",
                       {},
                       "mend these first"});
    throw Error(Cause::usage, std::move(all));
}

}  // namespace sunbudget
