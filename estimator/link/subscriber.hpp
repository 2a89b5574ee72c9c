// SPDX-License-Identifier: MIT
// The receiving end: connects, and goes on trying for as long as it lives.
#pragma once

#include <chrono>
#include <cstdint>
#include <memory>
#include <optional>
#include <string>
#include <string_view>
#include <vector>

#include "estimator/link/topic.hpp"
#include "proto/result.hpp"

namespace holdfast::link {

struct Message {
    Topic topic = Topic::frames;
    std::string_view bytes;
};

struct SubscriberCounters {
    std::uint64_t connects = 0;
    std::uint64_t disconnects = 0;  // an oversize message makes one too: it is refused with its connection
    std::uint64_t malformed = 0;    // messages that are not a known topic and one more part
};

class Subscriber {
  public:
    // An error: no such kind of endpoint. That nobody is there is none.
    [[nodiscard]] static proto::Result<Subscriber> connect(const std::string& endpoint,
                                                           const std::vector<Topic>& topics);
    ~Subscriber();
    Subscriber(Subscriber&&) noexcept;
    Subscriber& operator=(Subscriber&&) noexcept;

    // The next message, good until the next call. Nothing: the time is over, or a signal came.
    [[nodiscard]] std::optional<Message> receive(std::chrono::milliseconds timeout);

    [[nodiscard]] bool connected() const;
    [[nodiscard]] const SubscriberCounters& counters() const;

  private:
    struct Socket;
    explicit Subscriber(std::unique_ptr<Socket> socket);
    std::unique_ptr<Socket> socket_;
};

}  // namespace holdfast::link
