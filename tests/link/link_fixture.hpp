// SPDX-License-Identifier: MIT
// Both ends of a link over real loopback sockets, on a port of the system's choice.
#pragma once

#include <chrono>
#include <optional>
#include <stdexcept>
#include <string>
#include <vector>

#include "estimator/link/frame_receiver.hpp"
#include "estimator/link/publisher.hpp"
#include "proto/codec.hpp"

namespace holdfast::testing {

// Nothing here takes this long; only a test that fails waits for it.
inline constexpr std::chrono::milliseconds kLongEnough{20'000};

inline link::Publisher publisher(link::WhenFull when_full = link::WhenFull::wait,
                                 const std::string& endpoint = "tcp://127.0.0.1:*",
                                 std::chrono::milliseconds patience = kLongEnough) {
    auto bound = link::Publisher::bind({.endpoint = endpoint, .when_full = when_full, .patience = patience});
    if (!bound) throw std::runtime_error(bound.error().message);
    return std::move(*bound);
}

inline link::FrameReceiver receiver(const std::string& endpoint) {
    auto connected = link::FrameReceiver::connect(endpoint);
    if (!connected) throw std::runtime_error(connected.error().message);
    return std::move(*connected);
}

// One frame whose speed is its own time in s.
inline Frame frame_at(std::int64_t time_ns) {
    Frame frame;
    frame.time_ns = time_ns;
    frame.set(Channel::speed, frame.time_s());
    return frame;
}

// Block number `sequence` of a stream whose blocks hold two frames each, 1 ns apart: its times are twice the
// number, and one more.
inline std::string block_of_two(std::uint64_t stream_id, std::uint64_t sequence,
                                const StreamInfo& info = {}) {
    const std::vector<Frame> frames{frame_at(static_cast<std::int64_t>(2 * sequence)),
                                    frame_at(static_cast<std::int64_t>(2 * sequence + 1))};
    return std::string(proto::BlockEncoder().encode({stream_id, sequence}, 2 * sequence, info, frames));
}

// A publisher with one receiver connected to it.
struct Link {
    link::Publisher out = publisher();
    link::FrameReceiver in = receiver(out.endpoint());

    Link() {
        if (!out.wait_for_subscribers(link::Topic::frames, 1, kLongEnough) ||
            !out.wait_for_subscribers(link::Topic::end, 1, kLongEnough))
            throw std::runtime_error("the receiver did not subscribe");
    }
    void send(std::uint64_t stream_id, std::uint64_t sequence, const StreamInfo& info = {}) {
        out.send(link::Topic::frames, block_of_two(stream_id, sequence, info));
    }
    void send_end(const proto::End& end) { out.send(link::Topic::end, proto::encode_end(end)); }
};

// What has arrived up to and with the next end, in short: "S" a stream, "E" the end, a number a block of two
// frames.
inline std::string arrivals_until_end(link::FrameReceiver& in) {
    std::string told;
    while (true) {
        const link::Arrival arrival = in.receive(kLongEnough);
        switch (arrival.kind) {
            case link::Arrival::Kind::nothing:
                return told + "nothing";
            case link::Arrival::Kind::stream:
                told += "S ";
                break;
            case link::Arrival::Kind::end:
                return told + "E";
            case link::Arrival::Kind::frames:
                if (arrival.frames.size() != 2) throw std::logic_error("a block of another size");
                told += std::to_string(arrival.frames[0].time_ns / 2) + " ";
        }
    }
}

}  // namespace holdfast::testing
