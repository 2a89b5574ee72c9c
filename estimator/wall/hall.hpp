// SPDX-License-Identifier: MIT
// What the server's connections share. This header, watching.hpp and visit.hpp see Boost.Beast and are
// included by server.cpp alone: Beast is slow to compile. Everything in them runs on the serving thread.
#pragma once

#include <boost/asio/io_context.hpp>
#include <boost/asio/ip/tcp.hpp>
#include <boost/asio/post.hpp>
#include <boost/asio/steady_timer.hpp>
#include <boost/beast/core.hpp>
#include <boost/beast/http.hpp>
#include <boost/beast/websocket.hpp>
#include <cstdint>
#include <mutex>
#include <set>
#include <string_view>
#include <utility>  // first: Boost 1.74 uses std::exchange without including it, which C++20 brings to light
#include <vector>

#include "estimator/wall/answer.hpp"
#include "estimator/wall/audience.hpp"
#include "estimator/wall/server.hpp"

namespace holdfast::wall {

namespace asio = boost::asio;
namespace beast = boost::beast;
namespace http = beast::http;
namespace websocket = beast::websocket;
using tcp = asio::ip::tcp;
using boost::system::error_code;

inline std::string_view view(beast::string_view text) {
    return {text.data(), text.size()};
}
inline beast::string_view view(std::string_view text) {
    return {text.data(), text.size()};
}

// What connections know of their server.
struct Hall {
    House house;
    ServerOptions options;
    Audience audience;
    std::set<class Watching*> watching;
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
