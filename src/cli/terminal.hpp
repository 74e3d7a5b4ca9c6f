#pragma once

#include <chrono>
#include <mutex>
#include <string>

#include "sunbudget/base/error.hpp"

namespace sunbudget {

/// Writes a result that was asked for to stdout. A reader who has seen enough and left is no failure.
/// Throws Error(output) when it cannot be written.
void print_result(const std::string& text);

/// The one writer to stderr: errors, warnings, notes and the progress bar never mix.
class Terminal {
  public:
    explicit Terminal(bool quiet);

    void error(const Error& error);
    void error(const std::string& text);
    void warning(const std::string& text);
    /// A line for people; nothing under --quiet.
    void note(const std::string& text);

    /// One redrawn line with a bar, rate and time left; only on a terminal and not under --quiet.
    /// Elsewhere nothing.
    void progress(const std::string& step, double done, double total, const std::string& unit);
    void end_progress();

  private:
    void line(const std::string& label, const std::string& colour, const std::string& text);
    void clear_bar();

    std::mutex mutex_;
    bool quiet_;
    bool bar_allowed_;
    bool colour_;
    bool bar_shown_ = false;
    std::string step_;
    std::chrono::steady_clock::time_point step_start_{};
    std::chrono::steady_clock::time_point last_drawn_{};
};

}  // namespace sunbudget
