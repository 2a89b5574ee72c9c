// SPDX-License-Identifier: MIT
// Frames off the link, in order: what came damaged, twice, late or not at all is counted and left out.
//
//     switch (receiver.receive(timeout).kind) {
//         nothing   the time is over, or a signal came
//         stream    a node's stream begins (info()): the first, or, after a restart, one whose time begins
//         anew frames    the next frames of that stream end       the node has said that its stream is over
//         (end())
//     }
#pragma once

#include <chrono>
#include <cstdint>
#include <optional>
#include <span>
#include <string>
#include <utility>
#include <vector>

#include "estimator/link/sequence_watch.hpp"
#include "estimator/link/subscriber.hpp"
#include "proto/codec.hpp"
#include "proto/result.hpp"
#include "proto/vocabulary/frame.hpp"

namespace holdfast::link {

struct LinkCounters {
    std::uint64_t messages = 0;  // blocks of frames that were delivered
    std::uint64_t frames = 0;
    std::uint64_t lost_messages = 0;
    std::uint64_t lost_frames = 0;
    std::uint64_t missed_before_joining = 0;  // frames that the stream had sent before we came
    std::uint64_t repeated = 0;               // messages
    std::uint64_t out_of_order = 0;           // messages; of a stream that is over, too
    std::uint64_t damaged = 0;                // messages that do not decode or contradict their stream
    std::uint64_t streams = 0;                // more than one: the node started anew
    std::uint64_t connects = 0;
    std::uint64_t disconnects = 0;
};

// Names and numbers, for a summary.
[[nodiscard]] std::vector<std::pair<std::string, std::uint64_t>> by_name(const LinkCounters& counters);

struct Arrival {
    enum class Kind : std::uint8_t { nothing, stream, frames, end };
    Kind kind = Kind::nothing;
    std::span<const Frame> frames = {};  // good until the next call
};

class FrameReceiver {
  public:
    [[nodiscard]] static proto::Result<FrameReceiver> connect(const std::string& endpoint);

    [[nodiscard]] Arrival receive(std::chrono::milliseconds timeout);

    [[nodiscard]] const StreamInfo& info() const { return info_; }  // of the stream that began last
    [[nodiscard]] const proto::End& end() const { return end_; }    // after Kind::end
    [[nodiscard]] bool connected() const { return subscriber_.connected(); }
    [[nodiscard]] LinkCounters counters() const;
    // What was wrong with the newest damaged message.
    [[nodiscard]] const std::optional<proto::Error>& last_damage() const { return last_damage_; }

  private:
    explicit FrameReceiver(Subscriber subscriber) : subscriber_(std::move(subscriber)) {}
    [[nodiscard]] Arrival take_block(std::string_view bytes);
    [[nodiscard]] Arrival take_end(std::string_view bytes);
    [[nodiscard]] Arrival begin_stream();
    [[nodiscard]] Arrival deliver();
    void refuse(proto::Error why);
    [[nodiscard]] bool is_over(std::uint64_t stream_id) const;

    Subscriber subscriber_;
    proto::BlockDecoder decoder_;
    proto::Block block_;
    bool block_waits_ = false;  // behind the arrival of its stream
    StreamInfo info_;
    std::optional<std::uint64_t> stream_id_;
    std::vector<std::uint64_t> over_;  // streams that are over, newest last
    SequenceWatch sequence_;
    std::uint64_t rows_ = 0;  // of the stream, up to the newest block
    proto::End end_;
    LinkCounters counters_;
    std::optional<proto::Error> last_damage_;
};

}  // namespace holdfast::link
