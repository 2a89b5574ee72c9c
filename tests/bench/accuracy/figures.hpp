// SPDX-License-Identifier: MIT
// The table of accuracy: figures over a group of outings.
#pragma once

#include <span>
#include <string>
#include <vector>

#include "tests/bench/accuracy/outing_run.hpp"

namespace holdfast::bench {

struct Figures {
    std::size_t outings = 0, closings = 0, found = 0, invented = 0, judged = 0;
    double tau_z_rms = 0.0;  // first-order cases: error over stated sd
    double tau_rms_ms = 0.0;
    // Error over the bound from the data until the brakes, and until a second after the flap is shut. The
    // second takes the car through its braking as exactly known too: it says more than any car file can.
    double tau_over_brakes_bound_rms = 0.0;
    double tau_over_second_bound_rms = 0.0;
    double t95_bias_ms = 0.0, t95_rms_ms = 0.0, t95_inside = 0.0;
    double slow_flagged = 0.0, others_flagged = 0.0;  // shares
    double part_flagged = 0.0;
    double verdict_wrong = 0.0, verdict_unclear = 0.0;
    double shortfall_rms_n = 0.0, shortfall_z_rms = 0.0;
    double front_rms = 0.0, rear_rms = 0.0, drag_rms = 0.0;  // of the outing's mean, relative
    double front_inside = 0.0, rear_inside = 0.0, drag_inside = 0.0;
    std::size_t distrusted = 0;  // alarms that a sensor is distrusted though it has no fault
    std::size_t faults = 0, named = 0;
    double named_after_s = 0.0;  // mean
    double times_real = 0.0;     // outing's length over time spent in the engine
};

[[nodiscard]] Figures figures_of(std::span<const OutingResult> results);
// One line for each closing of an outing: estimate beside truth.
[[nodiscard]] std::string closing_rows(const OutingResult& result);
[[nodiscard]] std::string table_head();
[[nodiscard]] std::string table_row(const std::string& name, const Figures& f);

}  // namespace holdfast::bench
