// SPDX-License-Identifier: MIT
#include "firmware_host/node/sending.hpp"

#include <limits>
#include <vector>

#include "estimator/session/interrupt.hpp"

namespace holdfast::node {
namespace {

// About a second at 400 Hz, some 50 KiB: large enough that the cost of a message does not count, small enough
// that a replay shows its results steadily.
constexpr std::size_t kRowsOfLargeMessage = 512;

// Time that runs backwards is far away, and so begins a batch of its own.
std::uint64_t since(const Frame& frame, const Frame& earlier) {
    return static_cast<std::uint64_t>(frame.time_ns) - static_cast<std::uint64_t>(earlier.time_ns);
}

}  // namespace

BatchRule batch_rule(double pace, double batch_ms) {
    if (pace == 0)
        return {.span_ns = std::numeric_limits<std::int64_t>::max(), .most_rows = kRowsOfLargeMessage};
    return {.span_ns = static_cast<std::int64_t>(batch_ms * 1e6 * pace), .most_rows = kRowsOfLargeMessage};
}

void send_all(const FrameSource& next, const BatchRule& rule, Pacer& pacer, const BatchSink& send) {
    std::vector<Frame> batch;
    Frame frame;
    bool more = next(frame);
    while (more && !session::interrupted()) {
        batch.assign(1, frame);
        while ((more = next(frame)) && batch.size() < rule.most_rows &&
               since(frame, batch.front()) < static_cast<std::uint64_t>(rule.span_ns))
            batch.push_back(frame);
        while (!pacer.wait_for(batch.back().time_ns))
            if (session::interrupted()) return;
        if (!send(batch)) return;
    }
}

}  // namespace holdfast::node
