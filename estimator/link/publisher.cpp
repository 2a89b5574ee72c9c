// SPDX-License-Identifier: MIT
#include "estimator/link/publisher.hpp"

#include <array>
#include <zmq.hpp>

#include "estimator/link/options.hpp"
#include "estimator/link/watch_peer.hpp"

namespace holdfast::link {

using Clock = std::chrono::steady_clock;
using std::chrono::milliseconds;

struct Publisher::Socket {
    zmq::context_t context;
    zmq::socket_t socket{context, zmq::socket_type::xpub};
    PublisherOptions options;
    std::string endpoint;
    PublisherCounters counters;
    std::array<std::size_t, kTopicCount> subscribers{};

    void set_up() {
        const bool waits = options.when_full == WhenFull::wait;
        socket.set(zmq::sockopt::sndhwm, waits ? kSendQueueWaiting : kSendQueueDropping);
        socket.set(zmq::sockopt::linger, waits ? kLingerWaiting_ms : kLingerDropping_ms);
        watch_peer(socket.handle(), waits ? static_cast<int>(options.patience.count()) : kUnacknowledged_ms);
        socket.set(zmq::sockopt::handshake_ivl, kHandshakeTimeout_ms);
        socket.set(zmq::sockopt::maxmsgsize, std::int64_t{kMaxSubscriptionBytes});
        // Every subscription and its end is told, not only the first and the last, so that they can be
        // counted.
        socket.set(zmq::sockopt::xpub_verboser, true);
        // A full queue is told rather than passed over; what to do about it is decided in send().
        socket.set(zmq::sockopt::xpub_nodrop, true);
        socket.bind(options.endpoint);
        endpoint = socket.get(zmq::sockopt::last_endpoint);
    }

    // False: a queue is full, for `patience` where that is asked for. A signal is an error_t of EINTR.
    bool put(std::string_view topic, std::string_view message, milliseconds patience) {
        socket.set(zmq::sockopt::sndtimeo, static_cast<int>(patience.count()));
        if (!socket.send(zmq::buffer(topic), zmq::send_flags::sndmore)) return false;
        // Once the first part is taken the second one has its place.
        return socket.send(zmq::buffer(message), zmq::send_flags::none).has_value();
    }

    SendResult send_dropping(std::string_view topic, std::string_view message) {
        if (put(topic, message, milliseconds{0})) return SendResult::sent;
        socket.set(zmq::sockopt::xpub_nodrop, false);
        put(topic, message, milliseconds{0});
        socket.set(zmq::sockopt::xpub_nodrop, true);
        ++counters.overflows;
        return SendResult::overflowed;
    }

    SendResult send_waiting(std::string_view topic, std::string_view message) {
        try {
            if (put(topic, message, options.patience)) return SendResult::sent;
        } catch (const zmq::error_t& error) {
            if (error.num() == EINTR) return SendResult::interrupted;
            throw;
        }
        ++counters.stalls;
        return SendResult::stalled;
    }

    // A subscription is a byte 1, its end a byte 0, then what the topics it is for begin with.
    void count_subscriptions() {
        zmq::message_t message;
        while (socket.recv(message, zmq::recv_flags::dontwait)) {
            const std::string_view text = message.to_string_view();
            if (text.empty()) continue;
            for (std::size_t topic = 0; topic < kTopicCount; ++topic) {
                if (!name(static_cast<Topic>(topic)).starts_with(text.substr(1))) continue;
                if (text[0] == 1) ++subscribers[topic];
                if (text[0] == 0 && subscribers[topic] > 0) --subscribers[topic];
            }
        }
    }
};

proto::Result<Publisher> Publisher::bind(const PublisherOptions& options) {
    try {
        auto socket = std::make_unique<Socket>();
        socket->options = options;
        socket->set_up();
        return Publisher(std::move(socket));
    } catch (const zmq::error_t& error) {
        return proto::Error{.message = "cannot publish on " + options.endpoint + ": " + error.what() +
                                       " (expected an address of this machine such as tcp://127.0.0.1:5570)"};
    }
}

Publisher::Publisher(std::unique_ptr<Socket> socket) : socket_(std::move(socket)) {}
Publisher::~Publisher() = default;
Publisher::Publisher(Publisher&&) noexcept = default;
Publisher& Publisher::operator=(Publisher&&) noexcept = default;

const std::string& Publisher::endpoint() const {
    return socket_->endpoint;
}
const PublisherCounters& Publisher::counters() const {
    return socket_->counters;
}

SendResult Publisher::send(Topic topic, std::string_view message) {
    socket_->count_subscriptions();  // else they would pile up
    const SendResult result = socket_->options.when_full == WhenFull::drop
                                  ? socket_->send_dropping(name(topic), message)
                                  : socket_->send_waiting(name(topic), message);
    if (result == SendResult::sent) ++socket_->counters.sent;
    return result;
}

std::size_t Publisher::subscribers(Topic topic) {
    socket_->count_subscriptions();
    return socket_->subscribers[static_cast<std::size_t>(topic)];
}

bool Publisher::wait_for_subscribers(Topic topic, std::size_t count, milliseconds timeout) {
    const auto until = Clock::now() + timeout;
    while (subscribers(topic) < count) {
        const auto left = std::chrono::ceil<milliseconds>(until - Clock::now());
        if (left.count() <= 0) return false;
        zmq::pollitem_t item{socket_->socket.handle(), 0, ZMQ_POLLIN, 0};
        try {
            zmq::poll(&item, 1, left);
        } catch (const zmq::error_t& error) {
            if (error.num() == EINTR) return false;
            throw;
        }
    }
    return true;
}

}  // namespace holdfast::link
