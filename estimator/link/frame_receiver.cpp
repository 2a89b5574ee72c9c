// SPDX-License-Identifier: MIT
#include "estimator/link/frame_receiver.hpp"

#include <algorithm>

namespace holdfast::link {
namespace {

using Clock = std::chrono::steady_clock;
using std::chrono::milliseconds;
using Kind = Arrival::Kind;

constexpr std::size_t kStreamsRemembered = 16;

}  // namespace

std::vector<std::pair<std::string, std::uint64_t>> by_name(const LinkCounters& counters) {
    return {{"messages", counters.messages},
            {"frames", counters.frames},
            {"lost_messages", counters.lost_messages},
            {"lost_frames", counters.lost_frames},
            {"missed_before_joining", counters.missed_before_joining},
            {"repeated", counters.repeated},
            {"out_of_order", counters.out_of_order},
            {"damaged", counters.damaged},
            {"streams", counters.streams},
            {"connects", counters.connects},
            {"disconnects", counters.disconnects}};
}

proto::Result<FrameReceiver> FrameReceiver::connect(const std::string& endpoint) {
    auto subscriber = Subscriber::connect(endpoint, {Topic::frames, Topic::end});
    if (!subscriber) return subscriber.error();
    return FrameReceiver(std::move(*subscriber));
}

LinkCounters FrameReceiver::counters() const {
    LinkCounters all = counters_;
    all.damaged += subscriber_.counters().malformed;
    all.connects = subscriber_.counters().connects;
    all.disconnects = subscriber_.counters().disconnects;
    return all;
}

Arrival FrameReceiver::receive(milliseconds timeout) {
    if (std::exchange(block_waits_, false) && !block_.frames.empty()) return deliver();
    const auto until = Clock::now() + timeout;
    auto left = timeout;
    do {
        const std::optional<Message> message = subscriber_.receive(left);
        if (!message) return {};
        const Arrival arrival =
            message->topic == Topic::end ? take_end(message->bytes) : take_block(message->bytes);
        if (arrival.kind != Kind::nothing) return arrival;
        left = std::chrono::ceil<milliseconds>(until - Clock::now());
    } while (left.count() > 0);  // also under a flood of messages that are no use
    return {};
}

Arrival FrameReceiver::take_block(std::string_view bytes) {
    if (auto error = decoder_.decode(bytes, block_)) {
        refuse(std::move(*error));
        return {};
    }
    if (is_over(block_.id.stream_id)) {
        ++counters_.out_of_order;
        return {};
    }
    if (stream_id_ != block_.id.stream_id) return begin_stream();
    if (block_.info.ride_height_names != info_.ride_height_names) {
        refuse({.message = "the names of the ride heights changed within a stream"});
        return {};
    }
    switch (sequence_.take(block_.id.sequence)) {
        case SequenceVerdict::repeated:
            ++counters_.repeated;
            return {};
        case SequenceVerdict::out_of_order:
            ++counters_.out_of_order;
            return {};
        case SequenceVerdict::next:
            break;
    }
    counters_.lost_messages += sequence_.lost();
    if (block_.rows_before > rows_) counters_.lost_frames += block_.rows_before - rows_;
    return block_.frames.empty() ? Arrival{} : deliver();
}

Arrival FrameReceiver::begin_stream() {
    if (stream_id_) over_.push_back(*stream_id_);
    if (over_.size() > kStreamsRemembered) over_.erase(over_.begin());
    stream_id_ = block_.id.stream_id;
    info_ = block_.info;
    sequence_ = {};
    (void)sequence_.take(block_.id.sequence);
    rows_ = block_.rows_before;
    counters_.missed_before_joining += rows_;
    ++counters_.streams;
    block_waits_ = true;
    return {.kind = Kind::stream};
}

Arrival FrameReceiver::deliver() {
    ++counters_.messages;
    counters_.frames += block_.frames.size();
    rows_ = block_.rows_before + block_.frames.size();
    return {.kind = Kind::frames, .frames = block_.frames};
}

// Told once; a stream of which we have seen nothing may be over too.
Arrival FrameReceiver::take_end(std::string_view bytes) {
    auto end = proto::decode_end(bytes);
    if (!end) {
        refuse(end.error());
        return {};
    }
    if (is_over(end->id.stream_id)) return {};
    if (stream_id_ == end->id.stream_id && end->id.sequence > sequence_.expected()) {
        counters_.lost_messages += end->id.sequence - sequence_.expected();
        counters_.lost_frames += end->rows > rows_ ? end->rows - rows_ : 0;
    }
    if (stream_id_ == end->id.stream_id) stream_id_.reset();
    over_.push_back(end->id.stream_id);
    if (over_.size() > kStreamsRemembered) over_.erase(over_.begin());
    end_ = std::move(*end);
    return {.kind = Kind::end};
}

void FrameReceiver::refuse(proto::Error why) {
    ++counters_.damaged;
    last_damage_ = std::move(why);
}

bool FrameReceiver::is_over(std::uint64_t stream_id) const {
    return std::find(over_.begin(), over_.end(), stream_id) != over_.end();
}

}  // namespace holdfast::link
