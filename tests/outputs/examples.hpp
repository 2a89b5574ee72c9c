// SPDX-License-Identifier: MIT
// Hand-made results and small helpers for the tests of the outputs.
#pragma once

#include <filesystem>
#include <fstream>
#include <sstream>
#include <string>
#include <vector>

#include "estimator/core/results.hpp"
#include "tests/temp_folder.hpp"

namespace holdfast::examples {

// A closing about which everything is known: flow back in time for the brakes.
inline core::Closure known_closure() {
    core::Closure c;
    c.number = 5;
    c.lap = 2;
    c.zone = 3;
    c.time_command_s = 117.633;
    c.time_closed_s = 117.6955;
    c.speed_mps = 90.0;
    c.closing_time_s = 0.0625;
    c.lap_distance_brake_m = 3120.0;
    c.reattachment_known = true;
    c.tau_s = {0.04, 0.004};
    c.t95_s = 0.12;
    c.t95_low_s = 0.1;
    c.t95_high_s = 0.15;
    c.plateau = 1.0;
    c.whole = true;
    c.braked = true;
    c.time_brake_s = 117.8835;
    c.margin_s = {0.068, 0.013};
    c.shortfall_n = {110.0, 40.0};
    c.shortfall_share = 0.009;
    c.probability_short = 0.02;
    c.probability_slow = 0.05;
    c.usual_known = true;
    c.slow = false;
    c.verdict = core::Verdict::full;
    return c;
}

inline core::Alarm alarm(core::AlarmKind kind, std::uint32_t closure = 0) {
    core::Alarm a;
    a.kind = kind;
    a.closure = closure;
    return a;
}

inline std::string read(const std::filesystem::path& path) {
    std::ifstream in(path, std::ios::binary);
    std::ostringstream text;
    text << in.rdbuf();
    return text.str();
}

// Cells of one line of CSV without quotes.
inline std::vector<std::string> cells(std::string line) {
    if (!line.empty() && line.back() == '\n') line.pop_back();
    std::vector<std::string> out(1);
    for (char c : line) {
        if (c == ',') {
            out.emplace_back();
        } else {
            out.back() += c;
        }
    }
    return out;
}

}  // namespace holdfast::examples
