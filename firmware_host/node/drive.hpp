// SPDX-License-Identifier: MIT
// `carnode drive`: the simulated car, onto the link, into a recording, or both.
#pragma once

#include <cstdint>
#include <string>
#include <vector>

#include "firmware_host/node/play.hpp"

namespace holdfast::node {

struct DriveOptions {
    std::string scenario = "open_wheel";
    std::uint64_t seed = 1;
    int laps = 0;                     // 0: as many as the scenario says
    std::vector<std::string> faults;  // CHANNEL:KIND:FROM_S[:MAGNITUDE[:UNTIL_S]]
    std::string record;               // .hfr file; empty: none
    std::string truth;                // folder for truth.csv and truth_closures.csv; empty: none
    std::string car;                  // car file to write, as the workshop would have; empty: none
    LinkOptions link;                 // bind empty: no link
};

// Families, variants and faults, for --help.
[[nodiscard]] std::string drive_help();

// The program's exit status; what went wrong stands on standard error by then.
[[nodiscard]] int drive(const DriveOptions& options);

}  // namespace holdfast::node
