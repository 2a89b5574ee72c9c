// SPDX-License-Identifier: MIT
// Where the time of a replay goes. Nothing in the engine is instrumented: its parts run by themselves over
// the same frames, and whole runs are timed in stretches.
#pragma once

#include <cstddef>
#include <string>
#include <vector>

#include "tests/bench/step/outing_log.hpp"

namespace holdfast::bench {

struct Part {
    std::string name;
    double us_per_frame = 0.0;  // over all frames of the outing
};

struct EngineTime {
    std::vector<Part> parts;        // together: replay
    double engine_us = 0.0;         // a frame, Engine::step alone
    double replay_us = 0.0;         // a frame: read, step, estimate, write, in one thread
    std::size_t window_frames = 0;  // with the reattachment bank running
    double window_us = 0.0;         // Engine::step on such a frame
    double outside_us = 0.0;        // on any other
    std::size_t closures = 0;
};

// Processor time, medians of `runs` runs. chassis_us: cost of a step of the chassis filter by itself. The
// results of the replay go into `folder`.
[[nodiscard]] EngineTime time_engine(const OutingLog& log, const std::string& folder, double chassis_us,
                                     int runs);

}  // namespace holdfast::bench
