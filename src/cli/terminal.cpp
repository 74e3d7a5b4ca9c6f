#include "terminal.hpp"

#include <fmt/format.h>
#include <sys/ioctl.h>
#include <unistd.h>

#include <algorithm>
#include <cerrno>
#include <cstdlib>
#include <cstring>
#include <string_view>

#include "sunbudget/base/text.hpp"

namespace sunbudget {

namespace {

void write_all(const std::string& text) {
    std::size_t done = 0;
    while (done < text.size()) {
        const auto wrote = write(STDERR_FILENO, text.data() + done, text.size() - done);
        if (wrote <= 0) return;  // a log that cannot be written must not fail the run
        done += static_cast<std::size_t>(wrote);
    }
}

bool environment_is(const char* name) {
    const char* value = std::getenv(name);
    return value != nullptr && *value != '\0';
}

std::string time_left(double seconds) {
    const long whole = static_cast<long>(seconds + 0.5);
    if (whole >= 3600) return fmt::format("{} h {:02} min left", whole / 3600, whole / 60 % 60);
    if (whole >= 60) return fmt::format("{} min {:02} s left", whole / 60, whole % 60);
    return fmt::format("{} s left", whole);
}

}  // namespace

void print_result(const std::string& text) {
    std::size_t done = 0;
    while (done < text.size()) {
        const auto wrote = write(STDOUT_FILENO, text.data() + done, text.size() - done);
        if (wrote >= 0) {
            done += static_cast<std::size_t>(wrote);
            continue;
        }
        if (errno == EPIPE) return;
        if (errno != EINTR)
            throw Error(Cause::output,
                        std::string("cannot write the result: ") + std::strerror(errno),
                        "standard output");
    }
}

Terminal::Terminal(bool quiet) : quiet_(quiet) {
    const char* term = std::getenv("TERM");
    const bool terminal =
        isatty(STDERR_FILENO) != 0 && std::string_view(term == nullptr ? "" : term) != "dumb";
    bar_allowed_ = terminal && !quiet;
    colour_ = terminal && !environment_is("NO_COLOR");
}

void Terminal::clear_bar() {
    if (bar_shown_) write_all("\r\x1b[K");
    bar_shown_ = false;
}

void Terminal::line(const std::string& label, const std::string& colour, const std::string& text) {
    const std::lock_guard hold(mutex_);
    clear_bar();
    const auto marked =
        colour_ && !colour.empty() ? "\x1b[" + colour + "m" + label + "\x1b[0m" : label;
    write_all("sunbudget: " + marked + printable(text) + "\n");
}

void Terminal::error(const Error& error) {
    for (const auto& problem : error.problems()) line("error: ", "1;31", text_of(problem));
}
void Terminal::error(const std::string& text) {
    line("error: ", "1;31", text);
}
void Terminal::warning(const std::string& text) {
    line("warning: ", "1;33", text);
}
void Terminal::note(const std::string& text) {
    if (!quiet_) line("", "", text);
}

void Terminal::progress(const std::string& step, double done, double total,
                        const std::string& unit) {
    if (!bar_allowed_ || total <= 0) return;
    const std::lock_guard hold(mutex_);
    const auto now = std::chrono::steady_clock::now();
    if (step != step_) {
        step_ = step;
        step_start_ = now;
    } else if (now - last_drawn_ < std::chrono::milliseconds(100)) {
        return;
    }
    last_drawn_ = now;
    const double share = std::clamp(done / total, 0.0, 1.0);
    const double seconds = std::chrono::duration<double>(now - step_start_).count();
    winsize size{};
    const int columns =
        ioctl(STDERR_FILENO, TIOCGWINSZ, &size) == 0 && size.ws_col > 0 ? size.ws_col : 80;
    std::string tail = fmt::format(" {:3.0f} %", share * 100);
    if (seconds > 0.5 && share > 0)
        tail += fmt::format("  {:.3g} {}/s  {}", done / seconds, unit,
                            time_left(seconds / share * (1 - share)));
    const int room = std::clamp(columns - static_cast<int>(step.size() + tail.size()) - 4, 0, 30);
    const int full = static_cast<int>(share * room);
    const auto bar = std::string(static_cast<std::size_t>(full), '#') +
                     std::string(static_cast<std::size_t>(room - full), '.');
    auto text = step + " " + bar + tail;
    if (static_cast<int>(text.size()) > columns - 1)
        text.resize(static_cast<std::size_t>(columns - 1));
    write_all("\r" + text + "\x1b[K");
    bar_shown_ = true;
}

void Terminal::end_progress() {
    const std::lock_guard hold(mutex_);
    clear_bar();
    step_.clear();
}

}  // namespace sunbudget
