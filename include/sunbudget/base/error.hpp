#pragma once

#include <stdexcept>
#include <string>
#include <vector>

namespace sunbudget {

/// Why a run ended; the value is the program's exit code.
enum class Cause {
    internal = 1,    ///< a bug of ours, or anything nobody foresaw
    usage = 2,       ///< the command line or the plan is wrong
    input = 3,       ///< an input is missing, unreadable or does not fit
    output = 4,      ///< the output cannot be written
    partial = 5,     ///< some tiles or parts are missing
    temporary = 75,  ///< worth another try
};

/// One thing that is wrong: what, where (file, line, key, block) and what to do about it.
/// `where` and `todo` may be empty.
struct Problem {
    std::string what;
    std::string where;
    std::string todo;
};

/// "WHAT (WHERE): WHAT TO DO", control characters made visible.
[[nodiscard]] std::string text_of(const Problem& problem);

/// The one exception of the program: a cause and every problem known, at least one.
class Error : public std::runtime_error {
  public:
    Error(Cause cause, std::string what, std::string where = {}, std::string todo = {});
    /// Several problems at once; `problems` may not be empty.
    Error(Cause cause, std::vector<Problem> problems);

    [[nodiscard]] Cause cause() const noexcept { return cause_; }
    [[nodiscard]] const std::vector<Problem>& problems() const noexcept { return problems_; }

    /// The same error with `where` added in front of each problem's place: the engine adds the
    /// block and the input as an error passes it.
    [[nodiscard]] Error at(const std::string& where) const;

  private:
    Cause cause_;
    std::vector<Problem> problems_;
};

}  // namespace sunbudget
