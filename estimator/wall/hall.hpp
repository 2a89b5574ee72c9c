// SPDX-License-Identifier: MIT
// What the server's connections share. Everything in it but the acknowledgements is the serving thread's own.
#pragma once

#include <cstddef>
#include <cstdint>
#include <mutex>
#include <set>
#include <utility>
#include <vector>

#include "estimator/wall/answer.hpp"
#include "estimator/wall/audience.hpp"
#include "estimator/wall/server.hpp"

namespace holdfast::wall {

// A viewer's connection: sends what the audience has for it, unless it is still sending.
class Pumped {
  public:
    virtual void pump() = 0;

  protected:
    virtual ~Pumped() = default;
};

// What connections know of their server.
struct Hall {
    House house;
    ServerOptions options;
    Audience audience;
    std::set<Pumped*> watching;
    std::vector<Viewer*> viewers;  // of those
    std::size_t connections = 0;
    ServerCounters counters;
    bool closing = false;  // whoever has been sent everything may go
    std::mutex acknowledged_mutex;
    std::vector<std::uint32_t> acknowledged;  // not yet taken; under its mutex
};

// Counts a connection for as long as it lives.
class Seat {
  public:
    explicit Seat(Hall& hall) : hall_(&hall) { ++hall_->connections; }
    Seat(Seat&& other) noexcept : hall_(std::exchange(other.hall_, nullptr)) {}
    Seat(const Seat&) = delete;
    Seat& operator=(const Seat&) = delete;
    Seat& operator=(Seat&&) = delete;
    ~Seat() {
        if (hall_ != nullptr) --hall_->connections;
    }

  private:
    Hall* hall_;
};

}  // namespace holdfast::wall
