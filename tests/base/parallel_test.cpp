#include "sunbudget/base/parallel.hpp"

#include <catch2/catch.hpp>
#include <chrono>
#include <stdexcept>
#include <thread>
#include <vector>

using namespace sunbudget;

TEST_CASE("parallel_for: every index once, whatever the threads", "[base][differential]") {
    for (const int threads : {1, 2, 7}) {
        std::vector<std::atomic<int>> seen(1000);
        parallel_for(seen.size(), threads, [&](std::size_t i, int thread) {
            if (thread >= 0 && thread < threads) ++seen[i];
        });
        int wrong = 0;
        for (const auto& count : seen) wrong += count != 1;
        CHECK(wrong == 0);
    }
}

TEST_CASE("parallel_for: an exception reaches the caller and stops the loop", "[base][edge]") {
    std::atomic<int> calls{0};
    CHECK_THROWS_AS(parallel_for(100000, 2,
                                 [&](std::size_t i, int) {
                                     ++calls;
                                     if (i == 3) throw std::runtime_error("three");
                                     // All of them would take 50 s: the other thread cannot run through
                                     // before the exception is seen.
                                     std::this_thread::sleep_for(std::chrono::milliseconds(1));
                                 }),
                    std::runtime_error);
    CHECK(calls < 100000);
}

TEST_CASE("parallel_for: takes no new work after a stop signal", "[base][edge]") {
    stop_signal = 15;
    int calls = 0;
    parallel_for(10, 1, [&](std::size_t, int) { ++calls; });
    stop_signal = 0;
    CHECK(calls == 0);
}
