#include "program.hpp"

#include <fcntl.h>
#include <sys/wait.h>
#include <unistd.h>

#include <fstream>
#include <iterator>

#include "support/vectors.hpp"

namespace sunbudget::test {

namespace {

std::string content(const std::filesystem::path& file) {
    std::ifstream stream(file);
    return {std::istreambuf_iterator<char>(stream), {}};
}

Outcome started(const std::vector<std::string>& words, const std::string& folder) {
    const TemporaryFolder scratch;
    const auto out = scratch.path() / "out", err = scratch.path() / "err";
    const pid_t child = fork();
    if (child == 0) {
        if (!folder.empty() && chdir(folder.c_str()) != 0) _exit(127);
        const int o = open(out.c_str(), O_WRONLY | O_CREAT, 0600), e = open(err.c_str(), O_WRONLY | O_CREAT, 0600);
        dup2(o, STDOUT_FILENO);
        dup2(e, STDERR_FILENO);
        std::vector<char*> argv;
        for (const auto& word : words) argv.push_back(const_cast<char*>(word.c_str()));
        argv.push_back(nullptr);
        execvp(argv[0], argv.data());
        _exit(127);
    }
    int status = 0;
    waitpid(child, &status, 0);
    return {WIFEXITED(status) ? WEXITSTATUS(status) : 128 + WTERMSIG(status), content(out), content(err)};
}

}  // namespace

Outcome sunbudget(const std::vector<std::string>& arguments, const std::string& folder) {
    std::vector<std::string> words{SUNBUDGET_PROGRAM};
    words.insert(words.end(), arguments.begin(), arguments.end());
    return started(words, folder);
}

Outcome shell(const std::string& line) { return started({"/bin/sh", "-c", line}, {}); }

}  // namespace sunbudget::test
