// SPDX-License-Identifier: MIT
// How right the estimates are, and how well they know it: many seeded outings of the simulated car, in
// parallel, as a table with a row for each scenario.
//   bench_accuracy [--seeds N] [--first SEED] [--each] [--closings] [SCENARIO...]
#include <atomic>
#include <cstdio>
#include <cstdlib>
#include <cstring>
#include <exception>
#include <string>
#include <thread>
#include <vector>

#include "tests/bench/accuracy/figures.hpp"

int main(int argc, char** argv) {
    using namespace holdfast::bench;
    std::uint64_t seeds = 3;
    std::uint64_t first = 1;
    bool each = false;
    bool closings = false;
    std::vector<std::string> scenarios;
    for (int i = 1; i < argc; ++i) {
        if (std::strcmp(argv[i], "--seeds") == 0 && i + 1 < argc) {
            seeds = std::strtoull(argv[++i], nullptr, 10);
        } else if (std::strcmp(argv[i], "--first") == 0 && i + 1 < argc) {
            first = std::strtoull(argv[++i], nullptr, 10);
        } else if (std::strcmp(argv[i], "--each") == 0) {
            each = true;
        } else if (std::strcmp(argv[i], "--closings") == 0) {
            closings = true;
        } else {
            scenarios.emplace_back(argv[i]);
        }
    }
    if (scenarios.empty()) {
        scenarios = {"open_wheel",
                     "prototype",
                     "heavy_closed",
                     "open_wheel-windy",
                     "open_wheel-rough",
                     "open_wheel-noisy",
                     "prototype-windy",
                     "open_wheel-full",
                     "prototype-full",
                     "heavy_closed-full",
                     "open_wheel-tight",
                     "open_wheel-smooth",
                     "prototype-noisy-rough",
                     "open_wheel-peaked",
                     "open_wheel-sick"};
    }
    std::vector<OutingResult> results(scenarios.size() * seeds);
    std::atomic<std::size_t> next{0};
    std::atomic<bool> failed{false};
    const auto work = [&] {
        for (std::size_t i = next++; i < results.size(); i = next++) {
            try {
                results[i] = run_outing(scenarios[i / seeds], first + i % seeds);
            } catch (const std::exception& e) {
                std::fprintf(stderr, "%s\n", e.what());
                failed = true;
            }
        }
    };
    std::vector<std::thread> workers;
    for (unsigned w = 0; w < std::max(1U, std::thread::hardware_concurrency()); ++w)
        workers.emplace_back(work);
    for (std::thread& w : workers) w.join();

    std::printf("%s\n", table_head().c_str());
    for (std::size_t s = 0; s < scenarios.size(); ++s) {
        const std::span<const OutingResult> group(&results[s * seeds], seeds);
        if (each) {
            for (const OutingResult& r : group) {
                if (closings) std::printf("%s", closing_rows(r).c_str());
                std::printf(
                    "%s\n",
                    table_row(r.scenario + " #" + std::to_string(r.seed), figures_of({&r, 1})).c_str());
            }
        }
        std::printf("%s\n", table_row(scenarios[s], figures_of(group)).c_str());
    }
    std::printf("%s\n", table_row("all", figures_of(results)).c_str());
    return failed ? 1 : 0;
}
