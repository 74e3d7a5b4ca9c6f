#include "process.hpp"

#include <fcntl.h>
#include <unistd.h>

#include <csignal>
#include <cstdlib>

#include "sunbudget/base/parallel.hpp"

namespace sunbudget {

namespace {

/// The first signal asks the loops to stop; a second one ends the program at once.
extern "C" void on_signal(int signal) {
    if (sunbudget::stop_signal.exchange(signal) != 0) std::_Exit(128 + signal);
}

void handle_signals() {
    for (const int signal : {SIGINT, SIGTERM, SIGHUP, SIGXCPU})
        // Whoever started us deaf to a signal (nohup) wants it so.
        if (std::signal(signal, on_signal) == SIG_IGN) std::signal(signal, SIG_IGN);
    // A closed pipe and a file size limit become ordinary write errors.
    for (const int signal : {SIGPIPE, SIGXFSZ}) std::signal(signal, SIG_IGN);
}

/// A stream that we were started without must not become the number of a file that we write.
void occupy_closed_streams() {
    for (const int stream : {STDIN_FILENO, STDOUT_FILENO, STDERR_FILENO})
        // Open the wrong way round, so that using it is an error still.
        if (fcntl(stream, F_GETFD) < 0)
            (void)open("/dev/null", stream == STDIN_FILENO ? O_WRONLY : O_RDONLY);
}

}  // namespace

void prepare_process() {
    occupy_closed_streams();
    handle_signals();
}

}  // namespace sunbudget
