// SPDX-License-Identifier: MIT
// `carnode play`: a log as if the car were driving it now.
#pragma once

#include <limits>
#include <string>

#include "estimator/link/publisher.hpp"

namespace holdfast::session {
class LogSource;
}

namespace holdfast::node {

class Uplink;

// Where frames go and how fast; common to play and drive.
struct LinkOptions {
    std::string bind;  // endpoint
    link::WhenFull when_full = link::WhenFull::wait;
    std::size_t wait = 1;  // subscribers to begin with
    double pace = 1.0;     // 0: as fast as it goes
    double batch_ms = 2.0;
};

struct PlayOptions {
    std::string log;
    std::string car;                                            // empty: the log is not checked against a car
    std::string channels;                                       // channel map; empty: none
    double start_s = -std::numeric_limits<double>::infinity();  // source time; frames before are passed over
    double end_s = std::numeric_limits<double>::infinity();     // frames from here on are left
    LinkOptions link;
};

// The program's exit status; what went wrong stands on standard error by then.
[[nodiscard]] int play(const PlayOptions& options);

// What play does once everything is open: waits for subscribers, sends, and says that the stream is over.
[[nodiscard]] int stream_log(session::LogSource& log, Uplink& uplink, const PlayOptions& options);

}  // namespace holdfast::node
