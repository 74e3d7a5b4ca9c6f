#pragma once

#include <sys/types.h>

#include <filesystem>
#include <string>
#include <vector>

#include "support/vectors.hpp"

namespace sunbudget::test {

struct Outcome {
    int exit_code = -1;  ///< 128 + signal where a signal ended it
    std::string out;
    std::string err;
};

/// Where and how a program is started.
struct Start {
    std::string folder{};                    ///< empty: here
    std::vector<std::string> environment{};  ///< "NAME=VALUE", or "NAME" to take it away
};

/// The program under test, and the folder it was built in.
[[nodiscard]] std::string program_path();
[[nodiscard]] std::filesystem::path build_folder();

/// Runs the program itself. No shell in between.
[[nodiscard]] Outcome sunbudget(const std::vector<std::string>& arguments, const Start& start = {});

/// Runs a line of shell: for the general tools that results are compared with.
[[nodiscard]] Outcome shell(const std::string& line);
/// `text` as one word of the shell.
[[nodiscard]] std::string word(const std::string& text);

/// The program while it runs.
class Running {
  public:
    explicit Running(const std::vector<std::string>& arguments, const Start& start = {});
    ~Running();
    Running(const Running&) = delete;
    Running& operator=(const Running&) = delete;

    void send(int signal) const;
    /// Waits until it has ended, at most so long; then it is killed and the exit code is -1.
    [[nodiscard]] Outcome end(double limit_s = 300);

  private:
    TemporaryFolder scratch_;
    pid_t process_;
};

/// Runs the program with its stderr on a terminal of 80 columns, and gives what that shows.
[[nodiscard]] Outcome sunbudget_on_terminal(const std::vector<std::string>& arguments,
                                            const Start& start = {});

[[nodiscard]] std::string content(const std::filesystem::path& file);
void write(const std::filesystem::path& file, const std::string& text);
/// Names in a folder, hidden ones too, sorted; nothing where there is no folder.
[[nodiscard]] std::vector<std::string> names_in(const std::filesystem::path& folder);

}  // namespace sunbudget::test
