#pragma once

#include <string>
#include <vector>

namespace sunbudget::test {

struct Outcome {
    int exit_code = -1;  ///< 128 + signal where a signal ended it
    std::string out;
    std::string err;
};

/// Runs the program itself. `folder` is where it is started; empty: here. No shell in between.
[[nodiscard]] Outcome sunbudget(const std::vector<std::string>& arguments, const std::string& folder = {});

/// Runs a line of shell: for the general tools that results are compared with.
[[nodiscard]] Outcome shell(const std::string& line);

}  // namespace sunbudget::test
