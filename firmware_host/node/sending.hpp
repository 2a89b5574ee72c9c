// SPDX-License-Identifier: MIT
// Frames from wherever they come, in batches, each when its last frame is due.
#pragma once

#include <cstdint>
#include <functional>
#include <span>

#include "firmware_host/node/pacer.hpp"
#include "proto/vocabulary/frame.hpp"

namespace holdfast::node {

// Which frames travel together: those within a span of source time, up to a number.
struct BatchRule {
    std::int64_t span_ns = 0;
    std::size_t most_rows = 1;
};

// At a pace, frames of batch_ms on the clock; as fast as it goes (pace 0), as many as make a good message.
[[nodiscard]] BatchRule batch_rule(double pace, double batch_ms);

using FrameSource = std::function<bool(Frame&)>;                // false: no more
using BatchSink = std::function<bool(std::span<const Frame>)>;  // false: stop

// Until the source has no more, the sink says stop, or a signal comes.
void send_all(const FrameSource& next, const BatchRule& rule, Pacer& pacer, const BatchSink& send);

}  // namespace holdfast::node
