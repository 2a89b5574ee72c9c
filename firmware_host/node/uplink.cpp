// SPDX-License-Identifier: MIT
#include "firmware_host/node/uplink.hpp"

#include <chrono>
#include <thread>
#include <utility>

#include "estimator/session/interrupt.hpp"

namespace holdfast::node {
namespace {

using std::chrono::milliseconds;

constexpr milliseconds kLook{100};  // how often a signal is looked for that came between two waits

// A subscriber whose queue is full at one time has had this long to make room at the next.
constexpr int kEndMarkers = 3;
constexpr milliseconds kEndPause{50};

}  // namespace

Uplink::Uplink(link::Publisher publisher, StreamInfo info)
    : publisher_(std::move(publisher)), info_(std::move(info)), stream_id_(proto::draw_stream_id()) {}

bool Uplink::wait_for_subscribers(std::size_t count) {
    while (!session::interrupted())
        if (publisher_.wait_for_subscribers(link::Topic::frames, count, kLook)) return true;
    return false;
}

link::SendResult Uplink::send(std::span<const Frame> frames) {
    const auto result = publisher_.send(link::Topic::frames,
                                        encoder_.encode({stream_id_, next_sequence_}, rows_, info_, frames));
    if (result == link::SendResult::sent || result == link::SendResult::overflowed) {
        ++next_sequence_;
        rows_ += frames.size();
    }
    return result;
}

void Uplink::end(bool complete, const std::string& reason) {
    const std::string message = proto::encode_end(
        {.id = {stream_id_, next_sequence_}, .rows = rows_, .complete = complete, .reason = reason});
    for (int i = 0; i < kEndMarkers; ++i) {
        if (i > 0) std::this_thread::sleep_for(kEndPause);
        if (publisher_.send(link::Topic::end, message) == link::SendResult::stalled) return;
    }
}

}  // namespace holdfast::node
