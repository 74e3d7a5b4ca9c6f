#include "program.hpp"

#include <fcntl.h>
#include <pty.h>
#include <signal.h>
#include <sys/wait.h>
#include <unistd.h>

#include <algorithm>
#include <chrono>
#include <cstdlib>
#include <fstream>
#include <iterator>
#include <thread>

namespace sunbudget::test {

namespace fs = std::filesystem;

std::string program_path() {
    return SUNBUDGET_PROGRAM;
}
fs::path build_folder() {
    return SUNBUDGET_BUILD_DIR;
}

namespace {

std::vector<std::string> program_and(const std::vector<std::string>& arguments) {
    std::vector<std::string> words{program_path()};
    words.insert(words.end(), arguments.begin(), arguments.end());
    return words;
}

/// In the child: becomes the program, with its output in the two open files.
[[noreturn]] void become(const std::vector<std::string>& words, const Start& start, int out,
                         int err) {
    if (!start.folder.empty() && chdir(start.folder.c_str()) != 0) _exit(127);
    for (const auto& entry : start.environment) {
        const auto equals = entry.find('=');
        if (equals == std::string::npos)
            unsetenv(entry.c_str());
        else
            setenv(entry.substr(0, equals).c_str(), entry.c_str() + equals + 1, 1);
    }
    dup2(out, STDOUT_FILENO);
    dup2(err, STDERR_FILENO);
    std::vector<char*> argv;
    for (const auto& text : words) argv.push_back(const_cast<char*>(text.c_str()));
    argv.push_back(nullptr);
    execvp(argv[0], argv.data());
    _exit(127);
}

pid_t launched(const std::vector<std::string>& words, const Start& start, const fs::path& scratch) {
    const auto out = scratch / "out", err = scratch / "err";
    const pid_t child = fork();
    if (child == 0)
        become(words, start, open(out.c_str(), O_WRONLY | O_CREAT, 0600),
               open(err.c_str(), O_WRONLY | O_CREAT, 0600));
    return child;
}

int code_of(int status) {
    return WIFEXITED(status) ? WEXITSTATUS(status) : 128 + WTERMSIG(status);
}

Outcome waited(pid_t child, const fs::path& scratch) {
    int status = 0;
    waitpid(child, &status, 0);
    return {code_of(status), content(scratch / "out"), content(scratch / "err")};
}

/// All that comes out of a terminal until its last user has gone.
std::string read_to_end(int terminal) {
    std::string text;
    char part[4096];
    for (ssize_t got = 0; (got = read(terminal, part, sizeof part)) > 0;)
        text.append(part, static_cast<std::size_t>(got));
    return text;
}

}  // namespace

Outcome sunbudget(const std::vector<std::string>& arguments, const Start& start) {
    const TemporaryFolder scratch;
    return waited(launched(program_and(arguments), start, scratch.path()), scratch.path());
}

Outcome shell(const std::string& line) {
    const TemporaryFolder scratch;
    return waited(launched({"/bin/sh", "-c", line}, {}, scratch.path()), scratch.path());
}

std::string word(const std::string& text) {
    std::string quoted = "'";
    for (const char c : text) quoted += c == '\'' ? std::string("'\\''") : std::string(1, c);
    return quoted + "'";
}

Running::Running(const std::vector<std::string>& arguments, const Start& start)
    : process_(launched(program_and(arguments), start, scratch_.path())) {}

Running::~Running() {
    if (process_ <= 0) return;
    kill(process_, SIGKILL);
    waitpid(process_, nullptr, 0);
}

void Running::send(int signal) const {
    kill(process_, signal);
}

Outcome Running::end(double limit_s) {
    const auto start = std::chrono::steady_clock::now();
    int status = 0;
    while (waitpid(process_, &status, WNOHANG) == 0) {
        if (std::chrono::duration<double>(std::chrono::steady_clock::now() - start).count() >
            limit_s)
            return {};
        std::this_thread::sleep_for(std::chrono::milliseconds(5));
    }
    process_ = 0;
    return {code_of(status), content(scratch_.path() / "out"), content(scratch_.path() / "err")};
}

Outcome sunbudget_on_terminal(const std::vector<std::string>& arguments, const Start& start) {
    const TemporaryFolder scratch;
    const auto out = scratch.path() / "out";
    winsize size{};
    size.ws_row = 24;
    size.ws_col = 80;
    int ours = -1, theirs = -1;
    if (openpty(&ours, &theirs, nullptr, nullptr, &size) != 0)
        throw std::runtime_error("no terminal to be had");
    const pid_t child = fork();
    if (child == 0)
        become(program_and(arguments), start, open(out.c_str(), O_WRONLY | O_CREAT, 0600), theirs);
    close(theirs);
    const auto shown = read_to_end(ours);
    close(ours);
    int status = 0;
    waitpid(child, &status, 0);
    return {code_of(status), content(out), shown};
}

std::string content(const fs::path& file) {
    std::ifstream stream(file, std::ios::binary);
    return {std::istreambuf_iterator<char>(stream), {}};
}

void write(const fs::path& file, const std::string& text) {
    std::ofstream(file, std::ios::binary) << text;
}

std::vector<std::string> names_in(const fs::path& folder) {
    std::vector<std::string> names;
    if (!fs::exists(folder)) return names;
    for (const auto& entry : fs::directory_iterator(folder))
        names.push_back(entry.path().filename().string());
    std::sort(names.begin(), names.end());
    return names;
}

}  // namespace sunbudget::test
