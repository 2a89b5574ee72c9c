// SPDX-License-Identifier: MIT
// The sending end: binds, and sends to whoever has subscribed.
#pragma once

#include <chrono>
#include <cstdint>
#include <memory>
#include <string>
#include <string_view>

#include "estimator/link/topic.hpp"
#include "proto/result.hpp"

namespace holdfast::link {

// What happens when a subscriber takes messages slower than they come.
enum class WhenFull : std::uint8_t {
    drop,  // it loses messages, and notices by the sequence numbers; the sender and the others do not feel it
    wait,  // the sender waits for it: nothing is lost. For replays; a live car does not wait
};

enum class SendResult : std::uint8_t {
    sent,         // or nobody has subscribed
    overflowed,   // drop: at least one subscriber's queue was full; the others have it
    stalled,      // wait: a subscriber has taken nothing for `patience`; nobody has it
    interrupted,  // wait: a signal came; nobody has it
};

struct PublisherOptions {
    std::string endpoint;  // "tcp://127.0.0.1:5570"; port * for any free one
    WhenFull when_full = WhenFull::drop;
    std::chrono::milliseconds patience{30'000};
};

struct PublisherCounters {
    std::uint64_t sent = 0;
    std::uint64_t overflows = 0;  // times a queue was found full; the subscriber itself counts what it lost
    std::uint64_t stalls = 0;
};

class Publisher {
  public:
    [[nodiscard]] static proto::Result<Publisher> bind(const PublisherOptions& options);
    ~Publisher();  // waits a while for queued messages to leave (options.hpp)
    Publisher(Publisher&&) noexcept;
    Publisher& operator=(Publisher&&) noexcept;

    [[nodiscard]] const std::string& endpoint() const;  // with the port that was found

    SendResult send(Topic topic, std::string_view message);

    // Subscribers to a topic by now.
    [[nodiscard]] std::size_t subscribers(Topic topic);
    // False: the time is over, or a signal came.
    [[nodiscard]] bool wait_for_subscribers(Topic topic, std::size_t count,
                                            std::chrono::milliseconds timeout);

    [[nodiscard]] const PublisherCounters& counters() const;

  private:
    struct Socket;
    explicit Publisher(std::unique_ptr<Socket> socket);
    std::unique_ptr<Socket> socket_;
};

}  // namespace holdfast::link
