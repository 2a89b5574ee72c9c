// SPDX-License-Identifier: MIT
// How the sockets are set, and why. Times in ms.
#pragma once

namespace holdfast::link {

// Queue of a publisher for each subscriber, in messages. Dropping: ten seconds of a car's 400 messages a
// second, about a megabyte, so that a short loss of radio costs nothing. Waiting: few, since a replay's
// messages are large and waiting costs nothing.
inline constexpr int kSendQueueDropping = 4000;
inline constexpr int kSendQueueWaiting = 100;
// Queue of a subscriber, in messages. Short, since beyond it the sender's queue fills, where the choice
// between dropping and waiting is made.
inline constexpr int kReceiveQueue = 64;

// A peer that is switched off or drives out of range is given up after about ten seconds and dialled again,
// not after TCP's quarter of an hour: an idle connection by TCP's own probes, one with data on their way by
// how long these stay unacknowledged, where a sender that waits gives a subscriber that stands still as long
// as its patience for a full queue. (That data have stopped is noticed earlier, by their absence.) ZeroMQ's
// own heartbeats are off: with them libzmq 4.3.4 aborts the program, or loses what has arrived, where a
// subscriber whose queue is full has a peer that goes away (libzmq issues 3937 and 4767).
inline constexpr int kKeepaliveIdle_s = 2;
inline constexpr int kKeepaliveInterval_s = 2;
inline constexpr int kKeepaliveProbes = 4;
inline constexpr int kUnacknowledged_ms = 10'000;

// A node that starts again is found at once, and one that stays away is not hammered: the wait doubles up to
// the most.
inline constexpr int kReconnectLeast_ms = 100;
inline constexpr int kReconnectMost_ms = 2000;
// A dial into nothing (no route, a dropping firewall) is given up after this instead of TCP's two minutes,
// and one that is answered by something else than ZeroMQ after the hand-shake time.
inline constexpr int kConnectTimeout_ms = 3000;
inline constexpr int kHandshakeTimeout_ms = 5000;
// A connection that broke over bad bytes is not dialled again by ZeroMQ; after this time we do it.
inline constexpr int kRedialAfter_ms = 500;

// How long a closing publisher waits for its queue to leave. It ends at once when the queue is empty.
inline constexpr int kLingerDropping_ms = 2000;
inline constexpr int kLingerWaiting_ms = 30'000;

// What subscribers send is a topic's name; a longer message is no business of theirs.
inline constexpr int kMaxSubscriptionBytes = 1024;

}  // namespace holdfast::link
