#pragma once

#include <atomic>
#include <cstddef>
#include <functional>

namespace sunbudget {

/// Set by the signal handler (SIGINT, SIGTERM, SIGHUP): the signal's number, or 0. Loops stop taking
/// new work when it is not 0.
extern std::atomic<int> stop_signal;

/// Throws Error(temporary) after a stop signal: for long work between two looks of parallel_for.
void throw_if_stopped();

/// Threads this process may use: the affinity mask and the control group's CPU quota, at least 1.
[[nodiscard]] int available_threads();

/// Calls work(index, thread) for every index in [0, count), each index once, in increasing order of
/// start, on `threads` threads; thread in [0, threads). The only threads of the program start here.
///
/// errors  the first exception that a call throws is thrown again here once the running calls have
///         ended; no further index is started. After a stop signal no further index is started and
///         the call returns: ask stop_signal.
void parallel_for(std::size_t count, int threads,
                  const std::function<void(std::size_t index, int thread)>& work);

}  // namespace sunbudget
