#include "sunbudget/base/parallel.hpp"

#include <omp.h>
#include <sched.h>

#include <algorithm>
#include <cmath>
#include <exception>
#include <fstream>
#include <string>

#include "sunbudget/base/error.hpp"

namespace sunbudget {

std::atomic<int> stop_signal{0};

void throw_if_stopped() {
    if (stop_signal.load() != 0)
        throw Error(Cause::temporary, "stopped by a signal", {}, "run again");
}

namespace {
/// CPUs granted by the control group (version 2, then version 1), or 0 where there is no limit.
int group_cpus() {
    double quota = 0, period = 0;
    std::string word;
    if (std::ifstream v2("/sys/fs/cgroup/cpu.max"); v2 >> word >> period) {
        if (word == "max" || period <= 0) return 0;
        quota = std::atof(word.c_str());
    } else {
        std::ifstream v1_quota("/sys/fs/cgroup/cpu/cpu.cfs_quota_us");
        std::ifstream v1_period("/sys/fs/cgroup/cpu/cpu.cfs_period_us");
        if (!(v1_quota >> quota) || !(v1_period >> period)) return 0;
    }
    return quota > 0 && period > 0 ? std::max(1, static_cast<int>(std::lround(quota / period))) : 0;
}
}  // namespace

int available_threads() {
    cpu_set_t set;
    CPU_ZERO(&set);
    int cpus = sched_getaffinity(0, sizeof set, &set) == 0 ? CPU_COUNT(&set) : 1;
    if (const int granted = group_cpus(); granted > 0) cpus = std::min(cpus, granted);
    return std::max(1, cpus);
}

void parallel_for(std::size_t count, int threads,
                  const std::function<void(std::size_t index, int thread)>& work) {
    std::exception_ptr failure;
    std::atomic<bool> stop{false};
    std::atomic<std::size_t> next{0};
#pragma omp parallel num_threads(std::max(1, threads))
    {
        const int thread = omp_get_thread_num();
        while (!stop.load() && stop_signal.load() == 0) {
            const std::size_t index = next.fetch_add(1);
            if (index >= count) break;
            // No exception may leave an OpenMP region: it would end the program.
            try {
                work(index, thread);
            } catch (...) {
#pragma omp critical(sunbudget_parallel_failure)
                if (!failure) failure = std::current_exception();
                stop.store(true);
            }
        }
    }
    if (failure) std::rethrow_exception(failure);
}

}  // namespace sunbudget
