// SPDX-License-Identifier: MIT
// Sets of outings for the accuracy table, run in parallel on all cores.
#pragma once

#include <cstdint>
#include <string>
#include <vector>

#include "tests/bench/accuracy/outing_run.hpp"

namespace holdfast::bench {

// What stands in the long table: cars, roads, winds and sensors; and single sensors that fail on the way.
[[nodiscard]] std::vector<std::string> usual_scenarios();
[[nodiscard]] std::vector<std::string> fault_scenarios();
// A small set that takes some seconds.
[[nodiscard]] std::vector<std::string> short_scenarios();

// All seeds of a scenario next to each other, scenarios in their order. Throws std::runtime_error with every
// outing that could not be run.
[[nodiscard]] std::vector<OutingResult> run_outings(const std::vector<std::string>& scenarios,
                                                    std::uint64_t first_seed, std::size_t seeds);

}  // namespace holdfast::bench
