// SPDX-License-Identifier: MIT
// Several filters on one model: do they agree, and what does a step cost with each? They take turns in short
// rounds, and costs are compared within a round, so that what else the machine does falls on all alike.
#pragma once

#include <memory>
#include <string>
#include <vector>

#include "tests/bench/step/filters.hpp"

namespace holdfast::bench {

struct Contender {
    std::string name;
    std::unique_ptr<ComparedFilter> filter;  // nullptr: not installed
};

// The largest difference to the reference after any step of the model: of the estimate, in the reference's
// standard deviations; of the standard deviation, relative.
struct Disagreement {
    double estimate_sd = 0.0;
    double sd_relative = 0.0;
};
[[nodiscard]] Disagreement compare(const LinearModel& model, ComparedFilter& reference,
                                   ComparedFilter& other);

struct Cost {
    double step_us = 0.0;  // processor time, median of the rounds
    double ratio = 0.0;    // cost over that of the first contender in the same round, median
    double ratio_low = 0.0, ratio_high = 0.0;  // quartiles
};
// One for each contender; of those not installed, zeros.
[[nodiscard]] std::vector<Cost> race(const LinearModel& model, const std::vector<Contender>& contenders,
                                     std::size_t rounds);

}  // namespace holdfast::bench
