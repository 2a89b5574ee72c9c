// SPDX-License-Identifier: MIT
#include "estimator/link/subscriber.hpp"

#include <algorithm>
#include <array>
#include <cstring>
#include <zmq.hpp>

#include "estimator/link/options.hpp"
#include "estimator/link/watch_peer.hpp"

namespace holdfast::link {

using Clock = std::chrono::steady_clock;
using std::chrono::milliseconds;

namespace {

constexpr const char* kMonitorEndpoint = "inproc://monitor";
constexpr int kWatched = ZMQ_EVENT_HANDSHAKE_SUCCEEDED | ZMQ_EVENT_DISCONNECTED | ZMQ_EVENT_CONNECT_RETRIED;

}  // namespace

struct Subscriber::Socket {
    zmq::context_t context;
    zmq::socket_t socket{context, zmq::socket_type::sub};
    zmq::socket_t monitor{context, zmq::socket_type::pair};
    std::string endpoint;
    zmq::message_t message;
    SubscriberCounters counters;
    bool connected = false;
    std::optional<Clock::time_point> redial_at;

    void set_up(const std::vector<Topic>& topics) {
        socket.set(zmq::sockopt::rcvhwm, kReceiveQueue);
        socket.set(zmq::sockopt::linger, 0);  // a subscriber has nothing to say that somebody would miss
        socket.set(zmq::sockopt::maxmsgsize, static_cast<std::int64_t>(kMaxWireBytes));
        watch_peer(socket.handle(), kUnacknowledged_ms);
        socket.set(zmq::sockopt::reconnect_ivl, kReconnectLeast_ms);
        socket.set(zmq::sockopt::reconnect_ivl_max, kReconnectMost_ms);
        socket.set(zmq::sockopt::connect_timeout, kConnectTimeout_ms);
        socket.set(zmq::sockopt::handshake_ivl, kHandshakeTimeout_ms);
        for (const Topic topic : topics) socket.set(zmq::sockopt::subscribe, name(topic));
        if (zmq_socket_monitor(socket.handle(), kMonitorEndpoint, kWatched) != 0) throw zmq::error_t();
        monitor.set(zmq::sockopt::linger, 0);
        monitor.connect(kMonitorEndpoint);
        socket.connect(endpoint);
    }

    // An event has two parts: its number (u16) and value, and the endpoint.
    void watch_connection() {
        zmq::message_t event;
        zmq::message_t address;
        while (monitor.recv(event, zmq::recv_flags::dontwait)) {
            (void)monitor.recv(address);
            std::uint16_t what = 0;
            std::memcpy(&what, event.data(), sizeof what);
            if (what == ZMQ_EVENT_HANDSHAKE_SUCCEEDED) {
                ++counters.connects;
                connected = true;
                redial_at.reset();
            } else if (what == ZMQ_EVENT_DISCONNECTED) {
                counters.disconnects += connected ? 1 : 0;
                connected = false;
                redial_at = Clock::now() + milliseconds{kRedialAfter_ms};
            } else {
                redial_at.reset();  // ZeroMQ dials again by itself
            }
        }
        if (redial_at && Clock::now() >= *redial_at) {
            try {
                socket.disconnect(endpoint);
            } catch (const zmq::error_t&) {
                // It has forgotten the endpoint already: what we want.
            }
            socket.connect(endpoint);
            redial_at.reset();
        }
    }

    // Nothing there, or nothing that can be used; `there` tells which.
    std::optional<Message> take(bool& there) {
        there = socket.recv(message, zmq::recv_flags::dontwait).has_value();
        if (!there) return std::nullopt;
        const auto topic = topic_named(message.to_string_view());
        std::size_t parts = 1;
        while (message.more()) {
            (void)socket.recv(message);
            ++parts;
        }
        if (topic && parts == 2) return Message{*topic, message.to_string_view()};
        ++counters.malformed;
        return std::nullopt;
    }

    // Until a message or an event of the connection is there, or the time is over. False: a signal came.
    bool wait(milliseconds timeout) {
        if (redial_at) timeout = std::min(timeout, milliseconds{kRedialAfter_ms});
        std::array<zmq::pollitem_t, 2> items{
            {{socket.handle(), 0, ZMQ_POLLIN, 0}, {monitor.handle(), 0, ZMQ_POLLIN, 0}}};
        try {
            zmq::poll(items.data(), items.size(), timeout);
        } catch (const zmq::error_t& error) {
            if (error.num() != EINTR) throw;
            return false;
        }
        return true;
    }
};

proto::Result<Subscriber> Subscriber::connect(const std::string& endpoint, const std::vector<Topic>& topics) {
    try {
        auto socket = std::make_unique<Socket>();
        socket->endpoint = endpoint;
        socket->set_up(topics);
        return Subscriber(std::move(socket));
    } catch (const zmq::error_t& error) {
        return proto::Error{.message = "cannot subscribe to " + endpoint + ": " + error.what() +
                                       " (expected an address such as tcp://127.0.0.1:5570)"};
    }
}

Subscriber::Subscriber(std::unique_ptr<Socket> socket) : socket_(std::move(socket)) {}
Subscriber::~Subscriber() = default;
Subscriber::Subscriber(Subscriber&&) noexcept = default;
Subscriber& Subscriber::operator=(Subscriber&&) noexcept = default;

bool Subscriber::connected() const {
    return socket_->connected;
}
const SubscriberCounters& Subscriber::counters() const {
    return socket_->counters;
}

std::optional<Message> Subscriber::receive(milliseconds timeout) {
    const auto until = Clock::now() + timeout;
    auto left = timeout;
    do {
        socket_->watch_connection();
        bool there = false;
        if (const auto message = socket_->take(there)) return message;
        if (!there && !socket_->wait(left)) return std::nullopt;
        left = std::chrono::ceil<milliseconds>(until - Clock::now());
    } while (left.count() > 0);
    bool there = false;
    return socket_->take(there);
}

}  // namespace holdfast::link
