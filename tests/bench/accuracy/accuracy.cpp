// SPDX-License-Identifier: MIT
// How right the estimates are, and how well they know it: many seeded outings of the simulated car, in
// parallel, as a table with a row for each scenario; errors of the time constant beside their Cramer-Rao
// bound.
//   bench_accuracy [--seeds N] [--first SEED] [--each] [--closings] [SCENARIO...]
//   bench_accuracy --short   a small set, some seconds
//   bench_accuracy --long    all scenarios and faults, 5 seeds or more; also writes
//   tests/bench/accuracy/RESULTS.md
#include <stdio.h>

#include <algorithm>
#include <cstdio>
#include <cstdlib>
#include <cstring>
#include <ctime>
#include <exception>
#include <fstream>
#include <stdexcept>
#include <string>
#include <vector>

#include "tests/bench/accuracy/figures.hpp"
#include "tests/bench/accuracy/outing_set.hpp"

namespace {

using namespace holdfast::bench;

struct Wish {
    std::size_t seeds = 3;
    std::uint64_t first = 1;
    bool each = false, closings = false, brief = false, full = false;
    std::vector<std::string> scenarios;
};

std::uint64_t number(const char* text, const char* option) {
    char* end = nullptr;
    const std::uint64_t value = std::strtoull(text, &end, 10);
    if (*end != '\0' || value == 0)
        throw std::invalid_argument(std::string(option) + " \"" + text +
                                    "\": expected a whole number from 1");
    return value;
}

Wish parse(int argc, char** argv) {
    Wish wish;
    for (int i = 1; i < argc; ++i) {
        const std::string word = argv[i];
        if ((word == "--seeds" || word == "--first") && i + 1 < argc) {
            const std::uint64_t value = number(argv[++i], word.c_str());
            (word == "--seeds" ? wish.seeds : wish.first) = value;
        } else if (word == "--each") {
            wish.each = true;
        } else if (word == "--closings") {
            wish.each = wish.closings = true;
        } else if (word == "--short") {
            wish.brief = true;
        } else if (word == "--long") {
            wish.full = true;
        } else if (word.starts_with("--")) {
            throw std::invalid_argument("option \"" + word + "\" is not known, or its value is missing");
        } else {
            wish.scenarios.push_back(word);
        }
    }
    return wish;
}

std::string table(const std::vector<std::string>& scenarios, const Wish& wish, std::size_t seeds) {
    const std::vector<OutingResult> results = run_outings(scenarios, wish.first, seeds);
    std::string text = table_head() + "\n";
    for (std::size_t s = 0; s < scenarios.size(); ++s) {
        const std::span<const OutingResult> group(&results[s * seeds], seeds);
        if (wish.each) {
            for (const OutingResult& r : group) {
                if (wish.closings) text += closing_rows(r);
                text += table_row(r.scenario + " #" + std::to_string(r.seed), figures_of({&r, 1})) + "\n";
            }
        }
        text += table_row(scenarios[s], figures_of(group)) + "\n";
    }
    return text + table_row("all", figures_of(results)) + "\n";
}

// What the source tree's history calls its state; "-dirty" where files differ from it.
std::string source_state() {
    std::FILE* git = ::popen("git -C \"" HOLDFAST_SOURCE_DIR "\" describe --always --dirty 2>/dev/null", "r");
    char text[80] = "";
    if (git != nullptr) {
        if (std::fgets(text, sizeof text, git) == nullptr) text[0] = '\0';
        ::pclose(git);
    }
    const std::string state(text, std::strcspn(text, "\n"));
    return state.empty() ? "unknown" : state;
}

std::string today() {
    const std::time_t now = std::time(nullptr);
    char text[16];
    std::strftime(text, sizeof text, "%Y-%m-%d", std::gmtime(&now));
    return text;
}

void write_results(const std::string& usual, const std::string& faults, const Wish& wish, std::size_t seeds) {
    const std::string path = HOLDFAST_SOURCE_DIR "/tests/bench/accuracy/RESULTS.md";
    std::ofstream file(path);
    file << "# Accuracy on simulated outings\n"
         << "Written by `bench_accuracy --long` on " << today() << ", source " << source_state() << ", seeds "
         << wish.first << " to " << wish.first + seeds - 1 << " of each scenario.\n\n"
         << "`tau`: ms, first-order closings; its error over the Cramer-Rao bound of an exactly known car "
            "(bound.hpp), rms: `/brk` from the data until the brakes, `/1s` until one second after the flap "
            "is shut; `z`: error over stated sd, rms. `t95`: ms; `in%`: interval holds the truth. "
            "`slow%`, `oth%`, `part%`: flagged of slow, of other and of partly detached closings. Shortfall "
            "in "
            "N. Areas: rms of the outings' mean error, and share of samples whose 95 % band holds the truth. "
            "`distr`: sound sensors distrusted; `named`: faults named, and after how many seconds.\n\n"
         << "## Scenarios\n```\n"
         << usual << "```\n\n## One sensor fails\n```\n"
         << faults << "```\n";
    if (!file.flush()) throw std::runtime_error(path + ": cannot be written");
}

void run(const Wish& wish) {
    if (wish.full) {
        const std::size_t seeds = std::max<std::size_t>(wish.seeds, 5);
        const std::string usual = table(usual_scenarios(), wish, seeds);
        std::printf("%s\n", usual.c_str());
        const std::string faults = table(fault_scenarios(), wish, seeds);
        std::printf("%s", faults.c_str());
        write_results(usual, faults, wish, seeds);
        return;
    }
    std::vector<std::string> scenarios = wish.scenarios;
    if (wish.brief) scenarios = short_scenarios();
    if (scenarios.empty()) scenarios = usual_scenarios();
    std::printf("%s", table(scenarios, wish, wish.seeds).c_str());
}

}  // namespace

int main(int argc, char** argv) {
    try {
        run(parse(argc, argv));
    } catch (const std::exception& e) {
        std::fprintf(stderr, "bench_accuracy: %s\n", e.what());
        return 1;
    }
    return 0;
}
